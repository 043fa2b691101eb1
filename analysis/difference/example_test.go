package difference_test

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/difference"
	"thinward/analysis/intensity"
)

// Two positions of one crystal are paired; the thick one has lost a tenth of
// its strong intensities to the weak.
func Example() {
	group, err := crystal.Lookup("P 21 21 21")
	if err != nil {
		fmt.Println(err)
		return
	}
	cell := crystal.Cell{A: 24.1, B: 29.3, C: 34.7, Alpha: 90, Beta: 90, Gamma: 90}
	rows := &intensity.Columns{}
	for h := int16(1); h <= 4; h++ {
		for k := int16(1); k <= 4; k++ {
			rows.H, rows.K, rows.L = append(rows.H, h), append(rows.K, k), append(rows.L, 1)
			rows.I, rows.Sigma = append(rows.I, 0), append(rows.Sigma, 1)
		}
	}
	catalogue, err := intensity.NewCatalogue(cell, group, rows)
	if err != nil {
		fmt.Println(err)
		return
	}
	unique, err := catalogue.Assign(rows)
	if err != nil {
		fmt.Println(err)
		return
	}
	thin := &intensity.Scaled{Unique: unique, Raw: catalogue.RawIDs(rows)}
	thick := &intensity.Scaled{Unique: unique, Raw: thin.Raw}
	for i := range unique {
		j := 100 * math.Exp(0.2*float64(i-8))
		thin.I, thin.Var = append(thin.I, j), append(thin.Var, j)
		thick.I, thick.Var = append(thick.I, 0.9*j+14), append(thick.Var, j)
	}
	pairs, err := difference.Pair(context.Background(), thin, thick, catalogue, &difference.Settings{Shells: 1})
	if err != nil {
		fmt.Println(err)
		return
	}
	z, eps := pairs.InverseVariance(1).Z, pairs.Eps()
	fmt.Printf("%d pairs\n", pairs.Len())
	fmt.Printf("weakest:   strength %.2f, eps %+.3f\n", z[0], eps[0])
	fmt.Printf("strongest: strength %.2f, eps %+.3f\n", z[15], eps[15])
	// Output:
	// 16 pairs
	// weakest:   strength 0.19, eps -0.089
	// strongest: strength 2.92, eps +0.198
}
