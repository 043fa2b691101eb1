package scaling_test

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/scaling"
)

// Two positions of one crystal: the second twice as thick, with B larger by 1.5.
func ExampleEstimate() {
	in := scaling.Input{Positions: 2}
	for h := range 400 {
		s2 := 0.2 * float64(h%20+1) / 20
		j := 1000 * math.Exp(-8*s2) * float64(1+h%7)
		for p, g := range []float64{1, 2 * math.Exp(-2*1.5*s2)} {
			in.S2 = append(in.S2, s2)
			in.I = append(in.I, g*j+3*math.Sin(float64(h*7+p*3)))
			in.Var = append(in.Var, 4)
			in.Unique = append(in.Unique, int32(h))
			in.Raw = append(in.Raw, int32(h))
			in.Position = append(in.Position, int32(p))
		}
	}
	fit, err := scaling.Estimate(context.Background(), in, &scaling.Settings{Model: scaling.BOnly})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("K %.3f, B %.2f\n", math.Exp(fit.LnKMean[1]), fit.B[1])
	fmt.Println("converged:", fit.Converged)
	// Output:
	// K 2.000, B 1.50
	// converged: true
}
