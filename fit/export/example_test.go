package export_test

import (
	"bytes"
	"fmt"
	"strings"

	"limsup/data/fluid"
	"limsup/fit"
	"limsup/fit/export"
)

// The prototypes of a model in C.
func ExampleWrite() {
	lib, err := fluid.Builtin()
	if err != nil {
		fmt.Println(err)
		return
	}
	pentane, err := lib.Find("n-pentane")
	if err != nil {
		fmt.Println(err)
		return
	}
	model, err := fit.Untuned(fit.Variant{Equation: "peng-robinson", Limit: fit.Spinodal})
	if err != nil {
		fmt.Println(err)
		return
	}
	var source bytes.Buffer
	if err := export.Write(&source, export.C, model, export.Options{Records: []*fluid.Record{pentane}, Prefix: "lab_"}); err != nil {
		fmt.Println(err)
		return
	}
	for _, line := range strings.Split(source.String(), "\n") {
		if strings.HasPrefix(line, "int lab_") && strings.HasSuffix(line, ";") {
			fmt.Println(line)
		}
	}
	// Output:
	// int lab_fluid(const char *name);
	// int lab_self_test(void);
	// int lab_limit_temperature(int fluid, double pressure, double *temperature, double *uncertainty);
	// int lab_limit_anywhere(int fluid, double pressure, double *temperature, double *uncertainty);
	// int lab_spinodal_temperature(int fluid, double pressure, double *temperature);
	// int lab_saturation_temperature(int fluid, double pressure, double *temperature);
	// int lab_saturation_pressure(int fluid, double temperature, double *pressure);
	// int lab_pressure_at(int fluid, double temperature, double volume, double *pressure);
}
