package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// Equivalents that were met at 13 and at -43 degrees have no angle in common, though their mean is
// one; two crossings of half a degree apart have.
func TestAngleOfAPair(t *testing.T) {
	got := oneAngle([]int32{4, 4, 7, 7, 9}, []float64{13.1, -43.5, 20, 20.5, -8})
	if _, ok := got[4]; ok {
		t.Error("angles far apart have a mean")
	}
	floatcmp.Check(t, "near", got[7], 20.25, 1e-12, 0)
	floatcmp.Check(t, "one", got[9], -8, 0, 0)
	if !math.IsNaN(angleOf(oneAngle([]int32{1}, nil), 1)) {
		t.Error("a list without angles has one")
	}
}

// The tilt is from the angle at which the slab faces the beam, 4 degrees here: 16 and 44 away
// on either side are 30 on the mean, though the angles are 32 apart from their own mean.
func TestTiltOfAPair(t *testing.T) {
	p := simulate.Sound(1)
	p.Crystals = p.Crystals[:1]
	s := studyOf(t, p, quick())
	if _, err := s.IntakeTable(context.Background()); err != nil {
		t.Fatal(err)
	}
	at := &s.Series.Crystals[0].Positions[0]
	at.TiltZeroDeg, at.HasTiltZero = 4, true
	x := &intensity.Scaled{Unique: []int32{2, 2, 5}, Phi: []float64{20, -40, 14}}
	got := s.meanTilts(0, 0, x)
	floatcmp.Check(t, "either side", got[2], 30, 1e-12, 0)
	floatcmp.Check(t, "one", got[5], 10, 1e-12, 0)
	at.HasTiltZero = false
	if s.meanTilts(0, 0, x) != nil {
		t.Error("a slab of unknown setting has tilts")
	}
}
