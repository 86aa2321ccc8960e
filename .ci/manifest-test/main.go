// Command manifest-test reads a Kubernetes manifest from standard input with a YAML
// parser, strictly, into the types of the Kubernetes API; checks the fields on which
// an Indexed Job depends; and runs the container's command in a folder, once for each
// index, as a node would. It is a module of its own, so that limsup does not depend on
// Kubernetes.
//
//	limsup share --engine kubernetes ... | manifest-test FOLDER
package main

import (
	"fmt"
	"io"
	"os"
	"os/exec"
	"strings"

	batch "k8s.io/api/batch/v1"
	core "k8s.io/api/core/v1"
	"sigs.k8s.io/yaml"
)

func main() {
	if err := run(); err != nil {
		fmt.Fprintln(os.Stderr, "manifest-test:", err)
		os.Exit(1)
	}
}

func run() error {
	text, err := io.ReadAll(os.Stdin)
	if err != nil {
		return err
	}
	var job batch.Job
	if err := yaml.UnmarshalStrict(text, &job); err != nil {
		return err
	}
	if len(os.Args) != 2 {
		return fmt.Errorf("want the folder that stands for the volume, not %q", os.Args[1:])
	}
	if err := check(&job); err != nil {
		return err
	}
	for index := range *job.Spec.Completions {
		if err := start(&job.Spec.Template.Spec.Containers[0], os.Args[1], index); err != nil {
			return fmt.Errorf("index %d: %w", index, err)
		}
	}
	return nil
}

// check tells which field is not as an Indexed Job needs it. Source: Kubernetes API
// reference, batch/v1 Job (from memory): completionMode Indexed needs completions and
// parallelism; podFailurePolicy needs restartPolicy Never and container names that exist.
func check(job *batch.Job) error {
	s, pod := &job.Spec, &job.Spec.Template.Spec
	switch {
	case job.APIVersion != "batch/v1" || job.Kind != "Job":
		return fmt.Errorf("%s %s", job.APIVersion, job.Kind)
	case job.Name == "":
		return fmt.Errorf("no name")
	case s.CompletionMode == nil || *s.CompletionMode != batch.IndexedCompletion:
		return fmt.Errorf("the completion mode is not Indexed")
	case s.Completions == nil || s.Parallelism == nil || *s.Completions < 1 || *s.Parallelism < 1 || *s.Parallelism > *s.Completions:
		return fmt.Errorf("completions %v, parallelism %v", s.Completions, s.Parallelism)
	case s.BackoffLimit == nil || *s.BackoffLimit < *s.Completions:
		return fmt.Errorf("backoff limit %v", s.BackoffLimit)
	case pod.RestartPolicy != core.RestartPolicyNever:
		return fmt.Errorf("restart policy %q", pod.RestartPolicy)
	case len(pod.Containers) != 1 || pod.Containers[0].Image == "":
		return fmt.Errorf("not one container with an image")
	}
	c := &pod.Containers[0]
	for _, rule := range s.PodFailurePolicy.Rules {
		if x := rule.OnExitCodes; x != nil && (x.ContainerName == nil || *x.ContainerName != c.Name) {
			return fmt.Errorf("a rule for a container that does not exist")
		}
	}
	if len(c.VolumeMounts) != 1 || len(pod.Volumes) != 1 || c.VolumeMounts[0].Name != pod.Volumes[0].Name || c.WorkingDir != c.VolumeMounts[0].MountPath {
		return fmt.Errorf("the container does not start in the volume")
	}
	if v := pod.Volumes[0].PersistentVolumeClaim; v == nil || v.ClaimName == "" || v.ReadOnly {
		return fmt.Errorf("no writable claim")
	}
	if q := c.Resources.Requests.Cpu(); q.IsZero() {
		return fmt.Errorf("no processors requested")
	}
	return nil
}

// start runs the container's command with the variables that it has there.
func start(c *core.Container, folder string, index int32) error {
	env := map[string]string{"JOB_COMPLETION_INDEX": fmt.Sprint(index)}
	for _, e := range c.Env {
		env[e.Name] = e.Value
	}
	var words []string
	for _, w := range append(append([]string{}, c.Command...), c.Args...) {
		words = append(words, expand(w, env))
	}
	x := exec.Command(words[0], words[1:]...)
	x.Dir, x.Stdout, x.Stderr = folder, os.Stdout, os.Stderr
	x.Env = os.Environ()
	for k, v := range env {
		x.Env = append(x.Env, k+"="+v)
	}
	return x.Run()
}

// expand replaces $(NAME) where NAME is set, and makes one of two dollar signs.
func expand(s string, env map[string]string) string {
	var b strings.Builder
	for i := 0; i < len(s); i++ {
		if s[i] == '$' && i+1 < len(s) {
			if s[i+1] == '$' {
				b.WriteByte('$')
				i++
				continue
			}
			if end := strings.IndexByte(s[i:], ')'); s[i+1] == '(' && end > 0 {
				if v, ok := env[s[i+2:i+end]]; ok {
					b.WriteString(v)
					i += end
					continue
				}
			}
		}
		b.WriteByte(s[i])
	}
	return b.String()
}
