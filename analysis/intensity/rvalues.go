package intensity

import (
	"fmt"
	"math"
)

// RValues are agreement factors of the observations of a list, n_h of
// reflection h with plain mean <I>_h:
//
//	R_merge = sum_h            sum_i |I_hi - <I>_h| / sum_h sum_i I_hi
//	R_meas  = sum_h sqrt(n/(n-1)) sum_i |...|       / the same  (Diederichs & Karplus 1997)
//	R_pim   = sum_h sqrt(1/(n-1)) sum_i |...|       / the same  (Weiss 2001)
//
// Reflections observed once are left out of both sums; Reflections and
// Observations count what is left. All three are NaN when nothing is left or
// the intensities do not add to more than zero.
type RValues struct {
	Merge, Meas, Pim          float64
	Reflections, Observations int
}

// MeasureR returns the agreement factors of observations i with unique
// reflection numbers unique, parallel. It panics when they differ in length.
func MeasureR(unique []int32, i []float64) RValues {
	var acc rSums
	eachReflection(unique, i, func(_ int32, values []float64) { acc.add(values) })
	return acc.values()
}

type rSums struct {
	merge, meas, pim, total float64
	reflections, n          int
}

func (a *rSums) add(values []float64) {
	n := float64(len(values))
	if n < 2 {
		return
	}
	mean := meanOf(values)
	dev := 0.0
	for _, x := range values {
		dev += math.Abs(x - mean)
		a.total += x
	}
	a.merge += dev
	a.meas += math.Sqrt(n/(n-1)) * dev
	a.pim += math.Sqrt(1/(n-1)) * dev
	a.reflections++
	a.n += len(values)
}

func (a *rSums) values() RValues {
	r := RValues{math.NaN(), math.NaN(), math.NaN(), a.reflections, a.n}
	if a.total > 0 {
		r.Merge, r.Meas, r.Pim = a.merge/a.total, a.meas/a.total, a.pim/a.total
	}
	return r
}

func meanOf(x []float64) float64 {
	first, sum := x[0], 0.0
	for _, v := range x {
		sum += v - first
	}
	return first + sum/float64(len(x))
}

// eachReflection calls f with the observations of each reflection, in the order
// of unique and, within, of the list. The slice is reused.
func eachReflection(unique []int32, i []float64, f func(u int32, values []float64)) {
	if len(unique) != len(i) {
		panic("intensity: unique numbers and intensities differ in length")
	}
	order := byNumber(unique)
	var values []float64
	for from := 0; from < len(order); {
		u := unique[order[from]]
		values = values[:0]
		to := from
		for ; to < len(order) && unique[order[to]] == u; to++ {
			values = append(values, i[order[to]])
		}
		f(u, values)
		from = to
	}
}

// byNumber returns the places of unique in ascending order of their numbers,
// stable, by counting. It panics on a number below zero.
func byNumber(unique []int32) []int32 {
	top := int32(-1)
	for o, u := range unique {
		if u < 0 {
			panic(fmt.Sprintf("intensity: unique number %d at %d", u, o))
		}
		top = max(top, u)
	}
	at := make([]int32, int(top)+2)
	for _, u := range unique {
		at[u+1]++
	}
	for u := 1; u < len(at); u++ {
		at[u] += at[u-1]
	}
	order := make([]int32, len(unique))
	for o, u := range unique {
		order[at[u]] = int32(o)
		at[u]++
	}
	return order
}
