package analysis

import (
	"context"
	"testing"

	"thinward/analysis/simulate"
)

// The agreement across positions holds all observations of the crystal and every
// reflection of any position, and with deviations that differ between positions
// it is worse than that within each.
func TestQualityAcrossPositions(t *testing.T) {
	rows, _, err := studyOf(t, simulate.Null(3), quick()).Quality(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	byCrystal := map[string][]Quality{}
	for _, q := range rows {
		if q.Shell == 0 {
			byCrystal[q.Crystal] = append(byCrystal[q.Crystal], q)
		}
	}
	if len(byCrystal) != 3 {
		t.Fatalf("%d crystals", len(byCrystal))
	}
	for name, list := range byCrystal {
		across := list[len(list)-1]
		if across.Position != AllPositions || len(list) != 4 {
			t.Fatalf("%s: %d rows, the last of %s", name, len(list), across.Position)
		}
		observations, unique := 0, 0
		for _, q := range list[:3] {
			observations += q.Observations
			unique = max(unique, q.Unique)
			if !(across.RMeas > q.RMeas) {
				t.Errorf("%s: R_meas %.4f across positions, %.4f within %s", name, across.RMeas, q.RMeas, q.Position)
			}
		}
		if across.Observations != observations || across.Unique < unique {
			t.Errorf("%s: %d observations of %d reflections across positions, %d and at least %d in them", name, across.Observations, across.Unique, observations, unique)
		}
	}
}
