package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// The smallest m that would have been seen is (z.975 + z.8) standard errors, 1.95996398454
// and 0.841621233573 by R qnorm, and infinite where m is not known. The simultaneous band is
// mean and multiplier times the error; its multiplier lies between Sidak's for the twenty
// disjoint windows of 5 % (3.016, less what correlation and 400 draws may take) and
// for as many as are drawn.
func TestContrastSaysWhatWouldBeSeen(t *testing.T) {
	p := small()
	p.DMin = 1.4
	s := studyOf(t, p, &Settings{Replicates: 400, Flips: 100})
	x := primaryOf(t, s, 0)
	r := &x.Result
	if r.Exchange.F < firmF {
		t.Fatalf("the axis is weak (F = %g): another rule holds", r.Exchange.F)
	}
	floatcmp.Check(t, "smallest m", r.MinimumM, (1.95996398454+0.841621233573)*r.Exchange.SE, 0, 1e-9)
	if !(r.Exchange.SE > 0.001) {
		t.Errorf("the error of m is %g", r.Exchange.SE)
	}
	c := &r.Strength
	sidak := func(k float64) float64 { return zOf(math.Pow(0.95, 1/k)) }
	floatcmp.Check(t, "Sidak's multiplier of 20", sidak(20), 3.01599453349, 1e-9, 0)
	for g, mean := range c.Mean {
		up, down := (c.HiSim[g]-mean)/x.Band.SE[g], (mean-c.LoSim[g])/x.Band.SE[g]
		if !(up > sidak(20)-0.35 && up < sidak(float64(len(c.Mean)))+0.3) {
			t.Fatalf("window %d: the simultaneous band is %.3f errors wide", g, up)
		}
		floatcmp.Check(t, "lower side", down, up, 0, 1e-9)
	}
	// One p for strength and resolution under the same flips lies between the smaller of
	// both and their sum (Bonferroni).
	if own := x.Band.Flip.SetP; len(own) != 2 || c.P < math.Min(own[0], own[1]) || c.P > own[0]+own[1] {
		t.Errorf("p = %g of orders with %v", c.P, x.Band.Flip.SetP)
	}
	p.Crystals = p.Crystals[:1]
	one := primaryOf(t, studyOf(t, p, &Settings{Replicates: 50, Flips: 50}), 0)
	floatcmp.Check(t, "smallest m where there is a bracket only", one.Result.MinimumM, math.Inf(1), 0, 0)
}

// Deviations of 30 % that two positions do not share and no exchange: an axis from
// halves of the thin position reads V/(V + C) of the covariance with thick, and one from
// halves of the thick position of that with thin, V the variance of the strengths
// (between 1 and 2, Wilson 1949) and C = (1 + V)(exp(0.09) - 1) what halves share beside
// them: the slopes lie about 0.16 above 0 and 0.2 below. The model with curb and offset
// takes most of that up, and its ends err on no known side: they are not asked.
func TestBracketEndsErrOnTheirSides(t *testing.T) {
	p := simulate.Null(3)
	p.DMin, p.Crystals = 1.3, p.Crystals[:1]
	p.Crystals[0].Neighbours = 0
	_, x := sized(t, p)
	b := &x.Result.Bracket
	t.Logf("half of thin %+v, half of thick %+v, by the leading model %+v, %+v", b.ThinSlope, b.ThickSlope, b.Thin, b.Thick)
	if !(b.ThinSlope.Lo > 0 && b.ThinSlope.Value < 0.3 && b.ThickSlope.Hi < 0 && b.ThickSlope.Value > -0.4 && b.Lo < 0 && b.Hi > 0) {
		t.Errorf("%+v", b)
	}
}

