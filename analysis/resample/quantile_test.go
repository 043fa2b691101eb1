package resample

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// R quantile(x, p, type), R 4.2.2.
func TestQuantileTypes(t *testing.T) {
	x := []float64{3, 5, 7, 8, 12, 13, 14, 18, 21, 40}
	ps := []float64{.025, .25, .5, .9, .975}
	for kind, want := range map[int][]float64{
		1: {3, 7, 12, 21, 40},
		2: {3, 7, 12.5, 30.5, 40},
		4: {3, 6, 12, 21, 35.25},
		5: {3, 7, 12.5, 30.5, 40},
		6: {3, 6.5, 12.5, 38.1, 40},
		7: {3.45, 7.25, 12.5, 22.9, 35.725},
		8: {3, 6.8333333333333333, 12.5, 33.033333333333333, 40},
		9: {3, 6.875, 12.5, 32.4, 40},
	} {
		for i, p := range ps {
			floatcmp.Check(t, "quantile", Quantile(x, p, kind), want[i], 1e-12, 0)
		}
	}
	// Type 3: nearest even order statistic (definition of Hyndman & Fan).
	floatcmp.Check(t, "type 3", Quantile(x, .25, 3), 5, 0, 0)
	floatcmp.Check(t, "type 3", Quantile(x, .26, 3), 7, 0, 0)
	for kind := 1; kind <= 9; kind++ {
		floatcmp.Check(t, "lowest", Quantile(x, 0, kind), 3, 0, 0)
		floatcmp.Check(t, "highest", Quantile(x, 1, kind), 40, 0, 0)
		floatcmp.Check(t, "one value", Quantile([]float64{2}, .3, kind), 2, 0, 0)
		floatcmp.Check(t, "none", Quantile(nil, .3, kind), math.NaN(), 0, 0)
	}
}

func TestLawQuantiles(t *testing.T) {
	var x []float64
	for i := range 99 {
		x = append(x, float64(99-i))
	}
	l := newLaw(x, nil)
	floatcmp.Check(t, "5 % of 99 draws is the 5th", l.lower(.05), 5, 1e-9, 0)
	floatcmp.Check(t, "95 %", l.upper(.95), 95, 1e-9, 0)
	floatcmp.Check(t, "beyond the draws", l.lower(.005), math.Inf(-1), 0, 0)
	floatcmp.Check(t, "beyond the draws", l.upper(.995), math.Inf(1), 0, 0)
	x[0], x[50] = math.NaN(), math.NaN() // 99 and 49 failed
	f := newLaw(x, nil)
	floatcmp.Check(t, "two failed draws lie below", f.lower(.05), 3, 1e-9, 0)
	floatcmp.Check(t, "two failed draws lie above", f.upper(.95), 96, 1e-9, 0)
	floatcmp.Check(t, "share", f.share(1, 98), 97.0/99, 1e-12, 0)
	p := newLaw([]float64{4, 2, math.NaN()}, []float64{.5, .25, .25})
	floatcmp.Check(t, "weighted", p.lower(.3), 2, 0, 0)
	floatcmp.Check(t, "weighted", p.lower(.2), math.Inf(-1), 0, 0)
	floatcmp.Check(t, "weighted", p.upper(.25), 2, 0, 0)
	floatcmp.Check(t, "weighted", p.upper(.8), math.Inf(1), 0, 0)
}
