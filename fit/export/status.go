package export

import (
	"errors"
	"strconv"

	"limsup/eos"
	"limsup/eos/nucleation"
	"limsup/fit/export/internal/kernel"
)

// statusOf is the status by which exported code reports an error of a prediction.
func statusOf(err error) int {
	var none *nucleation.NoLimitError
	var slow *nucleation.ConvergenceError
	var slower *eos.ConvergenceError
	switch {
	case errors.As(err, &none):
		return kernel.NoLimit
	case errors.As(err, &slow), errors.As(err, &slower):
		return kernel.NotConverged
	}
	return kernel.NoState
}

// number is the shortest decimal number that reads back the same.
func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
