package design

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"
)

// Single is a candidate as the only next measurement.
type Single struct {
	Candidate int
	Value     float64 // Φ after it
	Gain      float64 // share by which it lowers the mean standard uncertainty, 0 to 1
}

// Rank orders the candidates by what each would leave as the only next
// measurement, the best first; equals stay in their order.
//
// Errors: *InputError; *SingularError where the prior does not determine the
// parameters.
func (q *Problem) Rank() ([]Single, error) {
	r, err := q.prepare()
	if err != nil {
		return nil, err
	}
	s, ok := newState(r.kind, r.a, r.prior)
	if !ok {
		return nil, &SingularError{Parameters: r.p}
	}
	out := make([]Single, len(r.f))
	for i, f := range r.f {
		v := s.after(f)
		out[i] = Single{i, v, math.Max(0, -math.Expm1(v-s.value))}
	}
	slices.SortStableFunc(out, func(a, b Single) int {
		switch {
		case better(a.Value, b.Value):
			return -1
		case better(b.Value, a.Value):
			return 1
		}
		return a.Candidate - b.Candidate
	})
	return out, nil
}

// Step is one member of a batch, in the order in which to measure: a campaign that
// ends early loses least.
type Step struct {
	Candidate int
	// Value is Φ after this step. Where the steps so far and the prior do not determine
	// the parameters, Determined is false and Value is 0.
	Value      float64
	Determined bool
}

// Batch is a choice of n measurements.
type Batch struct {
	Evaluation
	Steps []Step
	Count []int // per candidate
	// Greedy is Φ before the exchanges; Exchanges is their number.
	Greedy    float64
	Exchanges int
	// Bound is a Φ that no batch of as many measurements falls below; −Inf where the
	// tangent at this batch gives none.
	Bound float64
}

// Slack is the share of the mean standard uncertainty that, at most, a better batch
// of as many measurements could save, 0 to 1.
func (b *Batch) Slack() float64 { return math.Max(0, -math.Expm1(b.Bound-b.Value)) }

// tie is the difference of Φ below which two choices count as equal, some hundred
// times the rounding of Φ in problems of condition 1e6; measured on the tests of
// this package.
const tie = 1e-9

func better(a, b float64) bool { return a < b-tie }

// ridge is the share of the information of all candidates together that stands in
// for a prior while the first members of a batch are found. It is so small that
// it decides nothing that the members themselves decide.
const ridge = 1e-7

// maxPasses bounds the exchanges; each pass looks at every member once.
const maxPasses = 100

// Choose returns a batch of n measurements.
//
// Errors: *InputError; *SingularError where n measurements and the prior do not
// determine the parameters.
func (q *Problem) Choose(n int) (*Batch, error) {
	r, err := q.prepare()
	if err != nil {
		return nil, err
	}
	room := 0
	for _, m := range r.most {
		room += min(m, n)
	}
	if n < 1 || room < n {
		return nil, &InputError{"batch", fmt.Sprintf("1 to %d measurements, as many as the candidates allow, not %d", room, n)}
	}
	start := r.prior
	if invert(start) == nil {
		start = mat.NewSymDense(r.p, nil)
		start.ScaleSym(ridge, r.total)
		start.AddSym(start, r.prior)
	}
	starts := [][]int{r.greedy(start, n, nil), spaced(r, n)}
	for _, first := range spaced(r, min(len(r.f), seeds(len(r.f), n))) {
		starts = append(starts, r.greedy(start, n, []int{first}))
	}
	var best *search
	for _, members := range starts {
		s := &search{r: r, start: start, n: n, members: members}
		if !s.exchange() {
			continue
		}
		if best == nil || better(s.value, best.value) {
			best = s
		}
	}
	if best == nil {
		return nil, &SingularError{Measurements: n, Parameters: r.p}
	}
	return best.batch()
}

// seeds is the number of further starts, each with another first member: as many as
// there are candidates in small problems, few in large ones, where a start costs
// about n passes over all candidates.
func seeds(candidates, n int) int { return min(24, max(2, 100_000/(candidates*n))) }

// Spaced is the plain alternative to a chosen batch: n measurements spread evenly
// over the candidates in their order, as counts.
func (q *Problem) Spaced(n int) ([]int, error) {
	r, err := q.prepare()
	if err != nil {
		return nil, err
	}
	if n < 1 {
		return nil, &InputError{"batch", "1 measurement or more"}
	}
	count := make([]int, len(r.f))
	for _, i := range spaced(r, n) {
		count[i]++
	}
	return count, nil
}

