// Package engine writes what existing engines need to run a command in shares: a job
// array for Slurm, an Indexed Job for Kubernetes. It writes text and talks to no
// engine.
package engine

import (
	"encoding/json"
	"fmt"
	"io"
	"regexp"
	"slices"
	"strings"
	"text/template"
	"unicode"
	"unicode/utf8"
)

// Names lists the engines.
func Names() []string { return []string{"slurm", "kubernetes"} }

// Task is a command in shares.
type Task struct {
	Command []string // of the program and without it: compare --data drops.csv
	Program string   // path of the program where it runs
	Parts   int      // number of shares
	CPUs    int      // processors for each share
	Memory  int      // MiB for each share; 0: as the engine has it
	Name    string   // of the job
	Folder  string   // of the parts

	Image string // of the container; Kubernetes only
	Claim string // name of the persistent volume claim with the files; Kubernetes only
}

// TaskError reports a setting that an engine does not take.
type TaskError struct {
	Setting string // as a flag: "parts"
	Value   string
	Want    string
}

func (e *TaskError) Error() string {
	return fmt.Sprintf("--%s %q: want %s", e.Setting, e.Value, e.Want)
}

// label is a DNS label (RFC 1123, section 2.1), which both engines take as a name.
var label = regexp.MustCompile(`^[a-z0-9]([-a-z0-9]{0,61}[a-z0-9])?$`)

// subdomain is a DNS subdomain of labels.
var subdomain = regexp.MustCompile(`^[a-z0-9]([-a-z0-9]*[a-z0-9])?(\.[a-z0-9]([-a-z0-9]*[a-z0-9])?)*$`)

// Write writes the text for an engine.
//
// Errors: *TaskError; those of w.
func Write(w io.Writer, engine string, t Task) error {
	if err := t.check(engine); err != nil {
		return err
	}
	return templates.ExecuteTemplate(w, engine, &t)
}

func (t *Task) check(engine string) error {
	bad := func(setting, value, want string) error { return &TaskError{setting, value, want} }
	for _, s := range slices.Concat(t.Command, []string{t.Program, t.Folder, t.Image}) {
		if !utf8.ValidString(s) || strings.ContainsFunc(s, odd) {
			return bad("command", s, "UTF-8 without control characters and line breaks")
		}
	}
	switch {
	case !slices.Contains(Names(), engine):
		return bad("engine", engine, strings.Join(Names(), " or "))
	case t.Parts < 1 || t.Parts > 100_000:
		return bad("parts", fmt.Sprint(t.Parts), "1 to 100000")
	case t.CPUs < 1 || t.CPUs > 1024:
		return bad("cpus", fmt.Sprint(t.CPUs), "1 to 1024")
	case t.Memory < 0 || t.Memory > 1<<30:
		return bad("memory", fmt.Sprint(t.Memory), "a number of MiB, 0 to 1073741824")
	case !label.MatchString(t.Name):
		return bad("name", t.Name, "lower-case letters, digits and inner hyphens, 63 at most")
	case t.Program == "":
		return bad("program", "", "the path of limsup where the shares run")
	case t.Folder == "" || strings.HasPrefix(t.Folder, "-"):
		return bad("folder", t.Folder, "a folder that does not begin with a hyphen")
	case engine != "kubernetes" && t.Image != "":
		return bad("image", t.Image, "no image for "+engine)
	case engine != "kubernetes" && t.Claim != "":
		return bad("claim", t.Claim, "no claim for "+engine)
	case engine == "kubernetes" && (t.Image == "" || strings.ContainsAny(t.Image, " \t")):
		return bad("image", t.Image, "the container image with limsup and a shell")
	case engine == "kubernetes" && !subdomain.MatchString(t.Claim):
		return bad("claim", t.Claim, "the name of the persistent volume claim that holds the measurements and takes the parts")
	}
	return nil
}

// odd characters are those that YAML 1.1 or 1.2 does not take as they are, or takes for
// the end of a line.
func odd(r rune) bool {
	return unicode.IsControl(r) || strings.ContainsRune("\u2028\u2029\ufeff\ufffe\uffff", r)
}

// plain is text that a shell takes as it is.
var plain = regexp.MustCompile(`^[A-Za-z0-9_@%+=:,./-]+$`)

// shell quotes text for a POSIX shell.
func shell(s string) string {
	if plain.MatchString(s) {
		return s
	}
	return "'" + strings.ReplaceAll(s, "'", `'\''`) + "'"
}

