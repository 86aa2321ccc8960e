package quantity

import (
	"sort"
	"strings"

	"github.com/xrash/smetrics"
)

// Near returns at most three of the candidates that resemble word, best first: those that differ
// only in case, then those within one edit (insertion, deletion or substitution of a byte, case
// ignored) per three bytes of word, at least one edit. Equal distances keep the order of candidates.
func Near(word string, candidates []string) []string {
	type scored struct {
		text string
		cost int
	}
	if len(word) > 64 { // no name is as long as that; keeps the cost of the table bounded
		return nil
	}
	lower := strings.ToLower(word)
	limit := max(1, len(word)/3)
	var hits []scored
	for _, c := range candidates {
		cost := smetrics.WagnerFischer(lower, strings.ToLower(c), 1, 1, 1)
		if cost <= limit && cost < len(c) {
			hits = append(hits, scored{c, cost})
		}
	}
	sort.SliceStable(hits, func(i, j int) bool { return hits[i].cost < hits[j].cost })
	var out []string
	for _, h := range hits {
		if len(out) == 3 || h.cost > hits[0].cost {
			break
		}
		out = append(out, h.text)
	}
	return out
}

// nearUnits suggests units for an unknown symbol.
func nearUnits(symbol string) []string {
	if m := mistaken(strings.ToLower(symbol)); m != nil {
		return m
	}
	return Near(symbol, common())
}

// gauge reports whether symbol is a common name of a pressure above the atmosphere: a unit of pressure
// followed by g or (g), in any case.
func gauge(symbol string) bool {
	lower := strings.ToLower(symbol)
	unit := strings.TrimSuffix(strings.TrimSuffix(strings.TrimSuffix(lower, "(g)"), "g"), "_")
	switch unit = strings.TrimSpace(unit); unit {
	case "bar", "mbar", "psi", "[psi]", "pa", "hpa", "kpa", "mpa", "atm":
		return unit != lower
	}
	return false
}
