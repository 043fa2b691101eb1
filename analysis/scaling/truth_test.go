package scaling

import (
	"context"
	"math"
	"os"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// full says whether the long calibrations run (THINWARD_FULL=1).
func full() bool { return os.Getenv("THINWARD_FULL") == "1" }

// tally counts how often a truth lay inside its interval and how large its
// errors were in units of their standard errors.
type tally struct{ n, in, z2, z float64 }

func (c *tally) add(z, limit float64) {
	c.n++
	c.z2 += z * z
	c.z += z
	if math.Abs(z) <= limit {
		c.in++
	}
}

func (c *tally) inside(in bool) {
	c.n++
	if in {
		c.in++
	}
}

// check demands the nominal rate 0.95 within four binomial standard deviations,
// widened by the square root of 1.5 because quantities of one series are
// correlated, and the root mean square within the same of its own error.
func (c *tally) check(t *testing.T, what string, scatter bool) {
	t.Helper()
	four := 4 * math.Sqrt(1.5*0.05*0.95/c.n)
	floatcmp.Check(t, what+": rate of intervals that hold the truth", c.in/c.n, 0.95, four, 0)
	if scatter {
		lim := math.Max(0.1, 4*math.Sqrt(1.5/(2*c.n)))
		t.Logf("%s: rms z %.3f, mean z %.3f", what, math.Sqrt(c.z2/c.n), c.z/c.n)
		floatcmp.Check(t, what+": scatter over predicted scatter", math.Sqrt(c.z2/c.n), 1, lim, 0)
	}
	t.Logf("%s: %.0f cases, rate %.3f", what, c.n, c.in/c.n)
}

// Scale curve, B, a and b against the truth of invented series.
func TestTruthIsInsideTheIntervals(t *testing.T) {
	series := 40
	if full() {
		series = 200
	}
	for name, plan := range map[string]simPlan{
		"few per cent":         {unique: 500},
		"a quarter, shared":    {unique: 500, noiseB: []float64{.25, .25, .3}, shared: .6},
		"pairs of equivalents": {unique: 900, mates: 2, sigma: []float64{0.5, 1, 1}},
	} {
		t.Run(name, func(t *testing.T) {
			var curve, b, na, nb tally
			for r := range series {
				plan.seed = 5000 + uint64(r)
				in, truth := simulate(plan)
				f, err := Estimate(context.Background(), in, nil)
				if err != nil {
					t.Fatal(err)
				}
				if !f.Converged || f.Constant {
					t.Fatalf("series %d: converged %v, constant %v", r, f.Converged, f.Constant)
				}
				for p := range 3 {
					phi := float64((r*37+p*41)%110 - 55)
					curve.add((f.LnKAt(p, phi)-truth.lnK(p, phi))/f.LnKSEAt(p, phi), 1.96)
					if p > 0 {
						b.add((f.B[p]-truth.plan.b[p])/f.BSE[p], 1.96)
					}
				}
				if !full() && r%5 != 0 {
					continue
				}
				n, err := FitNoise(context.Background(), in, f, nil)
				if err != nil {
					t.Fatal(err)
				}
				for p, x := range n.Position {
					a := 1.0
					if plan.sigma != nil {
						a = 1 / plan.sigma[p]
					}
					na.inside(x.ALo <= a && a <= x.AHi)
					nb.inside(x.BLo <= truth.plan.noiseB[p] && truth.plan.noiseB[p] <= x.BHi)
				}
			}
			curve.check(t, "ln K", true)
			b.check(t, "B", true)
			na.check(t, "a", false)
			nb.check(t, "b", false)
		})
	}
}

// With the sigmas of one position halved or doubled the relative scales keep
// their mean; with weights from the reported variances they do not.
func TestWrongSigmasLeaveScalesUnbiased(t *testing.T) {
	series := 16
	if full() {
		series = 200
	}
	for _, c := range []struct {
		name   string
		sigma  []float64
		weight Weighting
		biased bool
	}{
		{"true", nil, WeightExpected, false},
		{"halved", []float64{1, 0.5, 1}, WeightExpected, false},
		{"doubled", []float64{1, 2, 1}, WeightExpected, false},
		{"halved, reported weights", []float64{1, 0.5, 1}, WeightReported, true},
	} {
		var k, b tally
		for r := range series {
			in, truth := simulate(simPlan{seed: 7000 + uint64(r), unique: 400, lnGain: []float64{3.2, 3.4, 3.6}, sigma: c.sigma, flat: true})
			f, err := Estimate(context.Background(), in, &Settings{Model: BOnly, Weighting: c.weight})
			if err != nil {
				t.Fatal(err)
			}
			k.add((f.LnKMean[1]-truth.lnK(1, 0))/f.LnKMeanSE[1], 1.96)
			b.add((f.B[1]-truth.plan.b[1])/f.BSE[1], 1.96)
		}
		t.Logf("%s: mean z of ln K %.2f, of B %.2f", c.name, k.z/k.n, b.z/b.n)
		lim := 4 / math.Sqrt(k.n)
		if fair := math.Abs(k.z/k.n) <= lim && math.Abs(b.z/b.n) <= lim; fair == c.biased {
			t.Errorf("sigmas %s: mean z of ln K %.2f, of B %.2f, limit %.2f", c.name, k.z/k.n, b.z/b.n, lim)
		}
	}
}

// Relative curves rest on matched indices: where equal raw indices share nearly
// all of a large multiplicative error, d_p is known better than c, and better
// than in a fit that is kept from seeing which indices are equal.
func TestMatchedIndicesFixRelativeCurves(t *testing.T) {
	var with, without, common tally
	for r := range 12 {
		in, truth := simulate(simPlan{seed: 8000 + uint64(r), unique: 500, noiseB: []float64{.3, .3, .3}, shared: .95, lnGain: []float64{7, 7.3, 7.6}})
		apart := in
		apart.Raw = make([]int32, in.Len())
		for i := range apart.Raw {
			apart.Raw[i] = int32(i)
		}
		f, g := estimate(t, in, nil), estimate(t, apart, nil)
		if !(f.Shared > 0.75) || g.Shared != 0 {
			t.Fatalf("shared part %g of .95, without matched indices %g", f.Shared, g.Shared)
		}
		for phi := -50.0; phi <= 50; phi += 20 {
			d := truth.lnK(1, phi) - truth.lnK(0, phi)
			with.add(f.LnKAt(1, phi)-f.LnKAt(0, phi)-d, 1)
			without.add(g.LnKAt(1, phi)-g.LnKAt(0, phi)-d, 1)
			common.add(f.LnKAt(0, phi)-truth.lnK(0, phi), 1)
		}
	}
	d, o, c := math.Sqrt(with.z2/with.n), math.Sqrt(without.z2/without.n), math.Sqrt(common.z2/common.n)
	t.Logf("error of d %.4f, without matched indices %.4f, of c %.4f", d, o, c)
	if !(d < 0.8*c && d < 0.8*o) {
		t.Errorf("error of the relative curve %.4f, without matched indices %.4f, of the common curve %.4f", d, o, c)
	}
}

// Five per cent of wild values move the scale by less than its error.
func TestOutliersAreListedAndHarmless(t *testing.T) {
	in, truth := simulate(simPlan{seed: 19, unique: 800})
	for i := range in.I {
		if i%20 == 0 {
			in.I[i] += 40 * math.Sqrt(in.Var[i])
		}
	}
	f := estimate(t, in, nil)
	listed := map[int]bool{}
	for _, o := range f.Outliers {
		listed[o.Row] = true
		i := o.Row
		if o.I != in.I[i] || o.Unique != in.Unique[i] || o.Raw != in.Raw[i] || o.Position != in.Position[i] || o.Phi != in.Phi[i] || o.Weight != f.Weight[i] {
			t.Fatalf("outlier %+v does not describe row %d", o, i)
		}
		floatcmp.Check(t, "z", o.Z, (o.I-o.Expected)/o.Sigma, 1e-12, 1e-12)
		if !(o.Weight < 0.1) {
			t.Errorf("weight %g listed", o.Weight)
		}
	}
	missed, wrong := 0, 0
	for i := range in.I {
		if i%20 == 0 && !listed[i] {
			missed++
		}
		if i%20 != 0 && listed[i] {
			wrong++
		}
	}
	t.Logf("%d listed, %d wild values missed, %d others listed", len(listed), missed, wrong)
	if missed*10 > in.Len()/20 || wrong*200 > in.Len() {
		t.Errorf("%d wild values missed, %d others listed of %d", missed, wrong, in.Len())
	}
	for p := range 3 {
		if !has(f.Warnings, "outliers", where(p)) || !(f.OutlierShare[p] > 0.03) {
			t.Errorf("position %d: share %g without a caution", p, f.OutlierShare[p])
		}
		for phi := -50.0; phi <= 50; phi += 20 {
			floatcmp.Check(t, "curve in standard errors", (f.LnKAt(p, phi)-truth.lnK(p, phi))/f.LnKSEAt(p, phi), 0, 4.5, 0)
		}
	}
}
