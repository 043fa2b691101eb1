package resample

import (
	"context"
	"math"
	"testing"
)

var bg = context.Background()

// weightedStat makes a statistic of one or more columns from element weights.
func weightedMean(y []float64) func([]float64) ([]float64, error) {
	return func(w []float64) ([]float64, error) {
		s, n := 0.0, 0.0
		for i, v := range y {
			s += w[i] * v
			n += w[i]
		}
		return []float64{s / n}, nil
	}
}

func plugInVariance(y []float64) func([]float64) ([]float64, error) {
	return func(w []float64) ([]float64, error) {
		var s, n float64
		for i, v := range y {
			s += w[i] * v
			n += w[i]
		}
		m, q := s/n, 0.0
		for i, v := range y {
			q += w[i] * (v - m) * (v - m)
		}
		return []float64{q / n}, nil
	}
}

func correlation(x, y []float64) func([]float64) ([]float64, error) {
	return func(w []float64) ([]float64, error) {
		var n, sx, sy float64
		for i := range x {
			n += w[i]
			sx += w[i] * x[i]
			sy += w[i] * y[i]
		}
		mx, my := sx/n, sy/n
		var xx, yy, xy float64
		for i := range x {
			dx, dy := x[i]-mx, y[i]-my
			xx += w[i] * dx * dx
			yy += w[i] * dy * dy
			xy += w[i] * dx * dy
		}
		return []float64{xy / math.Sqrt(xx*yy)}, nil
	}
}

func must[T any](t testing.TB) func(T, error) T {
	return func(v T, err error) T {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
}
