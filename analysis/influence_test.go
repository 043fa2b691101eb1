package analysis

import (
	"testing"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

// Two reflections, each twice at good angles and once, far off, between 20 and
// 30 degrees: leaving that range out leaves equal pairs, whose R_meas is 0. With
// it R_meas is by hand: means 40/3 and 80/3, deviations 2*(10/3)+20/3 = 40/3 and
// 80/3, sqrt(3/2)(40/3+80/3)/(40+80) = sqrt(3/2)/3.
func TestInfluenceFindsTheBadRange(t *testing.T) {
	p := &intensity.Scaled{
		Unique: []int32{0, 0, 0, 1, 1, 1}, Raw: []int32{0, 1, 2, 3, 4, 5},
		I: []float64{10, 10, 20, 20, 20, 40}, Phi: []float64{1, 12, 25, 2, 13, 26},
	}
	rows := influences(p)
	if len(rows) != 3 {
		t.Fatalf("%d ranges, want 3: %+v", len(rows), rows)
	}
	for _, r := range rows {
		floatcmp.Check(t, "R_meas", r.RMeas, 0.40824829046386296, 1e-12, 0)
		if r.Observations != 2 {
			t.Errorf("range %g to %g holds %d observations", r.LoDeg, r.HiDeg, r.Observations)
		}
	}
	floatcmp.Check(t, "without the bad range", rows[2].RMeasWithout, 0, 1e-12, 0)
	if !(rows[0].RMeasWithout > rows[0].RMeas) {
		t.Errorf("without a good range R_meas is %g, with it %g", rows[0].RMeasWithout, rows[0].RMeas)
	}
}
