package intensity_test

import (
	"fmt"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// Rows of two positions become observations of common unique reflections,
// which are then merged.
func Example() {
	thin, err := intensity.NewColumns([]int{1, 1, -1, 0}, []int{2, 2, -2, 0}, []int{3, 3, 3, 4},
		[]float64{105, 105, 95, 40}, []float64{5, 5, 5, 4})
	if err != nil {
		fmt.Println(err)
		return
	}
	thin.Frame = []int32{10, 11, 52, 30}
	observed, audit, err := intensity.Collapse(thin, intensity.RowsAuto)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("%d rows, %d observations, taken as %s\n", audit.Rows, audit.Observations, audit.Policy)

	group, err := crystal.Lookup("P 21 21 21")
	if err != nil {
		fmt.Println(err)
		return
	}
	cell := crystal.Cell{A: 24.1, B: 29.3, C: 34.7, Alpha: 90, Beta: 90, Gamma: 90}
	catalogue, err := intensity.NewCatalogue(cell, group, observed)
	if err != nil {
		fmt.Println(err)
		return
	}
	unique, err := catalogue.Assign(observed)
	if err != nil {
		fmt.Println(err)
		return
	}
	scaled := &intensity.Scaled{Unique: unique, Raw: catalogue.RawIDs(observed), I: observed.I, Var: []float64{25, 16, 25}}
	merged := intensity.Merge(catalogue.Len(), scaled)
	for u, h := range catalogue.HKL {
		fmt.Printf("%d %d %d: J = %g from %d\n", h.H, h.K, h.L, merged.J[u], merged.N[u])
	}
	// Output:
	// 4 rows, 3 observations, taken as copies
	// 0 0 4: J = 40 from 1
	// 1 2 3: J = 100 from 2
}
