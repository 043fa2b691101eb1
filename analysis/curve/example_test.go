package curve_test

import (
	"context"
	"fmt"

	"thinward/analysis/curve"
	"thinward/analysis/resample"
)

// An exchange of a fifth between strong and weak reflections, in invented data.
func ExampleByStrength() {
	s := resample.NewSeed(1).At("tarn", "L1").Stream(0)
	var strength, eps []float64
	for range 2000 {
		e := s.Exponential()
		strength = append(strength, e)
		eps = append(eps, 0.2*(e-1)+0.3*s.Normal())
	}
	b, err := curve.ByStrength(context.Background(), strength, eps, nil, &curve.Settings{
		Grid: 3, Resample: resample.Settings{Replicates: 500, Seed: resample.NewSeed(1)},
	})
	if err != nil {
		fmt.Println(err)
		return
	}
	for g := range b.Grid {
		fmt.Printf("strength %.1f: %.2f between %.2f and %.2f\n", b.Grid[g], b.Mean[g], b.LoSim[g], b.HiSim[g])
	}
	fmt.Printf("p %.3f\n", b.P)
	// Output:
	// strength 0.0: -0.19 between -0.31 and -0.07
	// strength 0.6: -0.08 between -0.15 and -0.01
	// strength 4.3: 0.67 between 0.55 and 0.79
	// p 0.002
}

func ExampleIsotonic() {
	v, err := curve.Isotonic([]float64{1, 3, 2, 4}, nil)
	fmt.Println(v, err)
	// Output: [1 2.5 2.5 4] <nil>
}
