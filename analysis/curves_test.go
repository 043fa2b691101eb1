package analysis

import (
	"context"
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
