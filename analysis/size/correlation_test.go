package size

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// halves draws exponential strengths, log-normal deviations of size dev that
// each position has for itself, and counting noise of each half.
func halves(r *rand.Rand, n, shells int, m, dev, noise float64) *Halves {
	h := &Halves{Shells: shells}
	for i := range n {
		e := r.ExpFloat64()
		x1 := math.Exp(dev*r.NormFloat64() - dev*dev/2)
		x2 := math.Exp(dev*r.NormFloat64() - dev*dev/2)
		h.Shell = append(h.Shell, int32(i*shells/n))
		h.ThinA = append(h.ThinA, e*x1+noise*r.NormFloat64())
		h.ThinB = append(h.ThinB, e*x1+noise*r.NormFloat64())
		thick := ((1-m)*e + m) * x2
		h.ThickA = append(h.ThickA, thick+noise*r.NormFloat64())
		h.ThickB = append(h.ThickB, thick+noise*r.NormFloat64())
	}
	return h
}

// Without deviations r = 1 and the moment ratio is m; with them, E x^2 = 1 + d,
// V = (1+d) <y^2> - 1 and C = <y1 y2> - 1, y the strengths.
func TestTrueCorrelation(t *testing.T) {
	for _, c := range []struct{ m, dev float64 }{{.1, 0}, {0, .3}, {.1, .3}} {
		var r, ratio, inR, inRatio tally
		d := math.Exp(c.dev*c.dev) - 1
		vThin := 2*(1+d) - 1
		vThick := (1+d)*(1+(1-c.m)*(1-c.m)) - 1
		wantR := (1 - c.m) / math.Sqrt(vThin*vThick)
		wantRatio := 1 - math.Sqrt(vThick/vThin)
		g := stream(31)
		for range repeats(150, 1000) {
			x, err := TrueCorrelation(halves(g, 1500, 10, c.m, c.dev, .3), nil, nil)
			x = must(t, x, err)
			r.add(x.R.Value)
			ratio.add(x.MomentRatio.Value)
			inR.add(within(wantR, x.R))
			inRatio.add(within(wantRatio, x.MomentRatio))
		}
		// Shell means cost a bias of order shells/N, here below .004.
		inBand(t, "r less truth", r.mean()-wantR, -.006-3*r.se(), .006+3*r.se())
		inBand(t, "moment ratio less truth", ratio.mean()-wantRatio, -.004-3*ratio.se(), .004+3*ratio.se())
		inBand(t, "coverage of r", inR.mean(), .95-.04-3*inR.binomial(.95), 1)
		inBand(t, "coverage of the moment ratio", inRatio.mean(), .95-.03-3*inRatio.binomial(.95), 1)
	}
}

func within(truth float64, v Value) float64 {
	if v.Lo <= truth && truth <= v.Hi {
		return 1
	}
	return 0
}

// binomial is the standard error of a share p over the tally.
func (t *tally) binomial(p float64) float64 { return math.Sqrt(p * (1 - p) / float64(len(t.v))) }

func TestCorrelationWithoutSignal(t *testing.T) {
	g := stream(32)
	h := halves(g, 400, 4, 0, 0, .3)
	for i := range h.ThinA {
		h.ThinA[i] = 1 + .3*g.NormFloat64()
		h.ThinB[i] = 2 - h.ThinA[i]
	}
	x, err := TrueCorrelation(h, nil, nil)
	x = must(t, x, err)
	if x.Estimable || !math.IsNaN(x.R.Value) || !math.IsInf(x.MomentRatio.Lo, -1) || !strings.Contains(x.Why, "thin position share no signal") {
		t.Errorf("%+v", x)
	}
	if !(x.VThin.Value < 0) || !(x.VThick.Value > .5) {
		t.Errorf("V = %g and %g", x.VThin.Value, x.VThick.Value)
	}
	// Scales by half and by shell do not matter, nor does a lone half.
	h = halves(stream(33), 300, 3, .1, .2, .3)
	a, err := TrueCorrelation(h, nil, nil)
	a = must(t, a, err)
	for i, s := range h.Shell {
		h.ThinA[i] *= float64(2 + s)
		h.ThickB[i] *= .1
	}
	for _, v := range []*[]float64{&h.ThinA, &h.ThinB, &h.ThickA} {
		*v = append(*v, 1e3)
	}
	h.ThickB, h.Shell = append(h.ThickB, math.NaN()), append(h.Shell, 0)
	b, err := TrueCorrelation(h, nil, nil)
	b = must(t, b, err)
	floatcmp.Check(t, "r", b.R.Value, a.R.Value, 0, 1e-12)
	floatcmp.Check(t, "ratio", b.MomentRatio.Value, a.MomentRatio.Value, 1e-12, 1e-12)
	floatcmp.Check(t, "SE", b.R.SE, a.R.SE, 0, 1e-12)
}

// Deviations of 20 % in both positions, wholly shared by the halves, and m = 0:
// the two ends lie on either side of the truth.
func TestBracket(t *testing.T) {
	var up, down tally
	g := stream(34)
	for range repeats(40, 300) {
		h := halves(g, 4000, 1, 0, .2, .2)
		n := len(h.Shell)
		thin, thick := make([]float64, n), make([]float64, n)
		for i := range thin {
			thin[i] = (h.ThinA[i] + h.ThinB[i]) / 2
			thick[i] = (h.ThickA[i] + h.ThickB[i]) / 2
		}
		b, err := Bracket(h, thin, thick, nil, nil)
		b = must(t, b, err)
		up.add(b.FromThin.M)
		down.add(b.FromThick.M)
		if !(b.Lo < b.FromThick.M && b.FromThin.M < b.Hi) {
			t.Fatalf("bracket %g to %g around %g and %g", b.Lo, b.Hi, b.FromThick.M, b.FromThin.M)
		}
	}
	// Limit by the formula b = V/(V + C), V = 1 and C = 2
	// (exp(.2^2) - 1) what the halves of one position share beyond the law.
	want := 1 - 1/(1+2*math.Expm1(.04))
	inBand(t, "axis from thin", up.mean(), want-.012, want+.004)
	inBand(t, "axis from thick", down.mean(), 1-1/(1-want)-.004, 1-1/(1-want)+.014)
}

// Each raw index has a deviation of 30 % of its own that both positions see alike.
// Nothing changes between the positions, so r is 1; products of equal halves in C
// would make it (2 exp(.09) + 2)/4 - 1 over 1 higher, 1.09.
func TestTrueCorrelationOfOrientations(t *testing.T) {
	const own = .3
	var r tally
	g := stream(33)
	for range repeats(60, 400) {
		h := halves(g, 1500, 10, 0, 0, 0)
		for i := range h.Shell {
			a, b := math.Exp(own*g.NormFloat64()-own*own/2), math.Exp(own*g.NormFloat64()-own*own/2)
			h.ThinA[i], h.ThinB[i] = h.ThinA[i]*a+.1*g.NormFloat64(), h.ThinB[i]*b+.1*g.NormFloat64()
			h.ThickA[i], h.ThickB[i] = h.ThickA[i]*a+.1*g.NormFloat64(), h.ThickB[i]*b+.1*g.NormFloat64()
		}
		x, err := TrueCorrelation(h, nil, nil)
		r.add(must(t, x, err).R.Value)
	}
	inBand(t, "r", r.mean(), 1-.004-3*r.se(), 1+.004+3*r.se())
}
