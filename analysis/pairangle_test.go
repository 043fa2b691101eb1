package analysis

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
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
