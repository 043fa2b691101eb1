package scaling

import (
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Counts with a reported variance of count + 4 each. The variance of the fit is the
// closed form at the expected intensity, g J + 4, whatever was counted, and so is that of the
// noise model, a^2 (g J + 4) + (b g J)^2. Weights from the counts themselves would take about
// one count off the mean of 25 (Baker & Cousins 1984, Nucl. Instrum. Methods 221:437, on Neyman's
// chi-squared); those from the expectation take off nothing.
func TestVarianceIsThatOfTheExpectation(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 41))
	const unique, mates, mean = 600, 8, 25
	in := Input{Positions: 1, HasAngle: []bool{false}}
	total := 0.0
	for h := range unique {
		for m := range mates {
			count := poisson(rng, mean)
			total += count / (unique * mates)
			in.S2, in.I, in.Var = append(in.S2, 0.05), append(in.I, count), append(in.Var, count+4)
			in.Unique, in.Raw, in.Position = append(in.Unique, int32(h)), append(in.Raw, int32(h*mates+m)), append(in.Position, 0)
		}
	}
	f := estimate(t, in, &Settings{Model: Constant, TailDF: math.Inf(1)})
	n := fitNoise(t, in, f, nil)
	v := n.Variance(in, f)
	apart := 0
	for i, u := range in.Unique {
		gj := f.Scale[i] * f.J[u]
		floatcmp.Check(t, "variance of the fit", f.VarExpected[i], gj+4, 0, 1e-3)
		p := n.Position[0]
		floatcmp.Check(t, "variance of the noise model", v[i], p.A*p.A*(gj+4)+p.B*p.B*gj*gj, 0, 1e-3)
		if !floatcmp.Equal(in.Var[i], gj+4, 0, 0.2) {
			apart++
		}
		if t.Failed() {
			t.FailNow()
		}
	}
	if apart < 1000 {
		t.Errorf("only %d reported variances differ from the expected ones by a fifth", apart)
	}
	j := 0.0
	for _, x := range f.J {
		j += x / unique
	}
	// The plain mean is what maximum likelihood gives; the mean of counts is known to 0.07.
	floatcmp.Check(t, "mean intensity", j, total, 0.1, 0)
	floatcmp.Check(t, "mean of the counts", total, mean, 4*5/math.Sqrt(unique*mates), 0)
}
