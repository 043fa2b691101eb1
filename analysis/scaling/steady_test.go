package scaling

import (
	"math"
	"math/rand/v2"
	"testing"
)

// Series of all kinds, small and large signal, few and many equivalents: the fit
// comes to rest (the rare one that does not says so and is within a hundredth of
// a standard error), stays finite and near the truth in units of its errors.
func TestFitComesToRest(t *testing.T) {
	rng := rand.New(rand.NewPCG(41, 42))
	kinds := 24
	if full() {
		kinds = 300
	}
	far, n, restless := 0, 0, 0
	for k := range kinds {
		gain := 2 + 10*rng.Float64()
		b := 0.4 * rng.Float64()
		plan := simPlan{
			seed: 9000 + uint64(k), unique: 60 + rng.IntN(500), mates: 1 + rng.IntN(5),
			lnGain: []float64{gain, gain + rng.NormFloat64(), gain + rng.NormFloat64()},
			b:      []float64{0, 2 * rng.Float64(), 4 * rng.Float64()},
			noiseB: []float64{b, b, b}, shared: rng.Float64(), jitter: 2 * rng.Float64(),
		}
		in, _ := simulate(plan)
		f := estimate(t, in, nil)
		if !f.Converged {
			restless++
			t.Logf("plan %+v: not at rest after %d rounds, shift %g", plan, f.Iterations, f.LargestShift)
			if !has(f.Warnings, "not-converged", "") || !(f.LargestShift < 0.01) {
				t.Errorf("shift %g, warnings %v", f.LargestShift, f.Warnings)
			}
		}
		for p := 1; p < 3; p++ {
			n++
			z := (f.B[p] - plan.b[p]) / f.BSE[p]
			if !(math.Abs(z) < 4) {
				far++
				t.Logf("plan %+v: B %g, SE %g", plan, f.B[p], f.BSE[p])
			}
		}
		for i, g := range f.Scale {
			if !(g > 0) || math.IsInf(g, 0) {
				t.Fatalf("plan %+v: scale of row %d is %g", plan, i, g)
			}
		}
	}
	if restless*100 > kinds {
		t.Errorf("%d of %d fits did not come to rest", restless, kinds)
	}
	if far*20 > n {
		t.Errorf("%d of %d B more than 4 standard errors off", far, n)
	}
}
