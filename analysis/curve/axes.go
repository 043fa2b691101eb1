package curve

import (
	"fmt"
	"math"
	"slices"
)

// SignedRoot returns sign(x) sqrt|x| of each value: an axis that spreads weak
// strengths and takes negative ones. NaN stays NaN; x is not changed.
func SignedRoot(x []float64) []float64 {
	out := make([]float64, len(x))
	for i, v := range x {
		out[i] = math.Copysign(math.Sqrt(math.Abs(v)), v)
	}
	return out
}

// RankAxis returns the share of values below each of at in ascending x, those
// equal to it counted by half: 0 to 1. It panics when x is empty or not ascending.
func RankAxis(x, at []float64) []float64 {
	if len(x) == 0 {
		panic("curve: RankAxis: no values")
	}
	for i := range x {
		if math.IsNaN(x[i]) || (i > 0 && x[i] < x[i-1]) {
			panic(fmt.Sprintf("curve: RankAxis: x is not ascending at %d", i))
		}
	}
	out := make([]float64, len(at))
	for i, v := range at {
		if math.IsNaN(v) {
			out[i] = v
			continue
		}
		lo, _ := slices.BinarySearch(x, v)
		hi := lo
		for hi < len(x) && x[hi] == v {
			hi++
		}
		out[i] = float64(lo+hi) / 2 / float64(len(x))
	}
	return out
}

// middle returns the value at the middle rank of [lo, hi), between the two middle
// ones for an even number.
func middle(x []float64, lo, hi int) float64 {
	a, b := x[(lo+hi-1)/2], x[(lo+hi)/2]
	return a + (b-a)/2
}

// ascending returns the elements with a value in rank order, equal values in their
// own order, and the number that are NaN.
func ascending(x []float64) (order []int32, missing int) {
	for i, v := range x {
		if math.IsNaN(v) {
			missing++
			continue
		}
		order = append(order, int32(i))
	}
	slices.SortStableFunc(order, func(a, b int32) int {
		switch {
		case x[a] < x[b]:
			return -1
		case x[a] > x[b]:
			return 1
		}
		return 0
	})
	return order, missing
}

func pick(x []float64, order []int32) []float64 {
	if x == nil {
		return nil
	}
	out := make([]float64, len(order))
	for k, i := range order {
		out[k] = x[i]
	}
	return out
}
