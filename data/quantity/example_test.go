package quantity_test

import (
	"fmt"

	"limsup/data/quantity"
)

func ExampleParse() {
	q, err := quantity.Parse("147 degC")
	if err != nil {
		fmt.Println(err)
		return
	}
	T, err := q.In(quantity.Temperature)
	fmt.Println(q, "=", T, "K", err)
	// Output: 147 Cel = 420.15 K <nil>
}

func ExampleParseIn() {
	for _, s := range []string{"0.5 MPa", "0.5", "0.5 KPa", "3 barg"} {
		P, err := quantity.ParseIn(s, quantity.Pressure)
		fmt.Println(P, err)
	}
	// Output:
	// 500000 <nil>
	// 0 quantity "0.5": has no unit; expected a pressure in Pa, kPa, MPa, bar, atm or [psi]
	// 0 unit "KPa": unknown; did you mean kPa?
	// 0 unit "barg": is a gauge pressure; add the pressure of the atmosphere and give the absolute pressure
}

func ExampleUnit_DifferenceToSI() {
	u, err := quantity.ParseUnit("degC")
	fmt.Println(u, u.ToSI(1), u.DifferenceToSI(1), err)
	// Output: Cel 274.15 1 <nil>
}

func ExampleParseNumber() {
	fmt.Println(quantity.ParseNumber("420.9"))
	fmt.Println(quantity.ParseNumber("420,9"))
	// Output:
	// 420.9 <nil>
	// 0 number "420,9": has a comma; write the decimal mark as a point and leave out thousands separators
}
