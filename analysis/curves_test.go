package analysis

import (
	"context"
	"math"
	"strings"
	"testing"

	"thinward/analysis/simulate"
)

// A B factor of the thick position is the trend with resolution, although the scale
// takes it off everything else.
func TestResolutionKeepsB(t *testing.T) {
	p := simulate.Sound(1)
	p.Crystals = p.Crystals[:1]
	p.Crystals[0].Positions[2].B = 1
	s := studyOf(t, p, quick())
	if _, err := s.Scale(context.Background()); err != nil {
		t.Fatal(err)
	}
	x, err := s.paired(context.Background(), s.primaryContrasts()[0])
	if err != nil {
		t.Fatal(err)
	}
	if err := s.resolution(context.Background(), x); err != nil {
		t.Fatal(err)
	}
	if r := x.Result.Resolution; !(r.DeltaBLo > 0.9 && r.DeltaBHi < 1.2 && r.DeltaBLo < r.DeltaB && r.Share > 0.9) {
		t.Errorf("B of 1 reads as %.3f (%.3f to %.3f), share %.2f", r.DeltaB, r.DeltaBLo, r.DeltaBHi, r.Share)
	}
}

// A difference of B of 0.4 in the thick positions comes back from both estimates, within
// three of their errors, and the words set them side by side.
func TestBothDifferencesOfB(t *testing.T) {
	s := studyOf(t, thickOnly(3, func(q *simulate.Position) { q.B = 0.4 }), quick())
	for i := range 2 {
		r := primaryOf(t, s, i).Result.Resolution
		se := (r.DeltaBHi - r.DeltaBLo) / 2 / zOf(0.95)
		if !(math.Abs(r.DeltaB-0.4) < 3*se) || !(math.Abs(r.FittedB-0.4) < 3*r.FittedBSE) || !(r.FittedBSE > 0 && r.FittedBSE < 0.2) {
			t.Errorf("%+v", r)
		}
		if !strings.HasPrefix(r.Reconciled, "sums by shell say ") || !strings.Contains(r.Reconciled, "the fitted scale "+short(r.FittedB)) {
			t.Error(r.Reconciled)
		}
	}
	apart := reconciled(&Resolution{DeltaB: -0.6, DeltaBLo: -0.8, DeltaBHi: -0.4, FittedB: 0, FittedBSE: 0.1}, 0.1)
	near := reconciled(&Resolution{DeltaB: -0.2, DeltaBLo: -0.4, DeltaBHi: 0, FittedB: 0, FittedBSE: 0.1}, 0.1)
	if !strings.Contains(apart, "more apart") || !strings.Contains(near, "the same within") || reconciled(&Resolution{DeltaB: math.NaN()}, 0.1) != "" {
		t.Errorf("%q, %q", apart, near)
	}
}
