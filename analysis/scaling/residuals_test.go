package scaling

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Blom's levels, n = 5 and 10: R ppoints and qnorm.
func TestNormalPlotLevels(t *testing.T) {
	p := normalPlot(0, []float64{5, 1, 4, 2, 3})
	floatcmp.CheckSlice(t, "n=5", p.Expected, []float64{-1.17976112, -.49720057, 0, .49720057, 1.17976112}, 1e-8, 0)
	floatcmp.CheckSlice(t, "sorted", p.Observed, []float64{1, 2, 3, 4, 5}, 0, 0)
	p = normalPlot(0, []float64{0, 1, 2, 3, 4, 5, 6, 7, 8, 9})
	floatcmp.CheckSlice(t, "n=10", p.Expected[5:], []float64{.12258084, .37546177, .65542351, 1.00049055, 1.54663527}, 1e-8, 0)
}

func TestNormalPlotOfNormalAndHeavy(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	x, y := make([]float64, 5000), make([]float64, 5000)
	for i := range x {
		x[i] = 2 * rng.NormFloat64()
		y[i] = rng.NormFloat64() / math.Abs(rng.NormFloat64())
	}
	p, q := normalPlot(0, x), normalPlot(1, y)
	floatcmp.Check(t, "slope", p.Slope, 2, 0.06, 0)
	if len(p.Expected) != 1000 || p.N != 5000 || !(p.Correlation > 0.999) || !(q.Correlation < 0.9) || !(q.Beyond3 > 0.1) {
		t.Errorf("n %d of %d, correlations %g and %g, beyond 3 %g", len(p.Expected), p.N, p.Correlation, q.Correlation, q.Beyond3)
	}
	if few := normalPlot(0, []float64{1, 2}); !math.IsNaN(few.Correlation) || few.N != 2 {
		t.Errorf("%+v", few)
	}
}

// Before the noise model strong reflections stand out, after it chi-square is 1
// in every bin of strength, angle and resolution.
func TestChiSquareBeforeAndAfter(t *testing.T) {
	in, _ := simulate(simPlan{seed: 31, unique: 800, noiseB: []float64{.15, .15, .15}, lnGain: []float64{6, 6.2, 6.4}})
	f := estimate(t, in, nil)
	n := fitNoise(t, in, f, nil)
	before := ChiSquare(in, f, Residuals(in, f, nil, FromPosition), ByStrength, 5)
	z := Residuals(in, f, n, FromPosition)
	if len(before) != 15 || !(before[4].ChiSquare > 3) {
		t.Fatalf("before: %+v", before)
	}
	for _, by := range []By{ByStrength, ByAngle, ByResolution} {
		for _, c := range ChiSquare(in, f, z, by, 5) {
			floatcmp.Check(t, "chi-square by "+by.String(), c.ChiSquare, 1, 6*math.Sqrt(2/float64(c.N)), 0)
			floatcmp.Check(t, "its robust form", c.Robust, 1, 9*math.Sqrt(2/float64(c.N)), 0)
			if c.Lo > c.Hi {
				t.Errorf("bin from %g to %g", c.Lo, c.Hi)
			}
		}
	}
	for _, p := range NormalPlots(in, z) {
		floatcmp.Check(t, "slope", p.Slope, 1, 0.06, 0)
	}
	total := 0
	for _, c := range ChiSquare(in, f, z, ByAngle, 7) {
		total += c.N
	}
	alone := 0
	for _, x := range z {
		if math.IsNaN(x) {
			alone++
		}
	}
	if total+alone != in.Len() {
		t.Errorf("%d in bins and %d alone of %d", total, alone, in.Len())
	}
}

func TestResidualsByHand(t *testing.T) {
	in, f := grouped([][]float64{{3, 5}, {7}}, 2, 4)
	z := Residuals(in, f, nil, FromJoint)
	floatcmp.CheckSlice(t, "z", z, []float64{-1, 1, math.NaN()}, 1e-12, 0)
	defer func() {
		if v := recover(); v == nil || !strings.Contains(v.(string), "scaling: ChiSquare: 1 residuals for 3") {
			t.Errorf("got %v", v)
		}
	}()
	ChiSquare(in, f, z[:1], ByStrength, 3)
}

// A step of 20 % in five degrees, too narrow for the spline, shows in the bins.
func TestAngleResidualsShowAFrameFault(t *testing.T) {
	in, _ := simulate(simPlan{seed: 32, unique: 1000})
	for i := range in.I {
		if in.Position[i] == 1 && in.Phi[i] >= 10 && in.Phi[i] < 12 {
			in.I[i] *= 0.8
			in.Var[i] *= 0.8
		}
	}
	f := estimate(t, in, nil)
	n := fitNoise(t, in, f, nil)
	bins, err := AngleResiduals(in, f, n, 2)
	if err != nil {
		t.Fatal(err)
	}
	count := 0
	for _, b := range bins {
		count += b.N
		if b.Position == 1 && b.Lo == 10 {
			if !(b.LnK < -0.1 && b.LnK/b.SE < -4) {
				t.Errorf("%+v", b)
			}
		} else if b.N > 20 {
			floatcmp.Check(t, "bin without a fault, in standard errors", b.LnK/b.SE, 0, 6, 0)
		}
	}
	if count != in.Len() {
		t.Errorf("%d observations in bins of %d", count, in.Len())
	}
	if _, err := AngleResiduals(in, f, n, -1); err == nil || !strings.Contains(err.Error(), "bin width is -1") {
		t.Errorf("got %v", err)
	}
}

func TestAnchorsAndVariants(t *testing.T) {
	in, truth := simulate(simPlan{seed: 33, unique: 600})
	fits, err := Variants(t.Context(), in, nil, nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	if len(fits) != 20 {
		t.Fatalf("%d fits", len(fits))
	}
	for _, f := range fits {
		s := f.Settings
		if s.Model == Full {
			for p := 1; p < 3; p++ {
				d := f.LnKAt(p, 5) - f.LnKAt(0, 5) - truth.lnK(p, 5) + truth.lnK(0, 5)
				floatcmp.Check(t, s.Anchor.String()+": ln K in standard errors", d/math.Hypot(f.LnKSEAt(p, 5), f.LnKSEAt(0, 5)), 0, 4, 0)
			}
		}
		if !f.Converged {
			t.Errorf("%v, %v: not converged", s.Model, s.Anchor)
		}
	}
	for i, name := range []string{"all", "weak half", "strong half", "low resolution", "high resolution"} {
		if got := fits[i].Settings.Anchor.String(); got != name {
			t.Errorf("fit %d is anchored on %s", i, got)
		}
	}
	// the strong half carries nearly all information, the weak half little
	if !(fits[1].LnKMeanSE[1] > 1.5*fits[2].LnKMeanSE[1]) || !(fits[2].LnKMeanSE[1] >= 0.9*fits[0].LnKMeanSE[1]) {
		t.Errorf("standard errors: all %g, weak %g, strong %g", fits[0].LnKMeanSE[1], fits[1].LnKMeanSE[1], fits[2].LnKMeanSE[1])
	}
}

func TestNames(t *testing.T) {
	for _, c := range [][2]string{
		{BOnly.String(), "B only"}, {WeightReported.String(), "reported"}, {CovModel.String(), "model"},
		{ByAngle.String(), "angle"}, {FromPosition.String(), "mean in the position"}, {Model(7).String(), "unknown model 7"},
	} {
		if c[0] != c[1] {
			t.Errorf("%q, want %q", c[0], c[1])
		}
	}
}
