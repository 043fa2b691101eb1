package scaling

import (
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func lawInput(n int, v func(y float64) float64) Input {
	rng := rand.New(rand.NewPCG(3, 4))
	in := Input{Positions: 1}
	for i := range n {
		y := 100*rng.ExpFloat64() + 5*rng.NormFloat64()
		in.I, in.Var = append(in.I, y), append(in.Var, v(y))
		in.Unique, in.Position = append(in.Unique, int32(i)), append(in.Position, 0)
	}
	return in
}

func TestLawIsTheLineBehindTheVariances(t *testing.T) {
	in := lawInput(4000, func(y float64) float64 { return 40 + 1.7*y })
	l := fitLaws(&in)[0]
	if l.x != nil {
		t.Fatal("a straight line was taken for a bent one")
	}
	floatcmp.Check(t, "slope", l.slope, 1.7, 0, 1e-9)
	floatcmp.Check(t, "at 0", l.at0, 40, 0, 1e-9)
	if !(l.at(-1e9) > 0) {
		t.Errorf("variance far below zero is %g", l.at(-1e9))
	}
}

// Variances that bend upward, as where a multiplicative error is already in
// them: the broken line follows within the width of its bins, a line does not.
func TestLawFollowsABend(t *testing.T) {
	f := func(y float64) float64 { return 40 + math.Abs(y) + 0.01*y*y }
	in := lawInput(20000, f)
	l := fitLaws(&in)[0]
	if l.x == nil {
		t.Fatal("a bent law was taken for a line")
	}
	for _, y := range []float64{10, 50, 100, 200, 300} {
		floatcmp.Check(t, "law", l.at(y), f(y), 0, 0.05)
	}
	last := 0.0
	for y := -20.0; y < 500; y++ {
		if l.at(y) < last {
			t.Fatalf("law falls at %g", y)
		}
		last = l.at(y)
	}
}

// Pool adjacent violators, by hand.
func TestMonotone(t *testing.T) {
	floatcmp.CheckSlice(t, "monotone", monotone([]float64{1, 3, 2, 2, 5, 4}), []float64{1, 7. / 3, 7. / 3, 7. / 3, 4.5, 4.5}, 1e-14, 0)
	floatcmp.CheckSlice(t, "falling", monotone([]float64{3, 2, 1}), []float64{2, 2, 2}, 1e-14, 0)
}