// spaced takes the middle of each of n equal parts of the list.
func spaced(r *prepared, n int) []int {
	out := make([]int, 0, n)
	count := make([]int, len(r.f))
	for i := range n {
		at := (2*i + 1) * len(r.f) / (2 * n)
		for count[at] >= r.most[at] { // full: the next one with room
			at = (at + 1) % len(r.f)
		}
		count[at]++
		out = append(out, at)
	}
	return out
}

// search is a batch in the making.
type search struct {
	r         *prepared
	start     *mat.SymDense
	n         int
	members   []int
	value     float64
	before    float64 // Φ before the exchanges
	exchanges int
}

// greedy adds the best candidate to the members so far until there are n.
func (r *prepared) greedy(start *mat.SymDense, n int, members []int) []int {
	count := make([]int, len(r.f))
	for _, i := range members {
		count[i]++
	}
	for len(members) < n {
		s, ok := newState(r.kind, r.a, r.information(start, count))
		if !ok {
			return nil
		}
		at, _ := r.best(s, count)
		count[at]++
		members = append(members, at)
	}
	return members
}

// best is the candidate with room that leaves the least Φ.
func (r *prepared) best(s *state, count []int) (at int, value float64) {
	at = -1
	for i, f := range r.f {
		if count[i] >= r.most[i] {
			continue
		}
		if v := s.after(f); at < 0 || better(v, value) {
			at, value = i, v
		}
	}
	return at, value
}

func (s *search) count() []int {
	c := make([]int, len(s.r.f))
	for _, i := range s.members {
		c[i]++
	}
	return c
}

// exchange replaces members until none is worth it; false where the batch cannot
// be evaluated.
func (s *search) exchange() bool {
	if len(s.members) != s.n {
		return false
	}
	all, ok := newState(s.r.kind, s.r.a, s.r.information(s.start, s.count()))
	if !ok {
		return false
	}
	s.value, s.before = all.value, all.value
	for range maxPasses {
		changed := false
		for i, old := range s.members {
			count := s.count()
			count[old]--
			rest, ok := newState(s.r.kind, s.r.a, s.r.information(s.start, count))
			if !ok {
				continue
			}
			at, v := s.r.best(rest, count)
			if better(v, s.value) && at != old {
				s.members[i], s.value = at, v
				s.exchanges++
				changed = true
			}
		}
		if !changed {
			break
		}
	}
	return true
}

// least is the member of a batch, given as counts, whose loss costs least.
func (s *search) least(count []int) int {
	at, value := -1, 0.0
	for i, k := range count {
		if k == 0 {
			continue
		}
		if at < 0 {
			at, value = i, math.Inf(1)
		}
		count[i]--
		if st, ok := newState(s.r.kind, s.r.a, s.r.information(s.start, count)); ok && better(st.value, value) {
			at, value = i, st.value
		}
		count[i]++
	}
	return at
}

// batch judges a batch and puts its members in the order in which to measure: the
// last is the one that the batch would miss least, and so on backwards.
func (s *search) batch() (*Batch, error) {
	r := s.r
	b := &Batch{Count: s.count(), Greedy: s.before, Exchanges: s.exchanges}
	e, err := r.evaluate(b.Count, s.n)
	if err != nil {
		return nil, err
	}
	b.Evaluation = *e
	final, _ := newState(r.kind, r.a, r.information(r.prior, b.Count))
	most, sum := 0.0, 0.0
	for i, f := range r.f {
		g := final.pull(f)
		most = math.Max(most, g)
		sum += float64(b.Count[i]) * g
	}
	b.Bound = final.bound(s.n, sum, most)

	b.Steps = make([]Step, s.n)
	left := slices.Clone(b.Count)
	for k := s.n - 1; k >= 0; k-- {
		step := &b.Steps[k]
		if e, ok := newState(r.kind, r.a, r.information(r.prior, left)); ok {
			step.Value, step.Determined = e.value, true
		}
		step.Candidate = s.least(left)
		left[step.Candidate]--
	}
	return b, nil
}

// Next is the best candidate to add to a batch given as counts, or −1 where none has
// room.
//
// Errors: *InputError; *SingularError where the batch and the prior do not
// determine the parameters.
func (q *Problem) Next(count []int) (int, error) {
	r, err := q.prepare()
	if err != nil {
		return -1, err
	}
	if len(count) != len(r.f) {
		return -1, &InputError{"batch", fmt.Sprintf("%d counts", len(r.f))}
	}
	s, ok := newState(r.kind, r.a, r.information(r.prior, count))
	if !ok {
		return -1, &SingularError{Parameters: r.p}
	}
	at, _ := r.best(s, count)
	return at, nil
}
