package analysis

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/pool"
)

// A relative error common to all thicknesses lies along x, so generalised least
// squares with it in the covariance gives the same slope and just its square more
// variance; and however many crystals are pooled it stays.
func TestSlopeKeepsTheCommonThicknessError(t *testing.T) {
	const su = 0.1
	s := &Study{Series: Series{ThicknessScaleSU: su}, settings: (*Settings)(nil).filled()}
	x, y := []float64{0.8, 1.7}, []float64{0.045, 0.108}
	cov := mat.NewSymDense(2, []float64{1e-4, 4e-5, 4e-5, 2e-4})
	plain, err := pool.ThroughOrigin(x, y, cov, nil, nil, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	whole, err := pool.ThroughOrigin(x, y, cov, nil, []float64{su * x[0], su * x[1]}, 0.95)
	if err != nil {
		t.Fatal(err)
	}
	got := s.slope(plain.Slope, plain.SlopeSE)
	floatcmp.CheckSlice(t, "slope and interval", []float64{got.Value, got.Lo, got.Hi}, []float64{whole.Slope, whole.SlopeLo, whole.SlopeHi}, 1e-9, 0)
	floatcmp.Check(t, "chi squared", plain.Chi2, whole.Chi2, 1e-9, 0)
	many := s.slope(plain.Slope, plain.SlopeSE/math.Sqrt(1e6))
	floatcmp.Check(t, "half width of a million crystals", many.Hi-many.Value, 1.959963985*su*plain.Slope, 1e-4, 0)
}
