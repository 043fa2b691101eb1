package size

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat"
	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/floatcmp"
)

// Quantiles used by the intervals; values by R 4.2.2, tolerance 1e-10.
func TestQuantiles(t *testing.T) {
	for _, c := range []struct {
		what      string
		got, want float64
		tol       float64
	}{
		{"normal .975", distuv.UnitNormal.Quantile(.975), 1.95996398454, 1e-10},
		{"normal below 1.96", distuv.UnitNormal.CDF(1.96), .975002104852, 1e-10},
		{"t .975, 10", tQuantile(.95, 10), 2.22813885199, 1e-9},
		{"chi-square .95, 10", distuv.ChiSquared{K: 10}.Quantile(.95), 18.3070380533, 1e-9},
		{"chi-square above 3.84, 1", distuv.ChiSquared{K: 1}.Survival(3.84), 1 - .949956478751, 1e-10},
		{"smallest visible at 95 and 80 %", MinimumVisible(1, 0, 0), 1.96 + 0.84, 2e-3}, // standard normal points, rounded
		{"smallest visible, half power", MinimumVisible(2, .95, .5), 2 * 1.95996398454, 1e-9},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
	if v := MinimumVisible(-1, 0, 0); !math.IsNaN(v) {
		t.Errorf("negative error gives %g", v)
	}
}

func strengths(in *Input) (e1, e2 []float64) {
	m1, m2 := stat.Mean(in.Thin, nil), stat.Mean(in.Thick, nil)
	for i := range in.Thin {
		e1 = append(e1, in.Thin[i]/m1)
		e2 = append(e2, in.Thick[i]/m2)
	}
	return e1, e2
}

// With an instrument of two values the estimate is Wald's (1940, Ann. Math.
// Stat. 11:284): the difference of the group means of thick over that of thin.
func TestWald(t *testing.T) {
	in := plan{n: 801, m: .1, noise: [3]float64{.2, .2, .2}}.draw(stream(21))
	var g [2][2]float64
	var n [2]float64
	e1, e2 := strengths(in)
	for i, z := range in.Z {
		k := 0
		if z > 1 {
			k = 1
		}
		in.Z[i] = 1 + float64(k)
		g[k][0] += e1[i]
		g[k][1] += e2[i]
		n[k]++
	}
	wald := (g[1][1]/n[1] - g[0][1]/n[0]) / (g[1][0]/n[1] - g[0][0]/n[0])
	x, err := Exchange(in, nil)
	floatcmp.Check(t, "m", must(t, x, err).M, 1-wald, 1e-12, 0)
}

// With the thin position itself as its axis the estimate is the slope of
// ordinary least squares (gonum stat).
func TestLeastSquares(t *testing.T) {
	in := plan{n: 500, m: .1, noise: [3]float64{.2, .2, .2}}.draw(stream(22))
	in.Z = in.Thin
	e1, e2 := strengths(in)
	_, slope := stat.LinearRegression(e1, e2, nil, false)
	x, err := ExchangeWith(in, nil, &Settings{Clip: 1e9})
	floatcmp.Check(t, "slope", 1-must(t, x, err).M, slope, 1e-12, 0)
	f, err := Moments(in, nil, M, &Settings{Knots: []float64{1e9}, AsFound: true})
	floatcmp.Check(t, "slope by moments", 1-must(t, f, err).M.Value, slope, 1e-12, 0)
}

// The just-identified moments are the instrumental-variable formula (Z'X)^-1 Z'y
// with gonum's solver, and equal the exchange.
func TestTwoInstruments(t *testing.T) {
	in := plan{n: 700, m: .05, q: .02, noise: [3]float64{.2, .2, .2}}.draw(stream(23))
	e1, e2 := strengths(in)
	mean := stat.Mean(in.Thin, nil)
	zm := stat.Mean(in.Z, nil)
	n := len(in.Z)
	z, x, y := mat.NewDense(n, 3, nil), mat.NewDense(n, 3, nil), mat.NewVecDense(n, nil)
	for i := range n {
		z.SetRow(i, []float64{1, math.Min(in.Z[i]/zm, 1), math.Min(in.Z[i]/zm, 5)})
		x.SetRow(i, []float64{1, e1[i], e1[i]*e1[i] - in.VarThin[i]/(mean*mean)})
		y.SetVec(i, e2[i])
	}
	var zx mat.Dense
	var zy, beta mat.VecDense
	zx.Mul(z.T(), x)
	zy.MulVec(z.T(), y)
	if err := beta.SolveVec(&zx, &zy); err != nil {
		t.Fatal(err)
	}
	// e2 = const + (1 - m + (1-m) q M2) e1 - (1-m) q Q.
	slope := -beta.AtVec(2)
	var m2 float64
	for i := range n {
		m2 += x.At(i, 2) / float64(n)
	}
	f, err := Moments(in, nil, MQ, &Settings{Knots: []float64{1, 5}, Curb: CurbStrength, FirstOrder: true, AsFound: true})
	f = must(t, f, err)
	floatcmp.Check(t, "m", f.M.Value, 1+slope*m2-beta.AtVec(1), 1e-10, 0)
	floatcmp.Check(t, "q", f.Q.Value, slope/(1-f.M.Value), 1e-10, 0)
	if f.JDF != 0 || f.J > 1e-12 || f.JP != 1 {
		t.Errorf("just identified: J = %g with %d", f.J, f.JDF)
	}
	one, err := Moments(in, nil, M, &Settings{Knots: []float64{6}, AsFound: true})
	ex, err2 := Exchange(in, nil)
	floatcmp.Check(t, "m", must(t, one, err).M.Value, must(t, ex, err2).M, 1e-12, 0)
	floatcmp.Check(t, "SE", one.M.SE, ex.SE, 0, 1e-9)
}

// The standard error equals the explicit delete-one jackknife (Efron 1982) to
// a few per cent, shell means recomputed each time, in all estimators.
func TestJackknife(t *testing.T) {
	in := plan{n: 720, shells: 3, m: .05, q: .08, falloff: 4, noise: [3]float64{.1, .1, .1}, error: .2}.draw(stream(24))
	in.S2 = nil
	jack := func(n int, stat func(w []float64) []float64) []float64 {
		var draws [][]float64
		for i := range n {
			w := make([]float64, n)
			for j := range w {
				w[j] = 1
			}
			w[i] = 0
			draws = append(draws, stat(w))
		}
		out := make([]float64, len(draws[0]))
		for k := range out {
			var m, v float64
			for _, d := range draws {
				m += d[k] / float64(n)
			}
			for _, d := range draws {
				v += (d[k] - m) * (d[k] - m)
			}
			out[k] = math.Sqrt(v * float64(n-1) / float64(n))
		}
		return out
	}
	x, err := Exchange(in, nil)
	x = must(t, x, err)
	got := jack(len(in.Z), func(w []float64) []float64 {
		x, err := Exchange(in, w)
		return []float64{must(t, x, err).M}
	})
	floatcmp.Check(t, "exchange", x.SE, got[0], 0, .02)

	c, err := Classes(in, nil, nil, nil)
	c = must(t, c, err)
	got = jack(len(in.Z), func(w []float64) []float64 {
		c, err := Classes(in, nil, w, nil)
		c = must(t, c, err)
		return []float64{c[0].Contrast.Value, c[0].Strength.Value, c[0].M.Value, c[2].Contrast.Value, c[2].M.Value, c[1].Strength.Value, c[2].Strength.Value}
	})
	for k, v := range []float64{c[0].Contrast.SE, c[0].Strength.SE, c[0].M.SE, c[2].Contrast.SE, c[2].M.SE, c[1].Strength.SE, c[2].Strength.SE} {
		floatcmp.Check(t, "class", v, got[k], 0, .05)
	}

	// Fieller's interval is that of the standard error where 1 - strength is far
	// from 0, as in the floor.
	half := tQuantile(.95, float64(c[0].N)-1) * c[0].M.SE
	floatcmp.Check(t, "half-width of the floor", (c[0].M.Hi-c[0].M.Lo)/2, half, 0, .01)

	// Without the second step moments are linear but for the shell means: one
	// function a parameter. The sandwich is near, the error that leads is the same.
	for _, asFound := range []bool{true, false} {
		tol := map[bool]float64{true: .06, false: .01}[asFound]
		set := &Settings{Knots: []float64{1, 6}, FlatShells: true, Curb: CurbStrength, FirstOrder: !asFound, AsFound: asFound}
		plainSet := &Settings{Knots: []float64{1, 6}, FlatShells: true, Curb: CurbStrength, FirstOrder: !asFound, AsFound: true}
		in := in
		f, err := Moments(in, nil, MQ, set)
		f = must(t, f, err)
		got = jack(len(in.Z), func(w []float64) []float64 {
			f, err := Moments(in, w, MQ, plainSet)
			f = must(t, f, err)
			return []float64{f.M.Value, f.Q.Value}
		})
		floatcmp.Check(t, "m of (m,q)", f.M.SE, got[0], 0, tol)
		floatcmp.Check(t, "q of (m,q)", f.Q.SE, got[1], 0, tol)
		// The offset with as many functions as parameters, and its shell means.
		set.Curb, plainSet.Curb = CurbCommon, CurbCommon
		in = plan{n: 720, shells: 4, m: .05, q: .08, o: .05, falloff: 9, noise: [3]float64{.03, .03, .03}, error: .2}.draw(stream(24))
		in.S2 = nil
		f, err = Moments(in, nil, MQO, set)
		f = must(t, f, err)
		if f.JDF != 0 {
			t.Fatalf("%d degrees of freedom", f.JDF)
		}
		got = jack(len(in.Z), func(w []float64) []float64 {
			f, err := Moments(in, w, MQO, plainSet)
			f = must(t, f, err)
			return []float64{f.M.Value, f.Q.Value, f.O.Value * f.Reference}
		})
		floatcmp.Check(t, "m of (m,q,o)", f.M.SE, got[0], 0, tol)
		floatcmp.Check(t, "q of (m,q,o)", f.Q.SE, got[1], 0, tol)
		floatcmp.Check(t, "o of (m,q,o)", f.O.SE*f.Reference, got[2], 0, tol)
	}

	h := halves(stream(25), 600, 3, .05, .2, .3)
	r, err := TrueCorrelation(h, nil, nil)
	r = must(t, r, err)
	got = jack(len(h.Shell), func(w []float64) []float64 {
		r, err := TrueCorrelation(h, w, nil)
		r = must(t, r, err)
		return []float64{r.R.Value, r.MomentRatio.Value, r.VThin.Value, r.VThick.Value, r.C.Value}
	})
	// The error of the moment ratio is that of its logarithm times the ratio.
	for k, v := range []float64{r.R.SE, r.MomentRatio.SE, r.VThin.SE, r.VThick.SE, r.C.SE} {
		floatcmp.Check(t, "correlation", v, got[k], 0, .005)
	}
}

// The set is where (n - x d)^2 = c Var(n - x d): checked at its ends and
// between by the inequality itself.
func TestRatioRegion(t *testing.T) {
	holds := func(c [6]float64, x float64) bool {
		g := c[0] - x*c[1]
		return g*g <= c[5]*(c[2]-2*x*c[3]+x*x*c[4])
	}
	for _, c := range []struct {
		name                 string
		v                    [6]float64 // n, d, vnn, vnd, vdd, c
		pieces               int
		openBelow, openAbove bool
	}{
		{"bounded", [6]float64{1, 2, .1, .02, .1, 4}, 1, false, false},
		{"disjoint", [6]float64{2, .5, .1, 0, .1, 4}, 2, true, true},
		{"whole", [6]float64{.1, .1, .1, 0, .1, 4}, 1, true, true},
		{"half-line", [6]float64{3, 1, .1, 0, .25, 4}, 1, false, true},
		{"half-line below", [6]float64{-3, 1, .1, 0, .25, 4}, 1, true, false},
	} {
		v := c.v
		r := ratioRegion(v[0], v[1], v[2], v[3], v[4], v[5])
		if len(r.Pieces) != c.pieces || math.IsInf(r.Hull().Lo, -1) != c.openBelow || math.IsInf(r.Hull().Hi, 1) != c.openAbove {
			t.Errorf("%s: %v", c.name, r)
		}
		for x := -20.0; x <= 20; x += .0137 {
			if holds(v, x) != r.Contains(x) {
				t.Errorf("%s: at %g the inequality says %v, %v says %v", c.name, x, holds(v, x), r, r.Contains(x))
				break
			}
		}
	}
	// The Student interval is the limit of a strong axis.
	r := ratioRegion(1, 2, 1e-6, 2e-7, 1e-6, 4)
	se := math.Sqrt(1e-6-2*.5*2e-7+.25*1e-6) / 2
	floatcmp.Check(t, "lower end", r.Pieces[0].Lo, .5-2*se, 1e-6, 0)
	floatcmp.Check(t, "upper end", r.Pieces[0].Hi, .5+2*se, 1e-6, 0)
}

// E sqrt((1-m) e + m) = sqrt(1-m) exp(c) Gamma(3/2, c), c = m/(1-m), for acentric
// strengths; mean |F| is sqrt(pi)/2 acentric and sqrt(2/pi) centric (Wilson 1949).
func TestExpectedEffect(t *testing.T) {
	none := must2(ExpectedEffect(0, &EffectSettings{Agreement: .2}))(t)
	floatcmp.Check(t, "no exchange", none.Agreement, 0, 1e-12, 0)
	floatcmp.Check(t, "no shift", none.Shift, 0, 1e-12, 0)
	floatcmp.Check(t, "no change of the weak", none.WeakF, 0, 1e-12, 0)
	floatcmp.Check(t, "scale", none.Scale, 1, 1e-12, 0)
	floatcmp.Check(t, "weak share, acentric", none.WeakShare, 1-math.Exp(-.2), 1e-9, 0)
	centric := must2(ExpectedEffect(0, &EffectSettings{CentricShare: 1}))(t)
	floatcmp.Check(t, "weak share, centric", centric.WeakShare, math.Erf(math.Sqrt(.1)), 1e-9, 0)

	m := .1
	c := m / (1 - m)
	all := must2(ExpectedEffect(m, &EffectSettings{Weak: 70, Agreement: .15}))(t)
	upper := math.Sqrt(math.Pi) / 2 * (1 - distuv.Gamma{Alpha: 1.5, Beta: 1}.CDF(c))
	want := math.Sqrt(1-m)*math.Exp(c)*upper/(math.Sqrt(math.Pi)/2) - 1
	floatcmp.Check(t, "mean |F| of all", all.WeakF, want, 1e-7, 0)
	floatcmp.Check(t, "shift", all.Shift, math.Hypot(.15, all.Agreement)-.15, 1e-12, 0)

	// Against a sum over exponential quantiles, midpoint rule.
	n := 200000
	var ff, gg, fs, diff float64
	for i := range n {
		e := -math.Log((float64(i) + .5) / float64(n))
		f, g := math.Sqrt(e), math.Sqrt((1-m)*e+m)
		ff += f * g
		gg += g * g
		fs += f
	}
	k := ff / gg
	for i := range n {
		e := -math.Log((float64(i) + .5) / float64(n))
		diff += math.Abs(k*math.Sqrt((1-m)*e+m) - math.Sqrt(e))
	}
	floatcmp.Check(t, "scale", all.Scale, k, 0, 1e-4)
	floatcmp.Check(t, "agreement", all.Agreement, diff/fs, 0, 1e-4)

	for _, bad := range []float64{1, -.3, math.NaN()} {
		if _, err := ExpectedEffect(bad, nil); err == nil {
			t.Errorf("m = %g passes", bad)
		}
	}
}

func must2[T any](v T, err error) func(testing.TB) T {
	return func(t testing.TB) T { return must(t, v, err) }
}
