package measure

import (
	"bytes"
	"fmt"
	"runtime"
	"strings"
	"testing"
	"unsafe"
)

// allocated returns the bytes that f allocates, whether or not they are kept.
func allocated(f func()) uint64 {
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	f()
	runtime.ReadMemStats(&after)
	return after.TotalAlloc - before.TotalAlloc
}

// A large file costs its rows once, not once more for every time a slice grows. Measured: 430 bytes per row of
// 248 bytes (the rest is the text of the record and the table of digests), against 1390 when the slice grew step
// by step.
func TestMemoryPerRow(t *testing.T) {
	const rows = 50000
	var file bytes.Buffer
	file.WriteString("fluid,temperature/K,pressure/kPa,method,diameter/mm,heating_rate/(K/s),run\n")
	for i := range rows {
		fmt.Fprintf(&file, "n-pentane,%.2f,101.325,droplet,1.2,2.5,%d\n", 420+float64(i%97)/100, i)
	}
	var s *Set
	perRow := allocated(func() {
		var err error
		if s, err = ReadCSV(&file, "d.csv", Options{}); err != nil {
			t.Fatal(err)
		}
	}) / rows
	if size := uint64(unsafe.Sizeof(Row{})); perRow > size*5/2 && !raceDetector {
		t.Errorf("%d bytes allocated per row, of %d bytes", perRow, size)
	}
	if len(s.Rows) != rows {
		t.Errorf("%d rows, want %d", len(s.Rows), rows)
	}
	if joined := allocated(func() { s, _ = Join(s) }); joined > 1<<16 && !raceDetector || len(s.Rows) != rows {
		t.Errorf("joining one set allocated %d bytes", joined)
	}
}

// Rows that come when the guess was too low are not lost, and neither a reader without a size nor one that lies
// about it does harm.
func TestGuessedSizes(t *testing.T) {
	long := head
	for i := range 2000 {
		long += fmt.Sprintf("n-pentane,%040.3f,101.325\n", 420+float64(i)/1000)
	}
	for i := range 9000 {
		long += fmt.Sprintf("water,%d,1\n", 500+i)
	}
	l := defaultLimits()
	l.rows = 20000 // also the most that is asked for at once
	for name, size := range map[string]int{"true": len(long), "short": 10, "long": 1 << 40} {
		s, err := readCSV(&sized{strings.NewReader(long), size}, "d.csv", Options{}, l)
		if err != nil || len(s.Rows) != 11000 || s.Rows[10999].Temperature != 9499 {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// sized claims a length.
type sized struct {
	*strings.Reader
	size int
}

func (s *sized) Len() int { return s.size }
