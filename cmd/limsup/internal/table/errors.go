package table

import (
	"fmt"
	"strings"
)

// BadCellError reports a number cell that is not finite. Row counts from 0.
type BadCellError struct {
	Row    int
	Column string // Name of the column
	Value  float64
}

func (e *BadCellError) Error() string {
	return fmt.Sprintf("table row %d, column %q: %g is not a finite number", e.Row+1, e.Column, e.Value)
}

// KindError reports a cell whose kind does not suit its column. Row counts from 0.
type KindError struct {
	Row       int
	Column    string
	Got, Want Kind
}

func (e *KindError) Error() string {
	return fmt.Sprintf("table row %d, column %q: %s cell in %s column", e.Row+1, e.Column, e.Got, e.Want)
}

// ShapeError reports a row whose number of cells differs from the number of columns. Row counts from 0.
type ShapeError struct {
	Row, Cells, Columns int
}

func (e *ShapeError) Error() string {
	return fmt.Sprintf("table row %d: %d cells for %d columns", e.Row+1, e.Cells, e.Columns)
}

// ColumnError reports a column that cannot be rendered: no name, a name used twice, a field out of range.
type ColumnError struct {
	Column string
	Reason string
}

func (e *ColumnError) Error() string { return fmt.Sprintf("table column %q: %s", e.Column, e.Reason) }

// FormatError reports an unknown output format.
type FormatError struct {
	Format string
}

func (e *FormatError) Error() string {
	return fmt.Sprintf("format %q: not one of %s", e.Format, strings.Join(Formats(), ", "))
}

// NumberError reports a value that [Number] cannot print because it is not finite.
type NumberError struct {
	Value float64
}

func (e *NumberError) Error() string { return fmt.Sprintf("number %g: not finite", e.Value) }
