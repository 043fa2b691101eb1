package difference

import (
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// expectedNoise is E[x - J | x] for J of density p on 0..60 and normal noise of
// variance v(J), by Simpson's rule.
func expectedNoise(x float64, p, v func(float64) float64) float64 {
	const n, end = 60000, 60.0
	num, den := 0.0, 0.0
	for k := 0; k <= n; k++ {
		j := end * float64(k) / n
		w := 2.0
		switch {
		case k == 0 || k == n:
			w = 1
		case k%2 == 1:
			w = 4
		}
		f := w * p(j) / math.Sqrt(v(j)) * math.Exp(-0.5*(x-j)*(x-j)/v(j))
		num += f * (x - j)
		den += f
	}
	return num / den
}

// Noise variance 0.1 + 0.4 J on exponential J. Truth by quadrature here; the
// second column is the same by an earlier simulation, uncertain in its second
// digit. A constant variance fails.
func TestGhostHeteroscedastic(t *testing.T) {
	exponential := func(j float64) float64 { return math.Exp(-j) }
	variance := func(j float64) float64 { return 0.1 + 0.4*j }
	table := []struct{ x, simulated, tol float64 }{{-1, -1.55, 0.1}, {0, -.37, 0.02}, {.5, -.06, 0.02}, {2, .35, 0.02}, {4, .89, 0.04}}
	r := rand.New(rand.NewPCG(17, 1))
	const n = 300000
	x, y, v, fixed := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	meanVar := 0.0
	for i := range x {
		j := r.ExpFloat64()
		v[i] = variance(j)
		x[i] = j + math.Sqrt(v[i])*r.NormFloat64()
		y[i] = j + math.Sqrt(v[i])*r.NormFloat64()
		meanVar += v[i] / n
	}
	for i := range fixed {
		fixed[i] = meanVar
	}
	thin, err := GhostOf(x, y, v, v, 1, 0)
	if err != nil {
		t.Fatal(err)
	}
	thick, err := GhostOf(x, y, v, v, 0, 1)
	if err != nil {
		t.Fatal(err)
	}
	wrong, err := GhostOf(x, y, fixed, fixed, 1, 0)
	if err != nil {
		t.Fatal(err)
	}
	grid := []float64{-1, 0, .5, 2, 4}
	got, mirrored, constant := thin.At(grid), thick.At(grid), wrong.At(grid)
	for k, c := range table {
		truth := expectedNoise(c.x, exponential, variance)
		floatcmp.Check(t, "quadrature", truth, c.simulated, 0.035, 0)
		floatcmp.Check(t, "ghost of thin", got[k], truth, c.tol, 0)
		floatcmp.Check(t, "ghost of thick", mirrored[k], -truth, c.tol, 0)
	}
	if floatcmp.Equal(constant[3], got[3], 0.05, 0) || floatcmp.Equal(constant[4], got[4], 0.2, 0) {
		t.Error("a constant variance does as well: the table tells nothing")
	}
}

// Tweedie's formula with constant noise, both members alike. Normal prior:
// posterior means 2.4 at x = 3 (prior 0, 4; sigma 1) and 13.6 at 20 (10, 9; sigma
// 4), so that the noise is 0.6 and 6.4; exponential prior of mean 10, sigma 1:
// 1.2261088938 at x = 1 (closed form and numerical integration).
func TestGhostTweedie(t *testing.T) {
	for _, c := range []struct {
		name          string
		prior         func(r *rand.Rand) float64
		sigma, x, tol float64
		want          float64
	}{
		{"normal 0, 4", func(r *rand.Rand) float64 { return 2 * r.NormFloat64() }, 1, 3, 0.02, 0.6},
		{"normal 10, 9", func(r *rand.Rand) float64 { return 10 + 3*r.NormFloat64() }, 4, 20, 0.1, 6.4},
		{"exponential 10", func(r *rand.Rand) float64 { return 10 * r.ExpFloat64() }, 1, 1, 0.02, 1 - 1.2261088938},
	} {
		const n = 300000
		r := rand.New(rand.NewPCG(3, 1))
		x, y := make([]float64, n), make([]float64, n)
		for i := range x {
			j := c.prior(r)
			x[i], y[i] = j+c.sigma*r.NormFloat64(), j+c.sigma*r.NormFloat64()
		}
		v := constant(n, c.sigma*c.sigma)
		g, err := GhostOf(x, y, v, v, 1, 0)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, c.name, g.At([]float64{c.x})[0], c.want, c.tol, 0)
	}
}

