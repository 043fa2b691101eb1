package difference

import (
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Peak flow of 17 subjects, Bland & Altman 1986, Lancet i, 307 (data from
// memory, every published summary reproduced); digits by R 4.2.2.
var (
	wright1 = []float64{494, 395, 516, 434, 476, 557, 413, 442, 650, 433, 417, 656, 267, 478, 178, 423, 427}
	wright2 = []float64{490, 397, 512, 401, 470, 611, 415, 431, 638, 429, 420, 633, 275, 492, 165, 372, 421}
	mini1   = []float64{512, 430, 520, 428, 500, 600, 364, 380, 658, 445, 432, 626, 260, 477, 259, 350, 451}
	mini2   = []float64{525, 415, 508, 444, 500, 625, 460, 390, 642, 432, 420, 605, 227, 467, 268, 370, 443}
)

func TestAgree(t *testing.T) {
	g, err := Agree(wright1, mini1)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		what      string
		got, want float64
		tol       float64
	}{
		{"mean", g.Mean, -2.11764705882, 1e-8},
		{"sd", g.SD, 38.7651298736, 1e-8},
		{"lower limit", g.LimitLo, -78.0973016111, 1e-8},
		{"upper limit", g.LimitHi, 73.8620074934, 1e-8},
		{"r", g.R, 0.943279446891, 1e-8},
		{"se of the mean", g.MeanSE, 9.40192500351, 1e-8},
		{"mean from", g.MeanLo, -22.0488376966, 1e-8},
		{"mean to", g.MeanHi, 17.813543579, 1e-8},
		{"se of a limit", g.LimitSE, 16.284611795, 1e-8},
		{"r of d with the mean", g.RMean, 0.0836797216806, 1e-8},
		{"slope on the mean", g.SlopeMean, 0.0286874451525, 1e-8},
		{"t", g.T, 0.3252308502, 1e-8},
		{"p", g.P, 0.749498534, 1e-8},
		{"r of d with the first", g.RA, 0.247993066496, 1e-8},
		{"slope on the first", g.SlopeA, 0.0826521339296, 1e-8},
		{"concordance", g.Concordance, 0.942742431427, 1e-8},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
	if g.DF != 15 || g.N != 17 {
		t.Errorf("df %g, n %d", g.DF, g.N)
	}
}

func TestAgreeRepeats(t *testing.T) {
	for _, c := range []struct {
		name      string
		a, b      []float64
		mean, rms float64
	}{{"wright", wright1, wright2, 4.94117647059, 21.6468989764}, {"mini", mini1, mini2, -2.88235294118, 28.1581667184}} {
		g, err := Agree(c.a, c.b)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, c.name+" mean", g.Mean, c.mean, 1e-8, 0)
		floatcmp.Check(t, c.name+" rms", g.RMS, c.rms, 1e-8, 0)
	}
}

func TestAgreeErrors(t *testing.T) {
	for name, c := range map[string][2][]float64{
		"unequal": {{1, 2, 3}, {1, 2}}, "few": {{1, 2}, {1, 2}}, "flat": {{1, 1, 1}, {1, 2, 3}}, "NaN": {{1, 2, math.NaN()}, {1, 2, 3}},
	} {
		if _, err := Agree(c[0], c[1]); err == nil {
			t.Errorf("%s: accepted", name)
		}
	}
}

// Regression to the mean, closed form: x = t + e1, y = t + e2, variances 25, 4,
// 9: slope of y - x on the mean 2.5/28.25 and on x -4/29, though nothing
// changed.
func TestRegressionToTheMean(t *testing.T) {
	const n = 200000
	r := rand.New(rand.NewPCG(1, 9))
	x, y := make([]float64, n), make([]float64, n)
	for i := range x {
		truth := 5 * r.NormFloat64()
		x[i], y[i] = truth+2*r.NormFloat64(), truth+3*r.NormFloat64()
	}
	g, err := Agree(y, x)
	if err != nil {
		t.Fatal(err)
	}
	tol := 4 * 0.68 / math.Sqrt(n)
	floatcmp.Check(t, "slope on the mean", g.SlopeMean, 0.0884955752, tol, 0)
	floatcmp.Check(t, "slope on x", g.SlopeB, -0.1379310345, tol, 0)

	p := &Pairs{Thin: y, Thick: x, VarThin: constant(n, 9), VarThick: constant(n, 4), MeanPooled: constant(n, 1)}
	floatcmp.Check(t, "ghost slope on the mean", p.GhostSlope(AxisMean), 0.0884955752, tol, 0)
	floatcmp.Check(t, "ghost slope on x", p.GhostSlope(AxisThick), -0.1379310345, tol, 0)
	floatcmp.Check(t, "ghost slope on y", p.GhostSlope(AxisThin), 9./34, tol, 0)
}

// Selection on one of two standard normals of correlation 1/2, closed form.
func TestSelection(t *testing.T) {
	const n = 400000
	r := rand.New(rand.NewPCG(2, 9))
	var one, two, count float64
	for range n {
		z1 := r.NormFloat64()
		z2 := 0.5*z1 + math.Sqrt(0.75)*r.NormFloat64()
		if z1 > 1 {
			one, two, count = one+z1, two+z2, count+1
		}
	}
	tol := 4 / math.Sqrt(count)
	floatcmp.Check(t, "selected", one/count, 1.525135276161, tol, 0)
	floatcmp.Check(t, "its partner", two/count, 0.762567638080, tol, 0)
}

func constant(n int, x float64) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = x
	}
	return out
}
