package evidence

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// What is drawn is what is regressed: with v equal within equivalents the sum of predictor
// times gain over bins of one observation each would be the numerator of the slope, and bins
// keep the order, the counts and the means. Where reflections gain the line rises.
func TestDoubleScatteringBins(t *testing.T) {
	none, err := DoubleScatteringBins(field(0, 0, 0, 1), 8)
	if err != nil {
		t.Fatal(err)
	}
	c := field(0, 1e-4, 0, 1)
	some, err := DoubleScatteringBins(c, 8)
	if err != nil {
		t.Fatal(err)
	}
	slope, err := DoubleScattering(c)
	if err != nil {
		t.Fatal(err)
	}
	n, predictor, gain := 0, 0.0, 0.0
	for k, b := range some {
		n += b.N
		predictor += float64(b.N) * b.Predictor
		gain += float64(b.N) * b.Gain
		if k > 0 && !(b.Predictor > some[k-1].Predictor) {
			t.Errorf("bin %d is at %g after %g", k, b.Predictor, some[k-1].Predictor)
		}
	}
	if n != slope.N {
		t.Errorf("%d observations are drawn and %d regressed", n, slope.N)
	}
	// Deviations from means of equivalents add up to nothing.
	floatcmp.Check(t, "mean predictor", predictor/float64(n), 0, 1e-9, 0)
	floatcmp.Check(t, "mean gain", gain/float64(n), 0, 1e-9, 0)
	rise := func(bins []GainBin) float64 {
		a, b := bins[0], bins[len(bins)-1]
		return (b.Gain - a.Gain) / math.Hypot(a.SE, b.SE)
	}
	if math.Abs(rise(none)) > 3.5 || rise(some) < 4 {
		t.Errorf("from the lowest to the highest bin the gain rises by %.1f of its errors without double scattering and %.1f with it", rise(none), rise(some))
	}
	if _, err := DoubleScatteringBins(c, slope.N); err == nil {
		t.Error("as many bins as observations passed")
	}
	c.Frame = nil
	if _, err := DoubleScatteringBins(c, 8); err == nil {
		t.Error("no frames passed")
	}
}
