package size

import (
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Region is a confidence set on the line: one interval, possibly unbounded, or
// two half-lines when a weak axis cannot exclude large values of either sign.
type Region struct{ Pieces []Interval }

// Contains reports whether x lies in the region.
func (r Region) Contains(x float64) bool {
	for _, p := range r.Pieces {
		if p.Lo <= x && x <= p.Hi {
			return true
		}
	}
	return false
}

// Hull is the smallest interval around the region.
func (r Region) Hull() Interval {
	h := Interval{math.Inf(1), math.Inf(-1)}
	for _, p := range r.Pieces {
		h.Lo = math.Min(h.Lo, p.Lo)
		h.Hi = math.Max(h.Hi, p.Hi)
	}
	return h
}

// Disjoint reports whether values in the middle are excluded and both ends are not.
func (r Region) Disjoint() bool { return len(r.Pieces) > 1 }

// Bounded reports whether both ends are finite.
func (r Region) Bounded() bool {
	h := r.Hull()
	return !math.IsInf(h.Lo, 0) && !math.IsInf(h.Hi, 0)
}

func wholeLine() Region { return Region{[]Interval{{math.Inf(-1), math.Inf(1)}}} }

// ratioRegion solves (n - x d)^2 <= c (vnn - 2 x vnd + x^2 vdd) for x = n/d
// (Fieller 1954, J. R. Stat. Soc. B 16:175; with an instrument the set of
// Anderson & Rubin 1949, Ann. Math. Stat. 20:46).
func ratioRegion(n, d, vnn, vnd, vdd, c float64) Region {
	a, b, k := d*d-c*vdd, n*d-c*vnd, n*n-c*vnn
	disc := b*b - a*k
	if a > 0 {
		// n/d always satisfies the inequality, so a negative value is rounding.
		root := math.Sqrt(math.Max(disc, 0))
		return Region{[]Interval{{(b - root) / a, (b + root) / a}}}
	}
	inf := math.Inf(1)
	if a < 0 && disc > 0 {
		root := math.Sqrt(disc)
		return Region{[]Interval{{-inf, (b + root) / a}, {(b - root) / a, inf}}}
	}
	if a == 0 && b > 0 {
		return Region{[]Interval{{k / (2 * b), inf}}}
	}
	if a == 0 && b < 0 {
		return Region{[]Interval{{-inf, k / (2 * b)}}}
	}
	return wholeLine()
}

// oneMinus maps a region of b to that of 1 - b.
func (r Region) oneMinus() Region {
	p := make([]Interval, len(r.Pieces))
	for i, v := range r.Pieces {
		p[len(p)-1-i] = Interval{1 - v.Hi, 1 - v.Lo}
	}
	return Region{p}
}

// tQuantile is the two-sided Student quantile of the level.
func tQuantile(level, df float64) float64 {
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: df}.Quantile(0.5 + level/2)
}

func newValue(v, se, t float64) Value { return Value{v, se, v - t*se, v + t*se} }

func noValue() Value { return Value{math.NaN(), math.NaN(), math.Inf(-1), math.Inf(1)} }
