package main

import "testing"

func TestAuthors(t *testing.T) {
	for in, want := range map[string]string{
		"IAPWS":                                "IAPWS",
		"R. Span and W. Wagner":                "R. Span and W. Wagner",
		"Schmidt, R. and Wagner, W.":           "R. Schmidt and W. Wagner",
		"A. Mulero and I. Cachadina and B. Cc": "A. Mulero, I. Cachadina and B. Cc",
	} {
		if got := authors(in); got != want {
			t.Errorf("authors(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestExpand(t *testing.T) {
	c := citations{"A-1": "A, J. 1 (2001) 1", "B-2": "B, K. 2 (2002) 2"}
	for in, want := range map[string]string{
		"CoolProp: EOS A-1": "A, J. 1 (2001) 1; equation of state in " + coolProp,
		"CoolProp: EOS A-1,B-2 (saturation superancillary)": "A, J. 1 (2001) 1; B, K. 2 (2002) 2; saturation expansion of this equation of state in " + coolProp,
		"CoolProp: Fit of C (1990); range from chemicals":   "Fit of C (1990); by way of " + coolProp + ", range by way of " + chemicals,
		"chemicals: DIPPR105 (Perry 8th ed.)":               "DIPPR105 (Perry 8th ed.); by way of " + chemicals,
		"computed from adopted Tc, Pc and chemicals: X (Y)": "computed from the critical point and the vapour pressure, X (Y), by way of " + chemicals,
	} {
		if got, err := c.expand(in); err != nil || got != want {
			t.Errorf("expand(%q) = %q, %v; want %q", in, got, err, want)
		}
	}
	for _, in := range []string{"", "memory", "CoolProp: EOS C-3", "CoolProp: EOS A-1 (guess)", "made up and chemicals: X", "other: X"} {
		if got, err := c.expand(in); err == nil {
			t.Errorf("expand(%q) = %q, want an error", in, got)
		}
	}
}

func TestNaming(t *testing.T) {
	for in, want := range map[string]string{"CCl2F2": "CCl2F2", "CF2H2": "CH2F2", "C2F4H2": "C2H2F4", "H3N": "H3N", "O2S": "O2S", "CClH3": "CH3Cl", "C2Cl2F3H": "C2HCl2F3"} {
		if got := hill(in); got != want {
			t.Errorf("hill(%s) = %s, want %s", in, got, want)
		}
	}
	for in, want := range map[string]string{"1,3-butadiene": "1-3-butadiene.toml", "r-1234ze(e)": "r-1234ze-e.toml", "water": "water.toml"} {
		if got := fileName(in); got != want {
			t.Errorf("fileName(%s) = %s, want %s", in, got, want)
		}
	}
}
