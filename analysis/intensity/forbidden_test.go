package intensity

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Five ratios that agree by chance keep the error of their variances, sqrt(0.04/5); five that
// scatter more have that of their scatter, 0.1 times sqrt(10/20).
func TestForbiddenUncertainty(t *testing.T) {
	v := []float64{0.04, 0.04, 0.04, 0.04, 0.04}
	alike := summarise([]float64{0.1, 0.1, 0.1, 0.1, 0.1}, v)
	floatcmp.Check(t, "alike", alike.SU, math.Sqrt(0.04/5), 1e-12, 0)
	apart := summarise([]float64{-0.2, -0.1, 0, 0.1, 0.2}, []float64{1e-4, 1e-4, 1e-4, 1e-4, 1e-4})
	floatcmp.Check(t, "apart", apart.SU, 0.1*math.Sqrt(10.0/20), 1e-12, 0)
}
