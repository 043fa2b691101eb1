package figure_test

import (
	"fmt"
	"strings"

	"thinward/analysis/figure"
)

func ExamplePanels() {
	p := &figure.Panels{
		Title: "Difference against strength", Desc: "One rising line.",
		X: figure.Axis{Label: "strength", Scale: figure.Root}, Y: figure.Axis{Label: "thin minus thick", Zero: true},
		Panel: []figure.Panel{{Name: "L1", Curves: []figure.Curve{{X: []float64{0.1, 1, 4}, Y: []float64{-0.1, 0, 0.4}}}}},
	}
	f, err := p.Draw()
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(strings.HasPrefix(f.SVG, "<svg"), f.Table.Head)
	for _, row := range f.Table.Rows {
		fmt.Println(row)
	}
	// Output:
	// true [panel strength thin minus thick]
	// [L1 0.1 −0.1]
	// [L1 1 0]
	// [L1 4 0.4]
}
