package scaling

import (
	"context"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/floatcmp"
)

// grouped makes an Input and a Fit of scale 1 by hand: each slice one reflection
// of one position, all v' equal to v, all J equal to j.
func grouped(data [][]float64, v, j float64) (Input, *Fit) {
	in := Input{Positions: 1}
	f := &Fit{}
	for h, ys := range data {
		for _, y := range ys {
			f.order = append(f.order, int32(len(in.I)))
			in.add(0, h, 0.1, y, v)
			f.Scale, f.VarExpected, f.Weight = append(f.Scale, 1), append(f.VarExpected, v), append(f.Weight, 1)
		}
		f.J, f.JVar, f.N = append(f.J, j), append(f.JVar, 0), append(f.N, int32(len(ys)))
	}
	return in, f
}

func fitNoise(t *testing.T, in Input, f *Fit, set *NoiseSettings) *Noise {
	t.Helper()
	n, err := FitNoise(context.Background(), in, f, set)
	if err != nil {
		t.Fatal(err)
	}
	return n
}

// With v' = 1, J = 0 and the normal law, a^2 is the within-group mean square of
// one-way analysis of variance. Data and certified within sum of squares
// 2.1663656e-01 on 20 degrees of freedom: NIST StRD, SiRstv. The interval of a
// profile likelihood -df/2 (ln a^2 + s^2/a^2) is solved here by bisection.
func TestNoiseIsAnalysisOfVariance(t *testing.T) {
	sirstv := [][]float64{{196.3052, 196.1240, 196.1890, 196.2569, 196.3403}, {196.3042, 196.3825, 196.1669, 196.3257, 196.0422},
		{196.1303, 196.2005, 196.2889, 196.0343, 196.1811}, {196.2795, 196.1748, 196.1494, 196.1485, 195.9885}, {196.2119, 196.1051, 196.1850, 196.0052, 196.2090}}
	in, f := grouped(sirstv, 1, 0)
	p := fitNoise(t, in, f, &NoiseSettings{TailDF: math.Inf(1)}).Position[0]
	s2 := 2.1663656e-01 / 20
	floatcmp.Check(t, "a", p.A, math.Sqrt(s2), 0, 1e-4)
	if p.DF != 20 || p.N != 25 || !p.Estimable {
		t.Fatalf("%+v", p)
	}
	floatcmp.Check(t, "multiplicity", p.Multiplicity, 5, 0, 0)
	drop := 0.5 * distuv.ChiSquared{K: 1}.Quantile(0.95)
	end := func(lo, hi float64) float64 { // fall - drop is negative at lo
		for range 200 {
			mid := 0.5 * (lo + hi)
			if 10*(math.Log(mid/s2)+s2/mid-1) < drop {
				lo = mid
			} else {
				hi = mid
			}
		}
		return math.Sqrt(lo)
	}
	floatcmp.Check(t, "lower end", p.ALo, end(s2, s2/10), 0, 0.01)
	floatcmp.Check(t, "upper end", p.AHi, end(s2, s2*10), 0, 0.01)
}

// For pairs of equal variance the restricted likelihood is the density of the
// difference.
func TestPairLikelihoodIsThatOfTheDifference(t *testing.T) {
	e := &equivalents{y: []float64{3, 4.5, -1, 0.2}, p: []float64{2, 2, 5, 5}, q: []float64{1, 1, 4, 4}, first: []int{0, 2, 4}}
	x := noiseParams{math.Log(1.3), 0.2, 0}
	want := 0.0
	for _, c := range [][2]float64{{1.5, 1.3*2 + 0.2}, {1.2, 1.3*5 + 0.8}} {
		want += distuv.Normal{Sigma: math.Sqrt(2 * c[1])}.LogProb(c[0])
	}
	floatcmp.Check(t, "log-likelihood", e.logLik(x), want, 1e-12, 0)
	x[2] = 1. / 6
	lambda := x[2] * math.Sqrt(0.5) // kurtosis of a difference is half that of its members
	widen := (1 - 2*lambda) / (1 - 2*x[2])
	want = 0
	for _, c := range [][2]float64{{1.5, 1.3*2 + 0.2}, {1.2, 1.3*5 + 0.8}} {
		want += distuv.StudentsT{Sigma: math.Sqrt(2 * widen * c[1]), Nu: 1 / lambda}.LogProb(c[0])
	}
	floatcmp.Check(t, "Student log-likelihood", e.logLik(x), want, 1e-12, 0)
}

func TestStudentConstant(t *testing.T) {
	for _, nu := range []float64{2.5, 5, 40, 9000, 20000, 1e6} {
		floatcmp.Check(t, "constant", studentConstant(1/nu), distuv.StudentsT{Sigma: 1, Nu: nu}.LogProb(0), 1e-8, 0)
	}
	floatcmp.Check(t, "normal limit", studentConstant(0), distuv.UnitNormal.LogProb(0), 1e-14, 0)
}

// groupsOf draws reflections of n equivalents with variance a^2 v' + (b J)^2.
func groupsOf(rng *rand.Rand, reflections, n int, a, b, nu float64) *equivalents {
	e := &equivalents{}
	for range reflections {
		e.first = append(e.first, len(e.y))
		j := 10 * rng.ExpFloat64()
		for range n {
			z := rng.NormFloat64()
			if nu > 0 {
				z /= math.Sqrt(distuv.ChiSquared{K: nu, Src: rng}.Rand() / nu)
			}
			v := a*a*(1+0.3*j) + b*b*j*j
			e.y = append(e.y, j+math.Sqrt(v)*z)
			e.p = append(e.p, 1+0.3*j)
			e.q = append(e.q, j*j)
		}
	}
	e.first = append(e.first, len(e.y))
	return e
}

