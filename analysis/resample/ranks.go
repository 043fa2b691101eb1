package resample

import (
	"fmt"
	"math"
	"slices"
)

// RankTest is the outcome of a rank or sign test. Upper and Lower are the
// one-sided p-values P(T >= t) and P(T <= t), P the two-sided one: min(1, 2
// min(Upper, Lower)) unless the test says otherwise. Z is the normal deviate,
// without continuity correction, ties allowed for. Exact: the p-values are exact
// tail probabilities, given the ties; otherwise normal ones from Z.
type RankTest struct {
	Stat, Expected, Var, Z float64
	Upper, Lower, P        float64
	// Smallest is the smallest two-sided p-value that so many units can give, NaN
	// when the p-values are normal ones.
	Smallest float64
	N        int
	Exact    bool
}

// lattice is the law of a sum on the integers first, first+1, ...
type lattice struct {
	first int
	p     []float64
}

func point(at int) lattice { return lattice{first: at, p: []float64{1}} }

// plus is the law of the sum of two independent values.
func (a lattice) plus(b lattice) lattice {
	c := lattice{first: a.first + b.first, p: make([]float64, len(a.p)+len(b.p)-1)}
	for i, x := range a.p {
		if x == 0 {
			continue
		}
		for j, y := range b.p {
			c.p[i+j] += float64(x * y)
		}
	}
	return c
}

// upper and lower are P(X >= v) and P(X <= v).
func (a lattice) upper(v int) float64 {
	sum := 0.0
	for i := len(a.p) - 1; i >= 0 && a.first+i >= v; i-- {
		sum += a.p[i]
	}
	return math.Min(sum, 1)
}

func (a lattice) lower(v int) float64 {
	sum := 0.0
	for i := 0; i < len(a.p) && a.first+i <= v; i++ {
		sum += a.p[i]
	}
	return math.Min(sum, 1)
}

// ends are the smallest attainable one-sided p-values, at the top and the bottom.
func (a lattice) ends() (top, bottom float64) {
	for _, v := range a.p {
		if v > 0 {
			bottom = v
			break
		}
	}
	for i := len(a.p) - 1; i >= 0; i-- {
		if a.p[i] > 0 {
			return a.p[i], bottom
		}
	}
	return 1, 1
}

func (r *RankTest) deviate() {
	if r.Var > 0 {
		r.Z = (r.Stat - r.Expected) / math.Sqrt(r.Var)
	}
}

func (r *RankTest) fromLattice(l lattice, v int) {
	r.Exact = true
	r.Upper, r.Lower = l.upper(v), l.lower(v)
	top, bottom := l.ends()
	r.P = math.Min(1, 2*math.Min(r.Upper, r.Lower))
	r.Smallest = math.Min(1, 2*math.Min(top, bottom))
}

func (r *RankTest) fromNormal() {
	r.Upper, r.Lower = normCDF(-r.Z), normCDF(r.Z)
	r.P = math.Min(1, 2*math.Min(r.Upper, r.Lower))
	r.Smallest = math.NaN()
}

// MidRanks returns the ranks 1..n of x, equal values sharing the mean of their
// ranks. NaN is an error with its index. x is not changed.
func MidRanks(x []float64) ([]float64, error) {
	order := make([]int, len(x))
	for i, v := range x {
		if math.IsNaN(v) {
			return nil, fmt.Errorf("resample: MidRanks: value %d is NaN", i)
		}
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case x[a] < x[b]:
			return -1
		case x[a] > x[b]:
			return 1
		}
		return 0
	})
	ranks := make([]float64, len(x))
	for i := 0; i < len(order); {
		j := i
		for j < len(order) && x[order[j]] == x[order[i]] {
			j++
		}
		for k := i; k < j; k++ {
			ranks[order[k]] = float64(i+1+j) / 2
		}
		i = j
	}
	return ranks, nil
}

// tieSizes returns how often each different value of x occurs, ascending by value.
func tieSizes(x []float64) []int {
	s := slices.Clone(x)
	slices.Sort(s)
	var out []int
	for i := 0; i < len(s); {
		j := i
		for j < len(s) && s[j] == s[i] {
			j++
		}
		out = append(out, j-i)
		i = j
	}
	return out
}