// yaml quotes text as a double-quoted scalar: every JSON string is one (YAML 1.2,
// section 1.3).
func yaml(s string) (string, error) {
	var b strings.Builder
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	if err := e.Encode(s); err != nil {
		return "", err
	}
	return strings.TrimSuffix(b.String(), "\n"), nil
}

// verbatim keeps Kubernetes from expanding $(NAME) in an argument: two dollar signs
// stand for one.
func verbatim(s string) string { return strings.ReplaceAll(s, "$", "$$") }

// line joins a command for a shell.
func line(words []string) string {
	quoted := make([]string, len(words))
	for i, w := range words {
		quoted[i] = shell(w)
	}
	return strings.Join(quoted, " ")
}

var templates = template.Must(template.New("").Funcs(template.FuncMap{"shell": shell, "yaml": yaml, "verbatim": verbatim, "line": line}).Parse(texts))

const texts = `
{{- define "slurm" -}}
#!/bin/sh
# limsup {{index .Command 0}} in {{.Parts}} shares, one for each task of a Slurm job array. With this text
# in FILE, and in the folder of the measurements:
#
#   sbatch FILE                       starts all shares
#   sbatch --array=2,5 FILE           repeats shares 2 and 5; their parts come out the same
#   {{shell .Program}} gather {{shell .Folder}}/part-*.json   joins the parts and prints the result
#
#SBATCH --job-name={{.Name}}
#SBATCH --array=1-{{.Parts}}
#SBATCH --ntasks=1
#SBATCH --cpus-per-task={{.CPUs}}
{{- if .Memory}}
#SBATCH --mem={{.Memory}}M
{{- end}}
#SBATCH --requeue
set -eu
share=${SLURM_ARRAY_TASK_ID:?is not set: start this script with sbatch}
export GOMAXPROCS={{.CPUs}}
mkdir -p {{shell .Folder}}
exec {{shell .Program}} {{line .Command}} --share "$share/{{.Parts}}" --out {{shell .Folder}}/part-"$share".json
{{end}}

{{- define "kubernetes" -}}
# limsup {{index .Command 0}} in {{.Parts}} shares, one for each index of a Kubernetes Indexed Job. The
# volume of the claim is mounted at /data, where the shares start; on several nodes it
# must allow writing by all of them (ReadWriteMany). With this text in FILE:
#
#   kubectl apply -f FILE             starts all shares; failed ones are started again
#   kubectl wait --for=condition=complete --timeout=24h job/{{.Name}}
#   {{shell .Program}} gather {{shell .Folder}}/part-*.json   joins the parts, where the volume can be read
apiVersion: batch/v1
kind: Job
metadata:
  name: {{yaml .Name}}
spec:
  completionMode: Indexed
  completions: {{.Parts}}
  parallelism: {{.Parts}}
  # A share that is lost, with its node for instance, is repeated; bad input (status 2)
  # fails the job at once, since repeating it does not help.
  backoffLimit: {{.Retries}}
  podFailurePolicy:
    rules:
      - action: FailJob
        onExitCodes:
          containerName: limsup
          operator: In
          values: [2]
      - action: Ignore
        onPodConditions:
          - type: DisruptionTarget
            status: "True"
  template:
    spec:
      restartPolicy: Never
      containers:
        - name: limsup
          image: {{yaml .Image}}
          workingDir: /data
          command:
            - /bin/sh
            - -euc
            - |
              share=$((JOB_COMPLETION_INDEX + 1))
              folder=$1 program=$2
              shift 2
              mkdir -p "$folder"
              exec "$program" "$@" --share "$share/{{.Parts}}" --out "$folder/part-$share.json"
            - share
            - {{yaml (verbatim .Folder)}}
            - {{yaml (verbatim .Program)}}
          args:
{{- range .Command}}
            - {{yaml (verbatim .)}}
{{- end}}
          env:
            - name: GOMAXPROCS
              value: "{{.CPUs}}"
          resources:
            requests:
              cpu: "{{.CPUs}}"
{{- if .Memory}}
              memory: "{{.Memory}}Mi"
            limits:
              memory: "{{.Memory}}Mi"
{{- end}}
          volumeMounts:
            - name: data
              mountPath: /data
      volumes:
        - name: data
          persistentVolumeClaim:
            claimName: {{yaml .Claim}}
{{end}}`

// Retries is how many failed pods a Job bears before it fails as a whole: three for
// each share.
func (t *Task) Retries() int { return 3 * t.Parts }
