package share

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"limsup/data/problem"
)

func TestParse(t *testing.T) {
	for _, tt := range []struct {
		text string
		want Share
		ok   bool
	}{
		{"1/1", Share{1, 1}, true}, {"2/8", Share{2, 8}, true}, {" 3 / 4 ", Share{3, 4}, true}, {"1000000/1000000", Share{Most, Most}, true},
		{"0/4", Share{}, false}, {"5/4", Share{}, false}, {"-1/4", Share{}, false}, {"1/0", Share{}, false}, {"1/1000001", Share{}, false},
		{"", Share{}, false}, {"3", Share{}, false}, {"1/2/3", Share{}, false}, {"1.5/2", Share{}, false}, {"a/b", Share{}, false},
		{"1/99999999999999999999", Share{}, false},
	} {
		got, err := Parse(tt.text)
		var bad *ShareError
		if got != tt.want || tt.ok != (err == nil) || !tt.ok && !errors.As(err, &bad) {
			t.Errorf("Parse(%q) = %v, %v", tt.text, got, err)
		}
	}
}

// TestRange checks by meaning that shares cover all jobs once, in order, evenly.
func TestRange(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		jobs, n := rapid.IntRange(0, 2000).Draw(t, "jobs"), rapid.IntRange(1, 300).Draw(t, "n")
		next := 0
		for k := 1; k <= n; k++ {
			first, last := Share{k, n}.Range(jobs)
			if size := last - first; first != next || size < jobs/n || size > (jobs+n-1)/n {
				t.Fatalf("share %d/%d of %d jobs: [%d, %d) after %d", k, n, jobs, first, last, next)
			}
			next = last
		}
		if next != jobs {
			t.Fatalf("%d of %d jobs", next, jobs)
		}
	})
	// The largest numbers stay within 64 bits.
	if first, last := (Share{Most, Most}).Range(1 << 40); last != 1<<40 || first >= last {
		t.Errorf("[%d, %d)", first, last)
	}
}

// set makes the parts of a computation of seven jobs that each return their number.
func set(n int) []*Part {
	var parts []*Part
	for k := 1; k <= n; k++ {
		p := &Part{Format: Format, Version: Version, Limsup: "v1", Architecture: "amd64", Kind: Compare, Share: Share{k, n}, Seed: 3, Jobs: 7,
			Plan: []Flag{{"folds", []string{"5"}}}, Inputs: []Input{NewInput("data", "drops.csv", []byte("fluid\n"))}, File: fmt.Sprintf("part-%d.json", k)}
		first, last := p.Range(p.Jobs)
		for j := first; j < last; j++ {
			p.Results = append(p.Results, json.RawMessage(fmt.Sprint(j)))
		}
		parts = append(parts, p)
	}
	return parts
}

