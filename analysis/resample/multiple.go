package resample

import (
	"fmt"
	"math"
	"slices"
)

// Bonferroni returns min(1, n p). See Holm for the rest.
func Bonferroni(p []float64) ([]float64, error) {
	return adjust("Bonferroni", p, func(rank, n int) float64 { return float64(n) }, none)
}

// Holm returns step-down adjusted p-values (Holm 1979, Scand. J. Stat. 6:65):
// they hold the chance of any false rejection. Order as in p, which is not
// changed. Empty in, empty out; a value outside [0, 1] or NaN is an error.
func Holm(p []float64) ([]float64, error) {
	return adjust("Holm", p, func(rank, n int) float64 { return float64(n - rank + 1) }, up)
}

// Hochberg returns step-up adjusted p-values (Hochberg 1988, Biometrika 75:800),
// for independent or positively dependent tests. See Holm for the rest.
func Hochberg(p []float64) ([]float64, error) {
	return adjust("Hochberg", p, func(rank, n int) float64 { return float64(n - rank + 1) }, down)
}

// BenjaminiHochberg returns p-values adjusted for the expected share of false
// rejections (Benjamini & Hochberg 1995, J. R. Stat. Soc. B 57:289). See Holm for
// the rest.
func BenjaminiHochberg(p []float64) ([]float64, error) {
	return adjust("BenjaminiHochberg", p, func(rank, n int) float64 { return float64(n) / float64(rank) }, down)
}

// BenjaminiYekutieli is BenjaminiHochberg for any dependence (Benjamini &
// Yekutieli 2001, Ann. Stat. 29:1165).
func BenjaminiYekutieli(p []float64) ([]float64, error) {
	sum := 0.0
	for i := range p {
		sum += 1 / float64(i+1)
	}
	return adjust("BenjaminiYekutieli", p, func(rank, n int) float64 { return sum * float64(n) / float64(rank) }, down)
}

type direction int

const (
	none direction = iota
	up             // running maximum from the smallest p
	down           // running minimum from the largest p
)

// adjust multiplies the p-value of each rank by factor and makes the result
// monotone.
func adjust(who string, p []float64, factor func(rank, n int) float64, d direction) ([]float64, error) {
	for i, v := range p {
		if !(v >= 0 && v <= 1) {
			return nil, fmt.Errorf("resample: %s: p-value %d is %g", who, i, v)
		}
	}
	n := len(p)
	order := make([]int, n)
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case p[a] < p[b]:
			return -1
		case p[a] > p[b]:
			return 1
		}
		return 0
	})
	out := make([]float64, n)
	for k, i := range order {
		out[i] = p[i] * factor(k+1, n)
		if d == up && k > 0 {
			out[i] = math.Max(out[i], out[order[k-1]])
		}
	}
	if d == down {
		for k := n - 2; k >= 0; k-- {
			out[order[k]] = math.Min(out[order[k]], out[order[k+1]])
		}
	}
	for i := range out {
		out[i] = math.Min(out[i], 1)
	}
	return out, nil
}
