// Package caution holds the sentences that go with every number that somebody
// might use for design.
package caution

// Sentences are the cautions, in the order in which they are shown.
func Sentences() []string {
	return []string{
		"A predicted superheat limit is an estimate, not a safe operating limit.",
		"Impurities, dissolved gas, rough or hot surfaces, radiation and shocks make a liquid boil far below it, and a superheated liquid can explode.",
		"For any design, follow local codes and the practice of licensed professionals.",
	}
}

// Short is the one-line form, for the foot of a table.
func Short() string {
	return "Estimates, not safe operating limits: impurities, surfaces and shocks trigger boiling far below them. Follow local codes and licensed practice."
}
