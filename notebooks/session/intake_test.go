package session

import (
	"math"
	"testing"

	"thinward/analysis"
)

// The range of shares with a crystal, by hand: L1/thin shares 0.8 with L2/thin, of which it
// is the first, and 0.5 with L2/thick, of which it is the second.
func TestShares(t *testing.T) {
	list := []analysis.CommonResult{
		{Crystal: "L1", Position: "thin", WithCrystal: "L1", WithPosition: "thick", Share: 0.95, WithShare: 0.9},
		{Crystal: "L1", Position: "thin", WithCrystal: "L2", WithPosition: "thin", Share: 0.8, WithShare: 0.1},
		{Crystal: "L2", Position: "thick", WithCrystal: "L1", WithPosition: "thin", Share: 0.2, WithShare: 0.5},
		{Crystal: "L2", Position: "thin", WithCrystal: "L2", WithPosition: "thick", Share: 0.3, WithShare: 0.4},
	}
	r := &analysis.IntakeResult{Crystal: "L1", Position: "thin"}
	for _, c := range []struct {
		crystal string
		lo, hi  float64
		text    string
	}{{"L1", 0.95, 0.95, "95 %"}, {"L2", 0.5, 0.8, "50–80 %"}, {"L3", math.NaN(), math.NaN(), "–"}} {
		lo, hi := shares(list, r, c.crystal)
		same := func(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }
		if !same(lo, c.lo) || !same(hi, c.hi) || shareRange(lo, hi) != c.text {
			t.Errorf("%s: %g to %g, %q", c.crystal, lo, hi, shareRange(lo, hi))
		}
	}
}
