package main

import (
	"context"
	"errors"
	"io/fs"
	"strings"

	"limsup/cmd/limsup/internal/atomicfile"
	"limsup/cmd/limsup/internal/engine"
	"limsup/data/fluid"
	"limsup/data/measure"
	"limsup/data/quantity"
	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/eos/tension"
	"limsup/fit"
	"limsup/fit/design"
	"limsup/fit/design/campaign"
	"limsup/fit/export"
	"limsup/fit/modelfile"
	"limsup/validate"
	"limsup/validate/share"
)

// Exit statuses.
const (
	statusDone     = 0
	statusInternal = 1
	statusInput    = 2 // bad input or usage
	statusNoAnswer = 3 // a computation has no answer or did not converge
)

// usageError reports a command line that cannot be understood.
type usageError struct{ text string }

func (e *usageError) Error() string { return e.text }

// noAnswerError reports that a printed result is incomplete: some state has no
// answer. Its text is empty where the result says it all.
type noAnswerError struct{ text string }

func (e *noAnswerError) Error() string { return e.text }

// status maps an error to the exit status by its kind.
func status(err error) int {
	switch {
	case err == nil:
		return statusDone
	case errors.Is(err, context.Canceled):
		return statusInternal
	case is[*noAnswerError](err), is[*nucleation.NoLimitError](err), is[*nucleation.NotMetastableError](err),
		is[*nucleation.ConvergenceError](err), is[*nucleation.StateError](err), is[*tension.NonPositiveError](err), is[*eos.ConvergenceError](err),
		is[*eos.PhaseError](err), is[*fit.ConvergenceError](err):
		return statusNoAnswer
	case is[*usageError](err), is[*measure.Problem](err), is[measure.Problems](err), is[*quantity.Error](err),
		is[*fluid.UnknownError](err), is[*fluid.MissingError](err), is[*fluid.RangeError](err), is[*fluid.Problem](err), is[*modelfile.InvalidError](err), is[*modelfile.SyntaxError](err), is[*tension.ParameterError](err),
		is[*tension.RangeError](err), is[*fit.OptionError](err), is[*fit.TooFewError](err), is[*fit.UnavailableError](err),
		is[*eos.DomainError](err), is[*eos.ParameterError](err), is[*eos.UnknownEquationError](err),
		is[*share.ShareError](err), is[*share.FormatError](err), is[share.Problems](err), is[*validate.ResultError](err), is[*engine.TaskError](err),
		is[*export.OptionError](err), is[*export.UnsupportedError](err),
		is[*atomicfile.WriteError](err), is[*fs.PathError](err):
		return statusInput
	case is[*export.ToleranceError](err):
		return statusNoAnswer
	case is[*campaign.InputError](err), is[campaign.FileErrors](err), is[*design.InputError](err):
		return statusInput
	case is[*design.SingularError](err):
		return statusNoAnswer
	case is[*fit.RowError](err), is[*validate.FoldError](err):
		return statusNoAnswer
	}
	return statusInternal
}

func is[T error](err error) bool {
	var target T
	return errors.As(err, &target)
}

// describe is the text of an error for a person: several lines where a file has
// several problems, nothing twice, and nothing that steers a terminal.
func describe(err error) string {
	return brief(visible(strings.TrimRight(err.Error(), "\n")))
}
