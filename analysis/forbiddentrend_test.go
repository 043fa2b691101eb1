package analysis

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"thinward/analysis/internal/floatcmp"
)

// The slope against gonum's weighted regression; its s.u. by hand for two positions of
// equal s.u., sqrt(2) su over their distance.
func TestForbiddenTrends(t *testing.T) {
	row := func(crystal, position, element string, n int, ratio, su float64) Forbidden {
		return Forbidden{Crystal: crystal, Position: position, Element: element, N: n, Ratio: ratio, SU: su}
	}
	nm := map[string]float64{"L1/thin": 140, "L1/mid": 220, "L1/thick": 310, "L2/thin": 150, "L2/thick": 350}
	got := ForbiddenTrends([]Forbidden{
		row("L1", "thin", "all", 20, 0.01, 0.01), row("L1", "thin", "2_1 along a", 0, math.NaN(), math.NaN()),
		row("L1", "mid", "all", 20, 0.05, 0.02), row("L1", "mid", "2_1 along a", 5, 0.1, 0.1),
		row("L1", "thick", "all", 20, 0.13, 0.04), row("L1", "elsewhere", "all", 20, 9, 0.01),
		row("L2", "thin", "all", 7, 0.02, 0.03), row("L2", "thick", "all", 7, 0.12, 0.03),
	}, nm)
	if len(got) != 3 || got[0].Positions != 3 || got[1].Positions != 1 || got[2].Crystal != "L2" {
		t.Fatalf("%+v", got)
	}
	_, slope := stat.LinearRegression([]float64{1.4, 2.2, 3.1}, []float64{0.01, 0.05, 0.13}, []float64{1e4, 2500, 625}, false)
	floatcmp.Check(t, "slope of three", got[0].Slope, slope, 0, 1e-12)
	floatcmp.Check(t, "slope of one", got[1].Slope, math.NaN(), 0, 0)
	floatcmp.Check(t, "slope of two", got[2].Slope, 0.05, 0, 1e-12)
	floatcmp.Check(t, "s.u. of two", got[2].SU, 0.03*math.Sqrt2/2, 0, 1e-12)
}