// Thin noisier than thick by four in variance: the windows must follow the
// differences of a null series on every axis, and the z-scores of what is left
// must be flat.
func TestGhostWindows(t *testing.T) {
	const n = 20000
	for _, c := range []struct {
		name   string
		c1, c2 float64
	}{{"thin", 1, 0}, {"thick", 0, 1}, {"mean", .5, .5}} {
		r := rand.New(rand.NewPCG(23, 1))
		x, y, v1, v2 := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
		a, d := make([]float64, n), make([]float64, n)
		for i := range x {
			j := r.ExpFloat64()
			v1[i], v2[i] = 0.08+0.4*j, 0.02+0.1*j
			x[i], y[i] = j+math.Sqrt(v1[i])*r.NormFloat64(), j+math.Sqrt(v2[i])*r.NormFloat64()
			a[i], d[i] = c.c1*x[i]+c.c2*y[i], x[i]-y[i]
		}
		g, err := GhostOf(x, y, v1, v2, c.c1, c.c2)
		if err != nil {
			t.Fatal(err)
		}
		lo, hi := binRanks(n)
		got, s := g.Windows(lo, hi), scoreOf(a, d)
		rest, sum := 0.0, 0.0
		for b := range got {
			z := (got[b] - s.Mean[b]) / s.SE[b]
			rest += z * z / ScoreBins
			sum += got[b] / ScoreBins
		}
		if !(s.Value > 15 && rest < 2) {
			t.Errorf("%s: score %.1f, without the ghost %.2f", c.name, s.Value, rest)
		}
		floatcmp.Check(t, c.name+": mean over all", sum, 0, 0.01, 0)
		_, sorted := ascending(a)
		var grid []float64
		for k := lo[9] + 5; k < hi[9]; k += 10 {
			grid = append(grid, sorted[k])
		}
		average := mean(g.At(grid))
		floatcmp.Check(t, c.name+": window against the mean of the curve", got[9], average, 0.01, 0)
	}
}

func TestGhostWindowsPanics(t *testing.T) {
	g, err := GhostOf([]float64{1, 2}, []float64{1, 2}, []float64{1, 1}, []float64{1, 1}, 1, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "far away", g.At([]float64{50})[0], math.NaN(), 0, 0)
	defer func() {
		if got := recover(); got != "difference: Ghost.Windows: window 0 is 2 to 2 of 2" {
			t.Errorf("panic %v", got)
		}
	}()
	g.Windows([]int{2}, []int{2})
}

func TestGhostErrors(t *testing.T) {
	one := []float64{1}
	if _, err := GhostOf(nil, nil, nil, nil, 1, 0); err == nil {
		t.Error("no pairs are accepted")
	}
	if _, err := GhostOf(one, one, one, []float64{0}, 1, 0); err == nil {
		t.Error("a variance of zero is accepted")
	}
	if _, err := GhostOf([]float64{math.NaN()}, one, one, one, 1, 0); err == nil {
		t.Error("NaN is accepted")
	}
	p := &Pairs{}
	for _, axis := range []Axis{AxisCrystals, AxisThird, AxisHalfThin, AxisHalfThick} {
		if _, err := p.Ghost(axis); err == nil {
			t.Errorf("%s has a ghost", axis)
		}
	}
}