// Neither kind of reading holds m alone. Deviations of 30 % that the positions do not share:
// the model with curb and offset takes part of an exchange of 0.1 for a curb and reads too
// little from either half, and the ends of the bracket are those of one slope. A curb and an
// offset in small deviations: one slope takes them for an exchange, from either half, and the
// bracket holds the true 0 by the model.
func TestBracketHoldsWhatEitherReadingMisses(t *testing.T) {
	read := func(deviation, exchange, curb, offset float64) *ContrastResult {
		p := simulate.Null(1)
		p.Crystals = p.Crystals[:1]
		p.Common.Deviation = deviation
		at := &p.Crystals[0].Positions[2]
		p.Crystals[0].Neighbours, at.Exchange, at.Curb, at.Offset = 0, exchange, curb, offset
		_, x := sized(t, p)
		return &x.Result
	}
	r := read(0.3, 0.1, 0, 0)
	b := &r.Bracket
	if !(b.Thin.Value < 0.1 && b.Thick.Value < 0.1) {
		t.Errorf("the model reads %+v and %+v: it shows nothing", b.Thin, b.Thick)
	}
	if !(b.Lo < 0.1 && b.Hi > 0.1 && r.Exchange.Hi == b.Hi) || b.Lo != b.ThickSlope.Lo || b.Hi != b.ThinSlope.Hi {
		t.Errorf("%+v", b)
	}
	r = read(0.1, 0, 0.02, 0.01)
	b = &r.Bracket
	if !(b.ThinSlope.Lo > 0 && b.ThickSlope.Lo > 0) {
		t.Errorf("one slope reads %+v and %+v: it shows nothing", b.ThinSlope, b.ThickSlope)
	}
	if !(b.Lo < 0 && b.Hi > 0) || b.Lo != math.Min(b.Thin.Lo, b.Thick.Lo) {
		t.Errorf("%+v", b)
	}
}

// Wilson 1949: a reflection that epsilon rotations leave alone is epsilon times as strong in
// the mean. In P m m m every zone has 2. With epsilon divided out they are as
// strong as the others, on the axis, in what the sizes are read from and in the
// halves; without, they would be twice as strong.
func TestEpsilonIsDividedOut(t *testing.T) {
	p := simulate.Sound(5)
	p.SpaceGroup, p.DMin, p.Crystals, p.Structure.Wilson = "P m m m", 1.35, p.Crystals[:2], true
	s := studyOf(t, p, &Settings{Replicates: 50, Flips: 50})
	if _, err := s.Scale(context.Background()); err != nil {
		t.Fatal(err)
	}
	x, err := s.paired(context.Background(), s.primaryContrasts()[0])
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name string
		v    []float64
	}{
		{"axis", x.Strengths.Z}, {"thin", x.Input.Thin}, {"thick", x.Input.Thick}, {"half of thin", x.Halves.ThinA}, {"half of thick", x.Halves.ThickB},
		{"thin over local mean", quotient(x.Pairs.Thin, x.Pairs.MeanPooled)},
	} {
		// Means by shell of the general reflections; the zones over them.
		sum, n := make([]float64, x.Pairs.Shells), make([]float64, x.Pairs.Shells)
		for i, k := range x.Pairs.Shell {
			if x.Pairs.Epsilon[i] == 1 && !math.IsNaN(c.v[i]) {
				sum[k] += c.v[i]
				n[k]++
			}
		}
		var ratio []float64
		for i, k := range x.Pairs.Shell {
			if x.Pairs.Epsilon[i] == 2 && !math.IsNaN(c.v[i]) && n[k] > 0 {
				ratio = append(ratio, c.v[i]*n[k]/sum[k])
			}
		}
		mean, square := 0.0, 0.0
		for _, v := range ratio {
			mean += v / float64(len(ratio))
		}
		for _, v := range ratio {
			square += (v - mean) * (v - mean) / float64(len(ratio)-1)
		}
		se := math.Sqrt(square / float64(len(ratio)))
		t.Logf("%s: %d reflections of zones, mean strength %.3f +- %.3f", c.name, len(ratio), mean, se)
		if !(se < 0.15) {
			t.Errorf("%s: a mean uncertain by %.2f tells nothing", c.name, se)
		}
		// The mean of a shell of general reflections adds a tenth to the error.
		floatcmp.Check(t, c.name, mean, 1, 4*se, 0.05)
	}
}

func quotient(a, b []float64) []float64 {
	out := make([]float64, len(a))
	for i := range out {
		out[i] = a[i] / b[i]
	}
	return out
}
