package floatcmp

import (
	"math"
	"testing"
)

func TestEqual(t *testing.T) {
	nan, inf := math.NaN(), math.Inf(1)
	for _, c := range []struct {
		got, want, abs, rel float64
		ok                  bool
	}{
		{nan, 1, 10, 10, false},
		{1, nan, 10, 10, false},
		{nan, nan, 0, 0, true},
		{inf, inf, 0, 0, true},
		{inf, 1, inf, 0, false},
		{-inf, inf, 1, 1, false},
		{1.1, 1, 0.2, 0, true},
		{1.1, 1, 0.05, 0, false},
		{110, 100, 0, 0.1, true},
		{111, 100, 0, 0.1, false},
		{1e-20, 0, 0, 1, false},
		{0, math.Copysign(0, -1), 0, 0, true},
	} {
		if Equal(c.got, c.want, c.abs, c.rel) != c.ok {
			t.Errorf("Equal(%g, %g, %g, %g) is not %v", c.got, c.want, c.abs, c.rel, c.ok)
		}
	}
}
