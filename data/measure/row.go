package measure

import "fmt"

// Observed says which of temperature and pressure is the reading at the limit; the other was set.
type Observed int

// What a row observes.
const (
	Temperature Observed = iota // the liquid was heated at the given pressure
	Pressure                    // the liquid was decompressed at the given temperature
)

// String returns the word used in files.
func (o Observed) String() string { return word(observedWords(), int(o)) }

// Outcome says how the observation ended.
type Outcome int

// How an observation ends.
const (
	Boiled Outcome = iota // the liquid boiled at the given state
	Intact                // the liquid reached the given state without boiling
)

// String returns the word used in files.
func (o Outcome) String() string { return word(outcomeWords(), int(o)) }

// Words of the files, in the order of the constants.
func observedWords() []string { return []string{"temperature", "pressure"} }
func outcomeWords() []string  { return []string{"boiled", "intact"} }

func word(words []string, i int) string {
	if i < 0 || i >= len(words) {
		return fmt.Sprintf("unknown (%d)", i)
	}
	return words[i]
}

// Row is one observation. Numbers are finite and in SI units; 0 is absent unless said otherwise.
type Row struct {
	File  string // as passed to the reader
	Line  int    // 1-based line of the file (row of the sheet) where the record begins
	Where string // place in a workbook, such as "Sheet1!A7"; empty for text files

	Fluid string // as written, trimmed
	Key   string // what Options.KnownFluid made of Fluid; Fluid itself without it

	Temperature, Pressure         float64 // K, > 0; Pa, absolute, not 0
	UTemperature, UPressure       float64 // standard uncertainties in K and Pa
	HasUTemperature, HasUPressure bool    // whether the row states them

	Method, Batch string
	Volume        float64 // m³
	HeatingRate   float64 // K/s
	HoldingTime   float64 // s
	Lifetime      float64 // mean waiting time, s
	Flux          float64 // m⁻³s⁻¹

	Observed Observed
	Outcome  Outcome

	Source, Provenance, Note string
}

// At names the place of the row: "drops.csv:12", or "drops.xlsx:Sheet1!A7".
func (r *Row) At() string { return place(r.File, r.Line, 0, r.Where) }

func place(file string, line, column int, where string) string {
	switch {
	case where != "":
		return file + ":" + where
	case column > 0:
		return fmt.Sprintf("%s:%d:%d", file, line, column)
	case line > 0:
		return fmt.Sprintf("%s:%d", file, line)
	}
	return file
}
