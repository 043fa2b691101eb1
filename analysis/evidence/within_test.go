package evidence

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// Two groups of two, by hand: T = sum w dx dy with centred columns, its permutation
// variance sum w^2 SSx SSy/(n-1).
func TestWithinEquivalentsByHand(t *testing.T) {
	unique := []int32{0, 0, 1, 1, 2}
	y := []float64{1, 3, 10, 9, 5}
	x := []float64{0, 1, 2, 0, 7}
	v := []float64{1, 1, 4, 4, 1}
	s, err := WithinEquivalents(unique, y, x, v, nil)
	if err != nil {
		t.Fatal(err)
	}
	// Group 0: dx -.5 .5, dy -1 1: 1. Group 1: dx 1 -1, dy .5 -.5: 1, w 1/4.
	// SSx .5 and 2, SSy 2 and .5: variances 1 and 1/16.
	sum, square, variance := 1+0.25, 0.5+0.25*2, 1+1.0/16
	floatcmp.Check(t, "slope", s.Value, sum/square, 1e-12, 0)
	floatcmp.Check(t, "z", s.Z, sum/math.Sqrt(variance), 1e-12, 0)
	floatcmp.Check(t, "error", s.SE, math.Sqrt(variance)/square, 1e-12, 0)
	if s.N != 4 {
		t.Errorf("%d observations", s.N)
	}
}

// z is standard normal when x has nothing to do with y, whatever differs between
// groups, and the slope is found when it does.
func TestWithinEquivalentsLevelAndSlope(t *testing.T) {
	var z, slope []float64
	for k := range 400 {
		r := resample.NewSeed(5).At("within").Stream(k)
		var unique []int32
		var y, x, v, both []float64
		for u := range 150 {
			base := 10 * r.Exponential()
			for range 2 + r.Intn(4) {
				b := base + r.Exponential()
				e := (1 + base/10) * r.Normal()
				unique = append(unique, int32(u))
				x = append(x, b)
				y = append(y, 3*base+e)
				both = append(both, 3*base+e+0.2*b)
				v = append(v, (1+base/10)*(1+base/10))
			}
		}
		s, err := WithinEquivalents(unique, y, x, v, nil)
		if err != nil {
			t.Fatal(err)
		}
		z = append(z, s.Z)
		if s, err = WithinEquivalents(unique, both, x, v, nil); err != nil {
			t.Fatal(err)
		}
		slope = append(slope, s.Value)
	}
	a, b := spread(z), spread(slope)
	floatcmp.Check(t, "mean of z", a.Mean, 0, 3/math.Sqrt(400), 0)
	floatcmp.Check(t, "spread of z", a.SD, 1, 3/math.Sqrt(800), 0)
	floatcmp.Check(t, "slope", b.Mean, 0.2, 3*b.MeanSE, 0)
}

func TestWithinEquivalentsRemovesACovariate(t *testing.T) {
	r := resample.NewSeed(6).At("covariate").Stream(0)
	var unique []int32
	var y, x, v, c []float64
	for u := range 300 {
		for range 4 {
			k := r.Normal()
			unique, c, v = append(unique, int32(u)), append(c, k), append(v, 1)
			x = append(x, k+0.5*r.Normal())
			y = append(y, 2*k+r.Normal())
		}
	}
	with, err := WithinEquivalents(unique, y, x, v, c)
	if err != nil {
		t.Fatal(err)
	}
	without, err := WithinEquivalents(unique, y, x, v, nil)
	if err != nil {
		t.Fatal(err)
	}
	if !(math.Abs(with.Z) < 3 && without.Z > 15) {
		t.Errorf("z with the covariate %.1f, without %.1f", with.Z, without.Z)
	}
}

func TestWithinEquivalentsRefuses(t *testing.T) {
	if _, err := WithinEquivalents([]int32{0, 1}, []float64{1, 2}, []float64{1, 2}, []float64{1, 1}, nil); err == nil {
		t.Error("no equivalents passed")
	}
	if _, err := WithinEquivalents([]int32{0, 0}, []float64{1}, []float64{1, 2}, []float64{1, 1}, nil); err == nil {
		t.Error("unequal lengths passed")
	}
}
