package translate

// kind is a type of the subset.
type kind int

const (
	realKind kind = iota
	intKind
	boolKind
	arrayKind // [n]float64
	rowKind   // []float64, the constants
)

// variable is a parameter, a result or a local variable.
type variable struct {
	name string // as in Go
	kind kind
	size int // of an array
}

// function is a translated function. With named results it is a procedure, which returns
// them all; else it has one result without a name.
type function struct {
	name      string
	doc       string
	params    []variable
	results   []variable
	procedure bool
	locals    []variable
	body      []statement
	calls     []string // in order of appearance
}

// statement is one of the types below.
type statement any

type (
	comment struct{ text string }
	assign  struct {
		to    expression // name or index
		value expression
	}
	zero struct{ v variable } // sets an array to zero
	call struct {
		to   []expression // nil element: not wanted
		kind []variable   // of the results
		fn   string
		args []expression
	}
	branch struct {
		condition expression
		then, els []statement
	}
	loop struct {
		index      string
		from, past expression
		body       []statement
	}
	leave  struct{} // break
	finish struct{ value expression }
)

// expression is one of the types below.
type expression any

type (
	real    struct{ value float64 }
	integer struct{ value int64 }
	boolean struct{ value bool }
	name    struct{ variable }
	index   struct {
		array variable
		at    expression
	}
	binary struct {
		op   string // as in Go
		x, y expression
	}
	negative struct{ x expression }
	not      struct{ x expression }
	paren    struct{ x expression }
	apply    struct { // a function of the program
		fn   string
		args []expression
	}
	builtin struct { // of package math
		fn   string
		args []expression
	}
	truncate struct{ x expression } // int(x)
)
