package design

import (
	"fmt"
	"math"
)

// Repeats is what the repetition of one candidate brings.
type Repeats struct {
	// Mean[n] is the mean standard uncertainty exp Φ after n repeats, n from 0.
	Mean []float64
	// Enough is the smallest number of repeats after which one more lowers the mean
	// standard uncertainty by less than the asked share; 0 where the first does not
	// reach it. Bounded is set where the limit of the search came first.
	Enough  int
	Bounded bool
}

// Repeat follows a candidate through its repeats until one more lowers the mean
// standard uncertainty by less than the share stop, 0 < stop < 1, or most repeats
// are reached.
//
// Errors: *InputError; *SingularError where the prior does not determine the
// parameters.
func (q *Problem) Repeat(candidate int, stop float64, most int) (*Repeats, error) {
	r, err := q.prepare()
	if err != nil {
		return nil, err
	}
	if candidate < 0 || candidate >= len(r.f) {
		return nil, &InputError{"candidate", fmt.Sprintf("0 to %d", len(r.f)-1)}
	}
	if !(stop > 0 && stop < 1) || most < 1 {
		return nil, &InputError{"repeats", "a share between 0 and 1, and at least one repeat"}
	}
	most = min(most, r.most[candidate])
	count := make([]int, len(r.f))
	out := &Repeats{}
	for {
		s, ok := newState(r.kind, r.a, r.information(r.prior, count))
		if !ok {
			return nil, &SingularError{Measurements: count[candidate], Parameters: r.p}
		}
		out.Mean = append(out.Mean, math.Exp(s.value))
		if count[candidate] == most {
			out.Enough, out.Bounded = most, true
			return out, nil
		}
		if -math.Expm1(s.after(r.f[candidate])-s.value) < stop {
			out.Enough = count[candidate]
			return out, nil
		}
		count[candidate]++
	}
}
