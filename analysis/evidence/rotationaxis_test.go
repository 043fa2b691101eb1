package evidence

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// Vectors that lie across the beam at their angle, turned about a known axis, give
// that axis back; with angles of no rotation there is none.
func TestRotationAxis(t *testing.T) {
	r := resample.NewSeed(8).At("axis").Stream(0)
	axis := [3]float64{2.0 / 3, -1.0 / 3, 2.0 / 3}
	across := [3]float64{1 / math.Sqrt2, 0, -1 / math.Sqrt2} // square to the axis
	third := [3]float64{axis[1]*across[2] - axis[2]*across[1], axis[2]*across[0] - axis[0]*across[2], axis[0]*across[1] - axis[1]*across[0]}
	var x [][3]float64
	var phi []float64
	for range 500 {
		p := -60 + 120*r.Float64()
		s, c := math.Sincos(p * math.Pi / 180)
		// The beam in the crystal is across cos + third sin; x lies square to it.
		a, b, tilt := r.Normal(), r.Normal(), 0.002*r.Normal()
		var v [3]float64
		for k := range 3 {
			side := -s*across[k] + c*third[k]
			v[k] = a*axis[k] + b*side + tilt*(c*across[k]+s*third[k])
		}
		x, phi = append(x, v), append(phi, p)
	}
	got, err := RotationAxis(x, phi)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "cosine with the axis", math.Abs(dot(got.Direction, axis)), 1, 1e-4, 0)
	if !(got.ResidualDeg < 1) {
		t.Errorf("residual %g degrees", got.ResidualDeg)
	}
	floatcmp.Check(t, "angle to itself", got.AngleDeg(axis), 0, 1, 0)
	floatcmp.Check(t, "angle across", got.AngleDeg(across), 90, 1, 0)
	for i := range phi {
		phi[i] = -60 + 120*r.Float64()
	}
	if got, err := RotationAxis(x, phi); err == nil && got.ResidualDeg < 3 {
		t.Errorf("random angles gave %+v", got)
	}
	if _, err := RotationAxis(x[:20], phi[:20]); err == nil {
		t.Error("20 crossings passed")
	}
}
