package table_test

import (
	"fmt"
	"os"

	"limsup/cmd/limsup/internal/table"
)

func ExampleTable_Render() {
	t := table.Table{
		Columns: []table.Column{
			{Name: "fluid"},
			{Name: "temperature", Title: "T", Unit: "K", Kind: table.KindNumber, Digits: 5},
			{Name: "residual", Unit: "K", Kind: table.KindNumber, Digits: 2},
		},
		Rows: [][]table.Cell{
			{table.Text("n-pentane"), table.Num(419.25), table.Num(-0.125)},
			{table.Text("n-hexane"), table.Num(455).Note("outside the data"), table.Missing("not measured")},
		},
	}
	if err := t.Render(os.Stdout, table.Screen, table.Options{Width: 80}); err != nil {
		fmt.Println(err)
	}
	// Output:
	// fluid            T/K  residual/K
	// ────────────────────────────────
	// n-pentane  419.25          -0.12
	// n-hexane   455.00[a]        -[b]
	//
	// [a] outside the data
	// [b] not measured
}

func ExampleTable_JSONRows() {
	t := table.Table{
		Columns: []table.Column{{Name: "fluid"}, {Name: "temperature", Unit: "K", Kind: table.KindNumber}},
		Rows:    [][]table.Cell{{table.Text("n-pentane"), table.Num(419.25)}},
	}
	rows, err := t.JSONRows()
	fmt.Printf("{\"predictions\": %s}\n%v\n", rows, err)
	// Output:
	// {"predictions": [
	//   {"fluid": "n-pentane", "temperature_K": 419.25}
	// ]}
	// <nil>
}

func ExampleFacts_Render() {
	temperature, err := table.Number(419.2468, 5)
	if err != nil {
		fmt.Println(err)
	}
	facts := table.Facts{{Label: "limit", Value: temperature, Unit: "K"}, {Label: "fluid", Value: "n-pentane"}}
	if err := facts.Render(os.Stdout, 80); err != nil {
		fmt.Println(err)
	}
	// Output:
	// limit  419.25 K
	// fluid  n-pentane
}

func ExampleParagraph() {
	verdict := "No measurable gain: cross-validation cannot tell the tuned model from the untuned one."
	if err := table.Paragraph(os.Stdout, verdict, 50); err != nil {
		fmt.Println(err)
	}
	// Output:
	// No measurable gain: cross-validation cannot tell
	// the tuned model from the untuned one.
}