func encoded(t testing.TB, p *Part) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := p.Encode(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// TestRoundTrip writes and reads parts, joins them in reverse, and finds results and
// contents in order.
func TestRoundTrip(t *testing.T) {
	for _, n := range []int{1, 2, 3, 7, 10} {
		var read []*Part
		for _, p := range set(n) {
			text := encoded(t, p)
			q, err := Decode(bytes.NewReader(text), p.File)
			if err != nil {
				t.Fatal(err)
			}
			if again := encoded(t, q); !bytes.Equal(again, text) {
				t.Errorf("%s changes when it is written again:\n%s\n%s", p.Share, text, again)
			}
			if has := bytes.Contains(text, []byte(`"content"`)); has != (p.K == 1) {
				t.Errorf("share %s carries the inputs: %v", p.Share, has)
			}
			read = append([]*Part{q}, read...)
		}
		w, err := Join(read, "v1")
		if err != nil {
			t.Fatal(err)
		}
		if got, _ := json.Marshal(w.Results); string(got) != "[0,1,2,3,4,5,6]" {
			t.Errorf("%d shares: %s", n, got)
		}
		if string(w.Inputs[0].Content) != "fluid\n" || w.Seed != 3 || w.Kind != Compare || len(w.Plan) != 1 {
			t.Errorf("%d shares: %+v", n, w)
		}
	}
}

func TestDecodeRefuses(t *testing.T) {
	good := string(encoded(t, set(2)[0]))
	for _, tt := range []struct{ name, text, says string }{
		{"nothing", "", "damaged or cut short"},
		{"cut short", good[:len(good)-10], "damaged or cut short"},
		{"more behind", good + "{}", "damaged or cut short"},
		{"other format", `{"format":"limsup-model","version":1}`, `its format is "limsup-model"`},
		{"later version", strings.Replace(good, `"version":1`, `"version":2`, 1), "version 2 of the format"},
		{"unknown key", strings.Replace(good, `"seed"`, `"host":"a","seed"`, 1), `unknown field "host"`},
		{"unknown kind", strings.Replace(good, `"kind":"compare"`, `"kind":"guess"`, 1), `kind "guess"`},
		{"no share", strings.Replace(good, `"share":1`, `"share":0`, 1), "share 0/2"},
		{"share beyond", strings.Replace(good, `"share":1`, `"share":3`, 1), "share 3/2"},
		{"a result lost", strings.Replace(good, "[0,1,2]", "[0,1]", 1), "2 results, where share 1/2 of 7 jobs has 3"},
		{"negative jobs", strings.Replace(good, `"jobs":7`, `"jobs":-7`, 1), "-7 jobs"},
		{"changed input", strings.Replace(good, `"content":"Z`, `"content":"a`, 1), "does not have its SHA-256"},
		{"bad hash", strings.Replace(good, `"sha256":"`, `"sha256":"x`, 1), "without role, name or SHA-256"},
		{"flag without value", strings.Replace(good, `["5"]`, `[]`, 1), `flag "folds"`},
		{"no version of limsup", strings.Replace(good, `"limsup_version":"v1"`, `"limsup_version":""`, 1), "no limsup version"},
		{"content elsewhere", strings.Replace(good, `"share":1,"of":2`, `"share":2,"of":2`, 1), ""},
	} {
		_, err := Decode(strings.NewReader(tt.text), "p.json")
		var bad *FormatError
		if !errors.As(err, &bad) || bad.File != "p.json" || !strings.Contains(err.Error(), tt.says) {
			t.Errorf("%s: %v", tt.name, err)
		}
	}
}

func TestEncodeRefuses(t *testing.T) {
	p := set(2)[0]
	p.Results = p.Results[:1]
	var bad *FormatError
	if err := p.Encode(&bytes.Buffer{}); !errors.As(err, &bad) {
		t.Errorf("a result is missing: %v", err)
	}
	p = set(2)[0]
	p.Results[0] = json.RawMessage("NaN")
	if err := p.Encode(&bytes.Buffer{}); !errors.As(err, &bad) {
		t.Errorf("a result that is not JSON: %v", err)
	}
}

// TestJoinRefuses names each part that is missing, doubled or foreign.
func TestJoinRefuses(t *testing.T) {
	change := func(k int, f func(p *Part)) func([]*Part) []*Part {
		return func(parts []*Part) []*Part {
			f(parts[k-1])
			return parts
		}
	}
	for _, tt := range []struct {
		name   string
		change func([]*Part) []*Part
		want   []string
	}{
		{"missing", func(p []*Part) []*Part { return []*Part{p[0], p[3]} }, []string{
			"share 2/4 is missing: run the command again with --share 2/4", "share 3/4 is missing: run the command again with --share 3/4"}},
		{"doubled", func(p []*Part) []*Part { q := *p[1]; q.File = "copy.json"; return append(p, &q) }, []string{
			"copy.json: share 2/4 is already there in part-2.json"}},
		{"doubled for missing", func(p []*Part) []*Part { p[2].Share = p[1].Share; return p }, []string{
			"part-3.json: share 2/4 is already there in part-2.json", "share 3/4 is missing: run the command again with --share 3/4"}},
		{"seed", change(1, func(p *Part) { p.Seed = 4 }), []string{
			"part-1.json: foreign part: seed 4, but 3 in part-2.json", "share 1/4 is missing: run the command again with --share 1/4"}},
		{"plan", change(2, func(p *Part) { p.Plan = []Flag{{"folds", []string{"6"}}} }), []string{
			"part-2.json: foreign part: plan (--folds=6), but (--folds=5) in part-1.json", "share 2/4 is missing: run the command again with --share 2/4"}},
		{"data", change(3, func(p *Part) { p.Inputs[0].SHA256 = strings.Repeat("ab", 32) }), []string{
			"part-3.json: foreign part: data of SHA-256 " + strings.Repeat("ab", 32) + ", but " + set(1)[0].Inputs[0].SHA256 + " in part-1.json",
			"share 3/4 is missing: run the command again with --share 3/4"}},
		{"file name", change(3, func(p *Part) { p.Inputs[0].Name = "b.csv" }), []string{
			`part-3.json: foreign part: data file "b.csv", but "drops.csv" in part-1.json`, "share 3/4 is missing: run the command again with --share 3/4"}},
		{"more inputs", change(3, func(p *Part) { p.Inputs = append(p.Inputs, p.Inputs[0]) }), []string{
			"part-3.json: foreign part: number of inputs 2, but 1 in part-1.json", "share 3/4 is missing: run the command again with --share 3/4"}},
		{"version", change(4, func(p *Part) { p.Limsup = "v2" }), []string{
			"part-4.json: foreign part: limsup version v2, but v1 in part-1.json", "share 4/4 is missing: run the command again with --share 4/4"}},
		{"architecture", change(4, func(p *Part) { p.Architecture = "arm64" }), []string{
			"part-4.json: foreign part: architecture arm64, but amd64 in part-1.json", "share 4/4 is missing: run the command again with --share 4/4"}},
		{"kind", change(4, func(p *Part) { p.Kind = Bootstrap }), []string{
			"part-4.json: foreign part: kind bootstrap, but compare in part-1.json", "share 4/4 is missing: run the command again with --share 4/4"}},
		{"number of shares", func(p []*Part) []*Part { return append(p, set(3)[2]) }, []string{
			"part-3.json: foreign part: number of shares 3, but 4 in part-1.json"}},
		{"number of jobs", change(2, func(p *Part) { p.Jobs = 8 }), []string{
			"part-2.json: foreign part: number of jobs 8, but 7 in part-1.json", "share 2/4 is missing: run the command again with --share 2/4"}},
	} {
		_, err := Join(tt.change(set(4)), "v1")
		var all Problems
		if !errors.As(err, &all) {
			t.Errorf("%s: %v", tt.name, err)
			continue
		}
		if got, want := err.Error(), strings.Join(tt.want, "\n"); got != want {
			t.Errorf("%s:\n%s\nwant\n%s", tt.name, got, want)
		}
	}
	_, err := Join(set(2), "v2")
	var foreign *ForeignError
	if !errors.As(err, &foreign) || foreign.Where != "this program" {
		t.Errorf("another version joins: %v", err)
	}
	var missing *MissingError
	if _, err := Join(set(2)[:1], ""); !errors.As(err, &missing) || missing.Share != (Share{2, 2}) {
		t.Errorf("%v", err)
	}
	if _, err := Join(nil, ""); err == nil {
		t.Error("nothing was joined")
	}
}

// TestManyProblems cuts a long list.
func TestManyProblems(t *testing.T) {
	_, err := Join(set(200)[:1], "")
	if lines := strings.Split(err.Error(), "\n"); len(lines) != problem.Most+1 || lines[problem.Most] != "and 179 more" {
		t.Errorf("%d lines, the last %q", len(lines), lines[len(lines)-1])
	}
}

// FuzzDecode reads arbitrary text: no panic, and what is read is written the same.
func FuzzDecode(f *testing.F) {
	for _, p := range set(2) {
		f.Add(encoded(f, p))
	}
	f.Add([]byte(`{"format":"limsup-part","version":1,"share":1,"of":0}`))
	f.Fuzz(func(t *testing.T, text []byte) {
		p, err := Decode(bytes.NewReader(text), "p")
		if err != nil {
			return
		}
		again, err := Decode(bytes.NewReader(encoded(t, p)), "p")
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(encoded(t, again), encoded(t, p)) {
			t.Error("changes when it is written again")
		}
	})
}

func ExampleShare_Range() {
	for k := 1; k <= 3; k++ {
		s := Share{k, 3}
		first, last := s.Range(10)
		fmt.Printf("%s: jobs %d to %d\n", s, first, last-1)
	}
	// Output:
	// 1/3: jobs 0 to 2
	// 2/3: jobs 3 to 5
	// 3/3: jobs 6 to 9
}
