package modelfile_test

import (
	"bytes"
	"errors"
	"fmt"
	"strings"

	"limsup/data/fluid"
	"limsup/fit"
	"limsup/fit/modelfile"
)

// A model goes to a file and comes back ready to predict.
func Example() {
	library, err := fluid.Builtin()
	if err != nil {
		fmt.Println(err)
		return
	}
	pentane, err := library.Find("n-pentane")
	if err != nil {
		fmt.Println(err)
		return
	}
	model, err := fit.Untuned(fit.DefaultVariant(), fit.Setting{Name: fit.Threshold, Value: 11})
	if err != nil {
		fmt.Println(err)
		return
	}
	file, err := modelfile.New(model, []*fluid.Record{pentane}, modelfile.Meta{Version: "1.0.0"})
	if err != nil {
		fmt.Println(err)
		return
	}
	var b bytes.Buffer
	if err := file.Encode(&b); err != nil {
		fmt.Println(err)
		return
	}

	read, err := modelfile.Decode(&b, "lab.json")
	if err != nil {
		fmt.Println(err)
		return
	}
	again, records, err := read.Model()
	if err != nil {
		fmt.Println(err)
		return
	}
	before, err := model.Predict(fit.Query{Record: pentane, Pressure: 101325})
	if err != nil {
		fmt.Println(err)
		return
	}
	after, err := again.Predict(fit.Query{Record: records[0], Pressure: 101325})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(records[0].Key, after.Temperature == before.Temperature)
	// Output:
	// n-pentane true
}

func ExampleDecode() {
	_, err := modelfile.Decode(strings.NewReader(`{
  "format": "limsup-model",
  "version": 1,
  "equation": {"name": "suave"},
  "settings": [{"name": "threshold", "value": "12"}]
}`), "lab.json")
	var invalid *modelfile.InvalidError
	if errors.As(err, &invalid) {
		fmt.Println(invalid.Pointer)
	}
	fmt.Println(err)
	// Output:
	// /settings/0/value
	// lab.json: /settings/0/value: found "12", expected a number
}
