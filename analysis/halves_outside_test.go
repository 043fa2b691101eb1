package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Two positions with the very same rows: the halves of one name hold the same raw indices in both and
// are equal, while halves of different names are independent counts of different equivalents.
func TestHalvesOfEqualRowsAreEqual(t *testing.T) {
	p := small()
	p.DMin, p.Common.TiltThickens = 1.6, false
	series := seriesOf(t, p)
	for i := range series.Crystals {
		at := series.Crystals[i].Positions
		for j := range at {
			at[j].Rows = at[0].Rows
		}
	}
	s, err := New(series, quick())
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.Scale(context.Background()); err != nil {
		t.Fatal(err)
	}
	x, err := s.paired(context.Background(), s.primaryContrasts()[0])
	if err != nil {
		t.Fatal(err)
	}
	both, apart := 0, 0
	for i, a := range x.Halves.ThinA {
		b := x.Halves.ThinB[i]
		// Scale and noise of the two positions are fitted apart, to a thousandth.
		floatcmp.Check(t, "half A", x.Halves.ThickA[i], a, 0.05, 5e-3)
		floatcmp.Check(t, "half B", x.Halves.ThickB[i], b, 0.05, 5e-3)
		if t.Failed() {
			t.FailNow()
		}
		if !math.IsNaN(a) && !math.IsNaN(b) {
			both++
			if !floatcmp.Equal(a, b, 0.1, 0.01) {
				apart++
			}
		}
	}
	if both < 200 || apart < both*3/4 {
		t.Errorf("%d reflections have both halves, which differ in %d", both, apart)
	}
}
