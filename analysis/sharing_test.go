package analysis

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/difference"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/size"
)

// deleted is a contrast of the reflections unique with what each takes off an m.
func deleted(m float64, unique []int32, d []float64) *Compared {
	return &Compared{Pairs: &difference.Pairs{Unique: unique}, Fit: &size.Fit{M: size.Value{Value: m}, MDeleted: d}}
}

// Only reflections that both contrasts have make a covariance: here 7 and 9, 1*4 + (-2)*1.
func TestCovarianceByDeletions(t *testing.T) {
	a := deleted(0.1, []int32{3, 7, 9}, []float64{5, 1, -2})
	b := deleted(0.2, []int32{7, 9, 12}, []float64{4, 1, 8})
	floatcmp.Check(t, "covariance", deletedCovariance(a, b), 2, 1e-15, 0)
	floatcmp.Check(t, "variance", deletedCovariance(a, a), 30, 1e-15, 0)
	cov := deletedMu([]*Compared{a, b})
	floatcmp.Check(t, "of mu", cov.At(0, 1), 2/(0.9*0.8), 1e-12, 0)
	if !mat.Equal(cov, cov.T()) {
		t.Error("not symmetric")
	}
	se := []float64{math.Sqrt(30), 9}
	between := func(b *Compared, factor ...float64) float64 {
		return covarianceBetween([]*Compared{a, b}, factor, se).At(0, 1)
	}
	floatcmp.Check(t, "between", between(b, 1, 1), 2, 1e-12, 0)
	floatcmp.Check(t, "factors", between(b, 2, 3), 12, 1e-12, 0)
	floatcmp.Check(t, "never all of an error", between(b, 100, 100), 0.9*9*math.Sqrt(30), 1e-9, 0)
	floatcmp.Check(t, "a negative covariance", between(deleted(0.2, []int32{7}, []float64{-4}), 1, 1), 0, 0, 0)
	plain := deleted(0.2, []int32{7}, nil)
	if !math.IsNaN(deletedCovariance(a, plain)) || deletedMu([]*Compared{a, plain}) != nil || between(plain, 1, 1) != 0 {
		t.Error("a fit without deletions has a covariance")
	}
}
