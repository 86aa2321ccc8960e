package measure

import (
	"fmt"
	"math"
	"strings"
)

// Limits of what passes without a Warning; facts of trade (common practice), not of physics.
const (
	coldest        = 150    // K; below it only cryogenic liquids boil
	coldestReduced = 0.7    // of the upper end of the liquid range; limits at positive pressure lie at 0.8 to 1
	largestDrop    = 20e-3  // m, diameter
	smallestDrop   = 1e-6   // m, diameter
	fastestDroplet = 1e4    // K/s, in a column of host liquid
	gaugeBand      = 1e3    // Pa, distance from 0 within which a gauge reading is likely
	widestReading  = 20     // K, standard uncertainty
	iceKelvin      = 273.15 // K at 0 Cel
)

// judge adds the warnings a row with trimmed fields deserves.
func (a *assembler) judge(r *Row, fields []string) {
	warn := func(kind, format string, args ...any) {
		a.doubts.add(kind, Warning{File: r.File, Line: r.Line, Where: r.Where, Text: printable(r.Fluid) + ": " + fmt.Sprintf(format, args...)})
	}
	a.judgeTemperature(r, warn)
	if math.Abs(r.Pressure) < gaugeBand {
		warn("gauge", "pressure %.4g Pa is within 1 kPa of zero; is it absolute?", r.Pressure)
	}
	if r.HasUTemperature && r.UTemperature > widestReading {
		warn("uncertainty", "standard uncertainty of %.4g K is very large", r.UTemperature)
	}
	if i := a.layout.field[diameterColumn]; i >= 0 && fields[i] != "" {
		switch d := math.Cbrt(6 / math.Pi * r.Volume); {
		case d > largestDrop:
			warn("large", "diameter %.4g mm is above 20 mm", 1e3*d)
		case d < smallestDrop:
			warn("small", "diameter %.4g um is below 1 um", 1e6*d)
		}
	}
	if r.HeatingRate > fastestDroplet && strings.Contains(strings.ToLower(r.Method), "droplet") {
		warn("fast", "heating rate %.4g K/s is above 10000 K/s, too fast for a droplet in a host liquid", r.HeatingRate)
	}
	if r.Observed == Pressure && r.HeatingRate > 0 {
		warn("heated decompression", "the pressure is observed but a heating rate is given")
	}
}

// judgeTemperature compares the temperature with the range of the liquid, if that is known.
func (a *assembler) judgeTemperature(r *Row, warn func(kind, format string, args ...any)) {
	T, unit := r.Temperature, a.layout.unit[temperatureColumn].String()
	low, high, known := 0.0, 0.0, false
	if a.options.LiquidRange != nil {
		low, high, known = a.options.LiquidRange(r.Key)
	}
	if !known {
		if unit == "K" && T < coldest {
			warn("cold", "%.6g K is very cold for a superheat limit; is the column in Cel?", T)
		}
		return
	}
	if T >= low && T <= high {
		if cold := coldestReduced * high; T < cold && r.Pressure > 0 {
			if unit == "K" && T+iceKelvin >= cold && T+iceKelvin <= high {
				warn("celsius "+r.Key, "%.6g K is below 0.7 of the upper end of the liquid range (%.6g K); is the column in Cel?", T, high)
			} else {
				warn("cool "+r.Key, "%.6g K is below 0.7 of the upper end of the liquid range (%.6g K), colder than superheat limits are known", T, high)
			}
		}
		return
	}
	inside := func(x float64) bool { return x >= low && x <= high }
	switch {
	case unit == "K" && inside(T+iceKelvin):
		warn("celsius "+r.Key, "%.6g K is below the liquid range (%.6g K to %.6g K); is the column in Cel?", T, low, high)
	case unit == "Cel" && inside(T-iceKelvin):
		warn("kelvin "+r.Key, "%.6g Cel is above the liquid range (%.6g K to %.6g K); is the column in K?", T-iceKelvin, low, high)
	case T < low:
		warn("below "+r.Key, "%.6g K is below the liquid range (%.6g K to %.6g K)", T, low, high)
	default:
		warn("above "+r.Key, "%.6g K is above the liquid range (%.6g K to %.6g K)", T, low, high)
	}
}
