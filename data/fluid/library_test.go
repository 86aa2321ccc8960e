package fluid_test

import (
	"bytes"
	"embed"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"path"
	"reflect"
	"strings"
	"testing"

	"limsup/data/fluid"
)

//go:embed library/*.toml
var committed embed.FS

func builtin(t testing.TB) *fluid.Library {
	t.Helper()
	l, err := fluid.Builtin()
	if err != nil {
		t.Fatal(err)
	}
	return l
}

func find(t testing.TB, name string) *fluid.Record {
	t.Helper()
	r, err := builtin(t).Find(name)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// Each committed file is what WriteTOML writes, below its opening comment, and each
// record survives TOML and JSON.
func TestCommittedRecordsRoundTrip(t *testing.T) {
	entries, err := committed.ReadDir("library")
	if err != nil {
		t.Fatal(err)
	}
	if len(entries) != 70 {
		t.Errorf("%d files, want 70", len(entries))
	}
	for _, e := range entries {
		text, err := committed.ReadFile(path.Join("library", e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		records, err := fluid.Parse(bytes.NewReader(text), e.Name())
		if err != nil || len(records) != 1 {
			t.Fatalf("%s: %d records, %v", e.Name(), len(records), err)
		}
		i := bytes.Index(text, []byte("[[fluid]]"))
		got, err := records[0].MarshalTOML()
		if err != nil || !bytes.Equal(got, text[i:]) {
			t.Errorf("%s: written anew it differs: %v", e.Name(), err)
		}
		asJSON, err := json.Marshal(records[0])
		if err != nil {
			t.Fatal(err)
		}
		var back fluid.Record
		if err := json.Unmarshal(asJSON, &back); err != nil {
			t.Fatal(err)
		}
		if !reflect.DeepEqual(&back, records[0]) {
			t.Errorf("%s: JSON does not give the same record back", e.Name())
		}
	}
}

func TestBuiltinIsComplete(t *testing.T) {
	l := builtin(t)
	if n := len(l.Keys()); n != 70 {
		t.Errorf("%d fluids, want 70", n)
	}
	for _, k := range []string{"isopentane", "methylcyclohexane", "r-152a", "1-pentene", "krypton", "acetone"} {
		if _, err := l.Find(k); err == nil {
			t.Errorf("%s is held out but was found", k)
		}
	}
	without := func(have bool, key string, allowed ...string) {
		if !have && !strings.Contains(" "+strings.Join(allowed, " ")+" ", " "+key+" ") {
			t.Errorf("%s lacks a property that it should have", key)
		}
	}
	for _, r := range l.All() {
		without(r.SurfaceTension != nil, r.Key, "hexafluorobenzene", "perfluorohexane")
		without(r.BoilingTemperature != nil, r.Key, "carbon-dioxide", "sulfur-hexafluoride")
		without(r.LiquidDensity != nil, r.Key, "hexafluorobenzene")
		without(r.VapourPressure != nil && r.CriticalDensity != nil && r.Hazard != "" && r.CAS != "" && r.Formula != "", r.Key)
		if w := r.Warnings(); len(w) > 0 {
			t.Errorf("%s: %v", r.Key, w)
		}
		for _, v := range []fluid.Value{r.MolarMass, r.CriticalTemperature, r.CriticalPressure, r.AcentricFactor} {
			if len(v.Source) < 20 {
				t.Errorf("%s: source %q", r.Key, v.Source)
			}
		}
	}
}

// No name leads to two records.
func TestNamesAreUnique(t *testing.T) {
	l := builtin(t)
	for _, r := range l.All() {
		for _, name := range append([]string{r.Key, r.Name, r.CAS, strings.ToUpper(r.Key), strings.ReplaceAll(r.Key, "-", " ")}, r.Aliases...) {
			got, err := l.Find(name)
			if err != nil || got != r {
				t.Errorf("Find(%q) = %v, %v; want %s", name, got, err, r.Key)
			}
		}
	}
}

func TestFind(t *testing.T) {
	l := builtin(t)
	for name, want := range map[string]string{
		"n-pentane": "n-pentane", "Pentane": "n-pentane", "N PENTANE": "n-pentane", "R134a": "r-134a", "109-66-0": "n-pentane",
		"2,2,4-Trimethylpentane": "isooctane", "H2O": "water", "r1234ze(E)": "r-1234ze(e)", "1,3-butadiene": "1,3-butadiene", "Diethyl ether": "diethyl-ether",
	} {
		if r, err := l.Find(name); err != nil || r.Key != want {
			t.Errorf("Find(%q) = %v, %v; want %s", name, r, err, want)
		}
	}
	for name, want := range map[string]string{
		"pentan": "n-pentane", "n-pentanee": "n-pentane", "R134b": "r-134a", "metanol": "methanol", "butadien": "1,3-butadiene", "trimethylpent": "isooctane", "wasser": "",
		"": "", "((": "", strings.Repeat("x", 1000): "",
	} {
		_, err := l.Find(name)
		var u *fluid.UnknownError
		if !errors.As(err, &u) {
			t.Fatalf("Find(%q): %v; want *UnknownError", name, err)
		}
		if got := strings.Join(u.Suggestions, " "); want != "" && !strings.Contains(" "+got+" ", " "+want+" ") {
			t.Errorf("Find(%q) suggests %q, want %s", name, got, want)
		}
		if len(u.Error()) > 300 {
			t.Errorf("Find(%q): error of %d bytes", name, len(u.Error()))
		}
	}
	if got := len(l.Search("")); got != 70 {
		t.Errorf("an empty search finds %d, want all", got)
	}
	var keys []string
	for _, r := range l.Search("C5H12") {
		keys = append(keys, r.Key)
	}
	if got := strings.Join(keys, " "); got != "n-pentane neopentane" {
		t.Errorf("Search(C5H12) = %s", got)
	}
}

// A user's record replaces one of the library, in a new library.
func TestWith(t *testing.T) {
	l := builtin(t)
	own := *find(t, "water")
	own.Key, own.Aliases = "N-Pentane", []string{"butane", "my own"}
	n := l.With(&own)
	if r, err := n.Find("pentane"); err == nil {
		t.Errorf("alias of the replaced record still finds %s", r.Key)
	}
	for name, want := range map[string]string{"n-pentane": "N-Pentane", "my own": "N-Pentane", "butane": "N-Pentane", "n-butane": "n-butane", "water": "water"} {
		if r, err := n.Find(name); err != nil || r.Key != want {
			t.Errorf("Find(%q) = %v, %v; want %s", name, r, err, want)
		}
	}
	if len(n.Keys()) != 70 {
		t.Errorf("%d keys, want 70", len(n.Keys()))
	}
	if r, err := l.Find("n-pentane"); err != nil || r.Key != "n-pentane" || r.CAS != "109-66-0" {
		t.Errorf("the library changed: %v, %v", r, err)
	}
}

func TestMissing(t *testing.T) {
	var m *fluid.MissingError
	if _, err := find(t, "perfluorohexane").Tension(); !errors.As(err, &m) || m.Fluid != "perfluorohexane" {
		t.Errorf("tension of perfluorohexane: %v; want *MissingError", err)
	}
	if _, err := find(t, "CO2").CorrespondingStates(); !errors.As(err, &m) || m.Property != "boiling temperature" {
		t.Errorf("corresponding states of carbon dioxide: %v; want *MissingError", err)
	}
	if _, _, ok := find(t, "1-butene").TensionRange(); ok {
		t.Error("1-butene has no stated range")
	}
	if lo, hi, ok := find(t, "n-pentane").TensionRange(); !ok || lo != 144.18 || hi != 469.67 {
		t.Errorf("range of n-pentane %g to %g, %v", lo, hi, ok)
	}
}

// Every surface tension of the library is positive and falls from the lower end of its
// range or Tr 0.4, whichever is higher, to where it says it ends.
func TestTensionsFall(t *testing.T) {
	for _, r := range builtin(t).All() {
		if r.SurfaceTension == nil {
			continue
		}
		f, err := r.Tension()
		if err != nil {
			t.Fatal(err)
		}
		tc := r.CriticalTemperature.Value
		if f.Tc() < 0.96*tc || f.Tc() > 1.01*tc {
			t.Errorf("%s: surface tension ends at %g K, Tc %g K", r.Key, f.Tc(), tc)
		}
		lo, _, _ := r.TensionRange()
		lo = math.Max(lo, 0.4*tc)
		last := math.Inf(1)
		for i := range 200 {
			T := lo + (f.Tc()-lo)*float64(i)/200
			s, slope, err := f.Sigma(T)
			if err != nil || s >= last || slope >= 0 {
				t.Errorf("%s: σ(%g K) = %g, slope %g, %v", r.Key, T, s, slope, err)
				break
			}
			last = s
		}
	}
}

func ExampleLibrary_Find() {
	l, err := fluid.Builtin()
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := l.Find("R134a")
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%s: %s, Tc = %g K\n", r.Key, r.Name, r.CriticalTemperature.Value)
	_, err = l.Find("pentan")
	fmt.Println(err)
	// Output:
	// r-134a: 1,1,1,2-tetrafluoroethane, Tc = 374.21 K
	// fluid "pentan": unknown; did you mean n-pentane?
}
