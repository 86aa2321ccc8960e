// Package measure reads measured superheat limits, one row per observation, from CSV files and XLSX workbooks.
//
// A text file is RFC 4180 CSV in UTF-8, with or without byte order mark, lines ended by LF or CRLF, lines
// that begin with # taken as comments. The header names each column as quantity/unit, the unit as
// package quantity reads it (UCUM):
//
//	column           Row field     SI      remarks
//	fluid            Fluid                 required
//	temperature/K    Temperature   K       required; Cel and [degF] as well
//	pressure/kPa     Pressure      Pa      required; absolute, negative for liquid under tension, never 0
//	u_temperature/K  UTemperature  K       standard uncertainty, > 0
//	u_pressure/kPa   UPressure     Pa      standard uncertainty, > 0
//	method, batch    Method, Batch         group names
//	diameter/mm      Volume        m³      πd³/6 of the droplet
//	volume/nL        Volume        m³      agrees with diameter within 1 %, if both are given
//	heating_rate/…   HeatingRate   K/s     as heating_rate/(K/s); needs a volume
//	holding_time/s   HoldingTime   s       needs a volume
//	lifetime/s       Lifetime      s       mean waiting time at constant state; needs a volume
//	flux/(m-3.s-1)   Flux          m⁻³s⁻¹  nucleation events per volume and time, where it is known
//	observed         Observed              temperature (default) or pressure
//	outcome          Outcome               boiled (default) or intact
//	source, provenance, note               text
//
// A row carries at most one of heating rate, holding time, lifetime and flux. An empty field is an
// absent value. Other columns are ignored and listed.
//
// Whatever cannot be read is a Problem with file, line and column, and all problems of a file come
// back together as Problems; no row is dropped for being wrong. Two kinds of row are left out and
// listed as Exclusion: one that repeats an earlier row in every column, and one with no entry at all. What
// can be read but looks doubtful is a Warning.
//
// # Workbooks
//
// One sheet holds the table, its header in the first row that is neither empty nor a comment; a row whose first
// filled cell is a text that begins with # is a comment. Numbers are taken as stored, with all digits, whatever
// their format shows. A formula counts with its stored result and is never computed; one without result is a
// Problem, and so are, in columns that are read, booleans, error values and dates (which spreadsheet programs
// tend to make of numbers), and merged cells. Rows and columns hidden on the screen are read like any other,
// with a Warning: leaving them out would make a result depend on a filter. Empty rows are passed over. Places
// name sheet and cell: "drops.xlsx:Sheet1!B7".
//
// A file that asks for absurd amounts (rows, columns, unpacked bytes, nesting) is refused with a LimitError.
//
// # What it will not do
//
// It does not guess a unit, turn gauge into absolute pressure, accept a decimal comma or convert
// encodings. It knows no fluid: names and liquid ranges are judged by functions the caller passes in
// Options.
package measure