// a and b come back at low multiplicity, with and without heavy tails, and lie
// in their intervals at the nominal rate.
func TestNoiseRecoversAAndB(t *testing.T) {
	draws := 12
	if full() {
		draws = 200
	}
	for name, c := range map[string]struct {
		n           int
		a, b, nu    float64
		reflections int
		tolA, tolB  float64
	}{
		"pairs":                 {2, 1.4, 0.05, 0, 1200, 0.03, 0.012},
		"pairs, large b":        {2, 0.8, 0.25, 0, 1200, 0.04, 0.012},
		"fours, large b, heavy": {4, 1.2, 0.25, 5, 400, 0.05, 0.02},
		"pairs, heavy":          {2, 1.2, 0.25, 5, 1200, 0.08, 0.02},
	} {
		rng := rand.New(rand.NewPCG(11, 12))
		var ia, ib tally
		var sa, sb float64
		set := &NoiseSettings{Level: 0.95, MinDF: 20}
		for range draws {
			p, err := groupsOf(rng, c.reflections, c.n, c.a, c.b, c.nu).fit(context.Background(), set)
			if err != nil {
				t.Fatal(err)
			}
			sa += p.A / float64(draws)
			sb += p.B / float64(draws)
			ia.inside(p.ALo <= c.a && c.a <= p.AHi)
			ib.inside(p.BLo <= c.b && c.b <= p.BHi)
		}
		t.Logf("%s: mean a %.4f, b %.4f, rates %.3f %.3f", name, sa, sb, ia.in/ia.n, ib.in/ib.n)
		floatcmp.Check(t, name+": mean a", sa, c.a, c.a*c.tolA, 0)
		floatcmp.Check(t, name+": mean b", sb, c.b, c.tolB, 0)
		if c.nu == 0 { // with heavy tails the likelihood is an approximation
			ia.check(t, name+": a", false)
			ib.check(t, name+": b", false)
		}
	}
}

// A quarter of multiplicative error with heavy tails, through the whole fit.
// Counting noise has no such tails and one law serves both, so b lies between the
// scale, 0.25, and the standard deviation, 0.25 sqrt(5/3), of that error.
func TestHeavyTailedSeries(t *testing.T) {
	in, _ := simulate(simPlan{seed: 21, unique: 1000, noiseB: []float64{.25, .25, .25}, tailDF: 5})
	f := estimate(t, in, nil)
	for p, n := range fitNoise(t, in, f, nil).Position {
		floatcmp.Check(t, "a", n.A, 1, 0.12, 0)
		if !(n.B > 0.24 && n.B < 0.34) {
			t.Errorf("position %d: b %g", p, n.B)
		}
		if !(n.TailDF < 40) {
			t.Errorf("position %d: tails of %g degrees of freedom", p, n.TailDF)
		}
	}
}

func TestNoiseNotEstimable(t *testing.T) {
	in, _ := simulate(simPlan{seed: 22, mates: 1, unique: 300})
	f := estimate(t, in, nil)
	n := fitNoise(t, in, f, nil)
	for p, x := range n.Position {
		if x.Estimable || x.A != 1 || x.B != 0 || x.ALo != 0 || x.BLo != 0 || !math.IsInf(x.AHi, 1) || !math.IsInf(x.BHi, 1) {
			t.Errorf("position %d: %+v", p, x)
		}
		if !has(n.Warnings, "noise-not-estimable", where(p)) {
			t.Errorf("warnings %v", n.Warnings)
		}
	}
	floatcmp.CheckSlice(t, "variance", n.Variance(in, f), f.VarExpected, 0, 0)
}

func TestLowMultiplicityIsSaid(t *testing.T) {
	in, _ := simulate(simPlan{seed: 23, mates: 2, unique: 400})
	n := fitNoise(t, in, estimate(t, in, nil), nil)
	if !n.Position[0].Estimable || !has(n.Warnings, "low-multiplicity", "position 0") {
		t.Errorf("%+v, warnings %v", n.Position[0], n.Warnings)
	}
}

func TestVarianceFormula(t *testing.T) {
	in, f := grouped([][]float64{{1, 2}, {3}}, 4, 5)
	f.J[1] = -5
	f.Scale = []float64{2, 1, 1}
	n := &Noise{Position: []PositionNoise{{A: 3, B: 0.5}}}
	floatcmp.CheckSlice(t, "v", n.Variance(in, f), []float64{9*4 + 25, 9*4 + 6.25, 9 * 4}, 1e-12, 0)
}

func TestNoiseSameBits(t *testing.T) {
	in, _ := simulate(simPlan{seed: 24})
	f := estimate(t, in, nil)
	if !reflect.DeepEqual(fitNoise(t, in, f, &NoiseSettings{Workers: 1}), fitNoise(t, in, f, &NoiseSettings{Workers: 2})) {
		t.Error("one and two workers differ in bits")
	}
}

func TestNoiseErrors(t *testing.T) {
	in, f := grouped([][]float64{{1, 2}}, 1, 1)
	for want, set := range map[string]*NoiseSettings{"level is 2": {Level: 2}, "TailDF is 1": {TailDF: 1}, "level is NaN": {Level: math.NaN()}} {
		if _, err := FitNoise(context.Background(), in, f, set); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("got %v, want %q", err, want)
		}
	}
	if _, err := FitNoise(context.Background(), in, &Fit{}, nil); err == nil || !strings.Contains(err.Error(), "does not belong") {
		t.Errorf("got %v", err)
	}
}
