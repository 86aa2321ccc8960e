package measure_test

import (
	"errors"
	"fmt"
	"strings"

	"limsup/data/measure"
)

func ExampleReadCSV() {
	file := `# n-pentane droplets in a host liquid
fluid,temperature/degC,u_temperature/degC,pressure/kPa,diameter/mm,heating_rate/(K/min)
n-pentane,147.5,0.5,101.325,1.2,60
`
	set, err := measure.ReadCSV(strings.NewReader(file), "drops.csv", measure.Options{})
	if err != nil {
		fmt.Println(err)
		return
	}
	r := set.Rows[0]
	fmt.Printf("%s %s: T = %.2f K, u(T) = %g K, P = %g Pa, V = %.3g m3, %g K/s, %v\n",
		r.At(), r.Fluid, r.Temperature, r.UTemperature, r.Pressure, r.Volume, r.HeatingRate, r.Outcome)
	// Output: drops.csv:3 n-pentane: T = 420.65 K, u(T) = 0.5 K, P = 101325 Pa, V = 9.05e-10 m3, 1 K/s, boiled
}

func ExampleProblems() {
	file := `fluid,temperature/K,pressure/kPa
n-pentane,"420,9",101.325
n-pentane,420.9,0
`
	_, err := measure.ReadCSV(strings.NewReader(file), "drops.csv", measure.Options{})
	fmt.Println(err)
	var problems measure.Problems
	fmt.Println(errors.As(err, &problems), len(problems))
	// Output:
	// drops.csv:2:11: temperature/K: number "420,9": has a comma; write the decimal mark as a point and leave out thousands separators
	// drops.csv:3:17: pressure/kPa: a pressure of 0 looks like a gauge reading; expected the absolute pressure (an open vessel has about 101.325 kPa)
	// true 2
}

func ExampleJoin() {
	read := func(name, file string) *measure.Set {
		set, err := measure.ReadCSV(strings.NewReader(file), name, measure.Options{})
		if err != nil {
			fmt.Println(err)
		}
		return set
	}
	all, err := measure.Join(
		read("monday.csv", "fluid,temperature/K,pressure/kPa\nn-pentane,420.9,101.325\n"),
		read("tuesday.csv", "fluid,temperature/Cel,pressure/bar\nn-hexane,182,1\n"),
	)
	fmt.Println(len(all.Rows), all.Rows[1].At(), err)
	// Output: 2 tuesday.csv:2 <nil>
}
