package difference

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Closed form: one pair 2 and 1 of equal variances has the inverse-variance mean
// (2 + r^2)/(1 + r^2) when the thin sigma is r times as large. A finding that goes away at r above
// and below has the nearer of both, as a factor, for its tipping ratio, on whichever side.
func TestTippingNearest(t *testing.T) {
	p := &Pairs{Thin: []float64{2}, Thick: []float64{1}, VarThin: []float64{1}, VarThick: []float64{1}, MeanPooled: []float64{1}}
	mean := func(r float64) float64 { return (2 + r*r) / (1 + r*r) }
	for _, c := range []struct{ up, down, nearest float64 }{
		{1.5, 0.4, 1.5}, {2.5, 1 / 1.5, 1.5}, {math.Inf(1), 0.5, 2}, {2, 0, 2},
	} {
		least, most := 0.0, 9.0
		if !math.IsInf(c.up, 1) {
			least = mean(c.up)
		}
		if c.down > 0 {
			most = mean(c.down)
		}
		got, err := p.Tipping(context.Background(), func(_ context.Context, z []float64) (float64, error) {
			if z[0] < least || z[0] > most {
				return 0.5, nil
			}
			return 0.01, nil
		}, nil)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, "up", got.Up, c.up, 0, 0.011)
		floatcmp.Check(t, "down", got.Down, c.down, 0, 0.011)
		floatcmp.Check(t, "nearest", got.Nearest, c.nearest, 0, 0.011)
	}
}
