package pool

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// The BCG trials have tau^2 from 0.1197 to 1.1115 (the worked example of Viechtbauer 2010,
// J. Stat. Softw. 36(3), value from memory). Two equal standard errors have the interval in
// closed form: Q = (y1-y2)^2/(2 (se^2 + tau^2)).
func TestTauInterval(t *testing.T) {
	se := make([]float64, len(bcgV))
	for i, v := range bcgV {
		se[i] = math.Sqrt(v)
	}
	lo, hi, err := TauInterval(bcgY, se, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "lower tau^2", lo*lo, 0.1197, 5e-5, 0)
	floatcmp.Check(t, "upper tau^2", hi*hi, 1.1115, 5e-5, 0)
	lo, hi, err = TauInterval([]float64{0, 1}, []float64{0.1, 0.1}, 0.9)
	if err != nil {
		t.Fatal(err)
	}
	chi := distuv.ChiSquared{K: 1}
	floatcmp.Check(t, "lower of two", lo, math.Sqrt(1/(2*chi.Quantile(0.95))-0.01), 0, 1e-9)
	floatcmp.Check(t, "upper of two", hi, math.Sqrt(1/(2*chi.Quantile(0.05))-0.01), 0, 1e-9)
	if lo, hi, err := TauInterval([]float64{1, 1.001, 0.999}, []float64{1, 1, 1}, 0); lo != 0 || hi != 0 || err != nil {
		t.Errorf("estimates that agree better than their errors: %g to %g, %v", lo, hi, err)
	}
	if lo, hi, err := TauInterval([]float64{1}, []float64{1}, 0); lo != 0 || !math.IsInf(hi, 1) || err != nil {
		t.Errorf("one estimate: %g to %g, %v", lo, hi, err)
	}
	for _, c := range []struct {
		y, se []float64
		level float64
	}{{nil, nil, 0}, {[]float64{1, 2}, []float64{1}, 0}, {[]float64{1, 2}, []float64{1, 0}, 0}, {[]float64{1, 2}, []float64{1, 1}, 1}} {
		if _, _, err := TauInterval(c.y, c.se, c.level); err == nil {
			t.Errorf("%v: no error", c)
		}
	}
}

// The interval holds the true spread as often as it says, with three estimates too.
func TestTauIntervalCovers(t *testing.T) {
	r := resample.NewSeed(9).At("spread").Stream(0)
	const draws, tau = 4000, 0.02
	se := []float64{0.01, 0.015, 0.02}
	held := 0
	for range draws {
		y := make([]float64, len(se))
		for i := range y {
			y[i] = 0.08 + tau*r.Normal() + se[i]*r.Normal()
		}
		lo, hi, err := TauInterval(y, se, 0.95)
		if err != nil {
			t.Fatal(err)
		}
		if lo <= tau && tau <= hi {
			held++
		}
	}
	// 0.95 +- 0.0034 over 4000 draws.
	if got := float64(held) / draws; got < 0.938 || got > 0.962 {
		t.Errorf("the interval of three estimates holds tau in %.3f", got)
	}
}
