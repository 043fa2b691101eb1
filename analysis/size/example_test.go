package size_test

import (
	"fmt"
	"math"
	"math/rand/v2"

	"thinward/analysis/size"
)

// An invented contrast of 6000 reflections in ten shells with an exchange of
// 0.10, a background offset in the thick position of 1 % of the intensity at
// low resolution, and an axis measured on other crystals.
func Example() {
	r := rand.New(rand.NewPCG(1, 2))
	n, shells := 6000, 10
	in := &size.Input{Shells: shells}
	for i := range n {
		s2 := 0.3 * float64(i) / float64(n)
		level := math.Exp(-9 * s2)
		e := r.ExpFloat64()
		noise := func() float64 { return 0.02 * r.NormFloat64() }
		in.Shell = append(in.Shell, int32(i*shells/n))
		in.S2 = append(in.S2, s2)
		in.Z = append(in.Z, e+noise()/level)
		in.Thin = append(in.Thin, level*e+noise())
		in.Thick = append(in.Thick, level*(0.9*e+0.1)+0.01+noise())
		in.VarThin = append(in.VarThin, 0.02*0.02)
	}
	one, err := size.Exchange(in, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	lead, span, err := size.Leads(in, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	fit, err := size.Moments(in, nil, lead, nil)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("one slope m = %.2f +- %.2f\n", one.M, one.SE)
	fmt.Printf("shell means span %.0f times: %s leads\n", span, lead)
	fmt.Printf("m = %.2f +- %.2f, offset = %.3f +- %.3f\n", fit.M.Value, fit.M.SE, fit.O.Value*fit.Reference, fit.O.SE*fit.Reference)
	fmt.Printf("smallest m seen: %.3f\n", size.MinimumVisible(fit.M.SE, 0.95, 0.8))
	// Output:
	// one slope m = 0.14 +- 0.00
	// shell means span 10 times: (m,q,o) leads
	// m = 0.11 +- 0.00, offset = 0.008 +- 0.001
	// smallest m seen: 0.011
}
