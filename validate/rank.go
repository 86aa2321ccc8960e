package validate

import (
	"fmt"
	"sort"
	"strings"
)

// rank orders the entries by their error on left-out rows and says which of them the
// data cannot tell from the best: those whose difference from it is at most one
// standard error of the paired difference.
func (c *Comparison) rank() {
	for i := range c.Entries {
		e := &c.Entries[i]
		e.CVRMSE = rmse(e.left.e)
		e.CVSE, _ = e.left.differenceSE(nil)
	}
	sort.SliceStable(c.Entries, func(i, j int) bool { return c.Entries[i].CVRMSE < c.Entries[j].CVRMSE })
	if len(c.Entries) == 0 {
		return
	}
	best := &c.Entries[0]
	best.Tied = true
	for i := range c.Entries[1:] {
		e := &c.Entries[i+1]
		e.Difference = e.CVRMSE - best.CVRMSE
		var folds int
		e.DifferenceSE, folds = e.left.differenceSE(best.left.e)
		e.Tied = folds < 2 || e.Difference <= e.DifferenceSE
		if e.Tied && e.K < c.Entries[c.Simplest].K {
			c.Simplest = i + 1
		}
	}
	c.Verdict = c.verdict()
}

// verdict is the ranking in a sentence that respects ties.
func (c *Comparison) verdict() string {
	best := &c.Entries[0]
	if len(best.left.e) == 0 {
		return "No row boiled, so no variant can be preferred."
	}
	finished := ""
	if len(c.Unfinished) > 0 {
		finished = " among the finished"
	}
	s := fmt.Sprintf("Smallest error on left-out rows%s: %s, %.3g K ± %.2g K.", finished, best.Name, best.CVRMSE, best.CVSE)
	_, folds := best.left.differenceSE(nil)
	switch {
	case len(c.Entries) == 1:
		return s + " There is nothing to compare it with."
	case folds < 2:
		return s + " All rows belong to one fold, so nothing can be said about the differences."
	}
	s += c.ties()
	if folds < fewFolds {
		s += fmt.Sprintf(" With only %d folds the standard errors are themselves uncertain.", folds)
	}
	return s
}

// fewFolds is the number of folds below which a standard error is poorly known: from
// nine differences it has a relative uncertainty of 1/√(2·9), a quarter.
const fewFolds = 10

// ties names what cannot be told from the best.
func (c *Comparison) ties() string {
	var tied []string
	for i := range c.Entries[1:] {
		if e := &c.Entries[i+1]; e.Tied {
			tied = append(tied, e.Name)
		}
	}
	if len(tied) == 0 {
		next := &c.Entries[1]
		return fmt.Sprintf(" It is distinguishable from all others at one standard error; the next, %s, errs by %.2g K ± %.2g K more.", next.Name, next.Difference, next.DifferenceSE)
	}
	s := " Not distinguishable from it at one standard error: " + strings.Join(tied, "; ") + "."
	if c.Simplest == 0 {
		return s + " None of these has fewer parameters."
	}
	return s + fmt.Sprintf(" The one with the fewest parameters among these is %s.", c.Entries[c.Simplest].Name)
}
