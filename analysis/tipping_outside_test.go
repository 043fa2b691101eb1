package analysis

import (
	"context"
	"testing"

	"thinward/analysis/simulate"
)

// Nothing changes with thickness, and the variances of the thin position are 2.25 times too small: the
// inverse-variance axis draws a curve out of noise. The factor on the ratio of the sigmas
// that takes it away lies above 1 and no farther than the 1.5 by which they are wrong. With
// the variances as the noise model left them nothing is found on the same pairs.
func TestTippingUndoesWrongSigmas(t *testing.T) {
	p := simulate.Null(4)
	p.Common.Deviation, p.Common.Scatter, p.DMin = 1e-9, 0.02, 1.3
	for i := range p.Crystals {
		for j := range p.Crystals[i].Positions {
			p.Crystals[i].Positions[j].Counts = 25
		}
	}
	s := studyOf(t, p, quick())
	if _, err := s.Scale(context.Background()); err != nil {
		t.Fatal(err)
	}
	var found [2]int
	for k, factor := range []float64{1, 1 / 2.25} {
		for i, c := range s.primaryContrasts() {
			for o := range s.scaled[i].Positions[c.Thin].Var {
				s.scaled[i].Positions[c.Thin].Var[o] *= factor
			}
		}
		for _, c := range s.primaryContrasts() {
			x, err := s.paired(context.Background(), c)
			if err != nil {
				t.Fatal(err)
			}
			f, err := s.tipping(context.Background(), x)
			if err != nil {
				t.Fatal(err)
			}
			t.Logf("variances of thin times %.2f: %.2f, %s", factor, f.Value, f.Why)
			if f.Value != 1 {
				found[k]++
				if k == 1 && !(f.Value > 1.05 && f.Value <= 1.52) {
					t.Errorf("%s: a tipping ratio of %.2f", s.Name(c), f.Value)
				}
			}
		}
	}
	if found[0] > 1 || found[1] < 2 {
		t.Errorf("a curve in %d contrasts with right sigmas and in %d with wrong ones", found[0], found[1])
	}
}
