package curve

import (
	"fmt"
	"math"

	"thinward/analysis/resample"
)

// MovingMean returns sum(w y)/sum(w) of each window, y in rank order, w nil = all
// 1. Constant in, constant out. A window without weight is NaN. It panics when
// lengths differ or a window is empty or outside y; a value that is not finite or
// a negative weight is an error. y and w are not changed.
func MovingMean(y, w []float64, windows []resample.Window) ([]float64, error) {
	if err := checkColumn("MovingMean", y, w); err != nil {
		return nil, err
	}
	out := make([]float64, len(windows))
	if len(windows) == 0 {
		return out, nil
	}
	centre := 0.0
	if len(y) > 0 {
		centre = meanOf(y, w)
	}
	sum, weight := make([]float64, len(y)+1), make([]float64, len(y)+1)
	for i, v := range y {
		c := 1.0
		if w != nil {
			c = w[i]
		}
		sum[i+1] = sum[i] + float64(c*(v-centre))
		weight[i+1] = weight[i] + c
	}
	for g, win := range windows {
		if win.Lo < 0 || win.Hi > len(y) || win.Lo >= win.Hi {
			panic(fmt.Sprintf("curve: MovingMean: window %d [%d, %d) is empty or outside the %d values", g, win.Lo, win.Hi, len(y)))
		}
		out[g] = math.NaN()
		if c := weight[win.Hi] - weight[win.Lo]; c > 0 {
			out[g] = centre + (sum[win.Hi]-sum[win.Lo])/c
		}
	}
	return out, nil
}

// meanOf is exact for a constant, so that constants pass through unchanged.
func meanOf(y, w []float64) float64 {
	sum, weight := 0.0, 0.0
	for i, v := range y {
		c := 1.0
		if w != nil {
			c = w[i]
		}
		sum += float64(c * (v - y[0]))
		weight += c
	}
	if !(weight > 0) {
		return y[0]
	}
	return y[0] + sum/weight
}

func checkColumn(who string, y, w []float64) error {
	if w != nil && len(w) != len(y) {
		panic(fmt.Sprintf("curve: %s: %d weights for %d values", who, len(w), len(y)))
	}
	for i, v := range y {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("curve: %s: value %d is %g", who, i, v)
		}
	}
	for i, v := range w {
		if !(v >= 0) || math.IsInf(v, 0) {
			return fmt.Errorf("curve: %s: weight %d is %g", who, i, v)
		}
	}
	return nil
}
