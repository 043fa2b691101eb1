package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// Closed forms: the exchange against the thinnest position is 1 - exp(-0.06 t), t the thickness beyond
// it in 100 nm, so that mu = -ln(1-m) lies on a line of slope 0.06 through the origin in every crystal;
// without deviations the strengths become (1-m) e + m, so that the true correlation of
// thinnest and thickest is 1 and the moment ratio is m.
func TestGrowthOfAKnownExchange(t *testing.T) {
	const slope = 0.06
	p := simulate.Sound(11)
	p.DMin, p.Common.Deviation, p.Common.Scatter = 1.35, 1e-9, 0.02
	for i := range p.Crystals {
		at := p.Crystals[i].Positions
		for j := range at {
			at[j].Exchange = -math.Expm1(-slope * (at[j].ThicknessNM - at[0].ThicknessNM) / 100)
		}
	}
	s := studyOf(t, p, quick())
	if _, err := s.Join(context.Background()); err != nil {
		t.Fatal(err)
	}
	joined := s.pooled.thickness
	if len(joined.Lines) != 3 {
		t.Fatalf("%d lines: %+v", len(joined.Lines), joined)
	}
	se := func(v Interval) float64 { return (v.Hi - v.Lo) / 2 / zOf(0.95) }
	for _, l := range joined.Lines {
		for k, nm := range l.T {
			floatcmp.Check(t, l.Crystal+": mu", l.Mu[k], slope*(nm-l.T[0])/100, 4*l.MuSE[k], 0)
		}
		if !(l.MuSE[0] == 0 && l.MuSE[2] > 0.001 && l.MuSE[2] < 0.02) {
			t.Errorf("%s: errors of mu %v", l.Crystal, l.MuSE)
		}
		floatcmp.Check(t, l.Crystal+": slope", l.Slope.Value, slope, 4*se(l.Slope), 0)
	}
	if e := se(joined.Slope); !(e < 0.008) {
		t.Errorf("a joint slope uncertain by %g tells nothing", e)
	}
	floatcmp.Check(t, "joint slope", joined.Slope.Value, slope, 4*se(joined.Slope), 0)
	for i := range p.Crystals {
		r := &primaryOf(t, s, i).Result
		m := -math.Expm1(-slope * (r.ThicknessNM[1] - r.ThicknessNM[0]) / 100)
		c := Interval{Value: r.Correlation.R, Lo: r.Correlation.Lo, Hi: r.Correlation.Hi}
		v := Interval{Value: r.MomentRatio.M, Lo: r.MomentRatio.Lo, Hi: r.MomentRatio.Hi}
		if !(se(c) < 0.02 && se(v) < 0.02) {
			t.Errorf("%s: r %+v, moment ratio %+v", r.Crystal, c, v)
		}
		floatcmp.Check(t, r.Crystal+": true correlation", c.Value, 1, 4*se(c)+0.004, 0)
		floatcmp.Check(t, r.Crystal+": moment ratio", v.Value, m, 4*se(v)+0.004, 0)
	}
}

// Noise alone: the ghost in the result is what its naive curve shows, in size and sign (Robbins 1956, for
// variances that change with intensity). The thick position has four times the counts, so
// that its own ghost is too small to be seen in one contrast.
func TestGhostInTheResultFollowsTheCurve(t *testing.T) {
	p := simulate.Null(4)
	p.Common.Deviation, p.Common.Scatter, p.DMin = 1e-9, 0.02, 1.25
	for i := range p.Crystals {
		for j := range p.Crystals[i].Positions {
			p.Crystals[i].Positions[j].Counts = []float64{20, 30, 80}[j]
		}
	}
	r := &primaryOf(t, studyOf(t, p, quick()), 0).Result
	for _, axis := range []string{"thin", "mean"} {
		n, ok := r.Naive[axis]
		if !ok || len(n.Ghost) != len(n.Mean) || len(n.Grid) != len(n.Mean) {
			t.Fatalf("%s: %+v", axis, n)
		}
		var xy, xx float64
		for k, g := range n.Ghost {
			xy += n.Mean[k] * g
			xx += g * g
		}
		t.Logf("%s: curve over ghost %.2f, correlation %.2f", axis, xy/xx, correlation(n.Mean, n.Ghost))
		floatcmp.Check(t, axis+": curve over ghost", xy/xx, 1, 0.3, 0)
		if c := correlation(n.Mean, n.Ghost); !(c > 0.9) {
			t.Errorf("%s: correlation %.2f", axis, c)
		}
	}
}
