package evidence

import (
	"fmt"
	"math"
)

// Slope is the answer of a regression within equivalents. SE is that under
// permutation of the predictor within each reflection, Z their ratio; N counts
// the observations with an equivalent.
type Slope struct {
	Value, SE, Z float64
	N            int
}

// WithinEquivalents regresses y on x within groups of equal unique number, so
// that whatever equivalents share (strength, resolution, B, offset, the law
// itself) drops out:
//
//	slope = sum w (y - ybar)(x - xbar) / sum w (x - xbar)^2,
//
// w one over the mean variance v of the group. Z is the sum over its standard
// deviation when the x of each group are dealt anew among its members, which needs no
// draws: sum w^2 SS_y SS_x / (n-1). covariate, when not nil, is first removed from
// x the same way. Unique numbers are not negative. Errors: unequal lengths, no group
// with two members in which x varies.
func WithinEquivalents(unique []int32, y, x, v, covariate []float64) (*Slope, error) {
	g, err := newWithin(unique, y, x, v, covariate)
	if err != nil {
		return nil, err
	}
	w, xc, yc := g.weight, g.x, g.y
	ssx, ssy := make([]float64, len(g.count)), make([]float64, len(g.count))
	out := &Slope{}
	sum, square := 0.0, 0.0
	for o, u := range unique {
		if g.count[u] < 2 {
			continue
		}
		out.N++
		ssx[u] += xc[o] * xc[o]
		ssy[u] += yc[o] * yc[o]
		sum += w[u] * xc[o] * yc[o]
		square += w[u] * xc[o] * xc[o]
	}
	variance := 0.0
	for u, k := range g.count {
		if k > 1 {
			variance += w[u] * w[u] * ssx[u] * ssy[u] / (k - 1)
		}
	}
	if !(square > 0 && variance > 0) {
		return nil, fmt.Errorf("no reflection has equivalents among which the predictor varies")
	}
	out.Value, out.SE, out.Z = sum/square, math.Sqrt(variance)/square, sum/math.Sqrt(variance)
	return out, nil
}

// deviations are columns less their means within groups, x less what goes with the
// covariate too, and the weight of each group.
type deviations struct {
	groups
	y, x, weight []float64
}

func newWithin(unique []int32, y, x, v, covariate []float64) (*deviations, error) {
	n := len(unique)
	if len(y) != n || len(x) != n || len(v) != n || (covariate != nil && len(covariate) != n) {
		return nil, fmt.Errorf("evidence: WithinEquivalents: columns differ in length")
	}
	g := groupsOf(unique)
	d := &deviations{groups: g, y: g.centred(unique, y), x: g.centred(unique, x), weight: g.weights(unique, v)}
	if covariate != nil {
		tc := g.centred(unique, covariate)
		num, den := 0.0, 0.0
		for o, u := range unique {
			if g.count[u] > 1 {
				num += d.weight[u] * d.x[o] * tc[o]
				den += d.weight[u] * tc[o] * tc[o]
			}
		}
		if den > 0 {
			for o := range d.x {
				d.x[o] -= num / den * tc[o]
			}
		}
	}
	return d, nil
}

// groups counts the observations of each unique number.
type groups struct{ count []float64 }

func groupsOf(unique []int32) groups {
	top := int32(-1)
	for _, u := range unique {
		top = max(top, u)
	}
	g := groups{make([]float64, top+1)}
	for _, u := range unique {
		g.count[u]++
	}
	return g
}

func (g groups) mean(unique []int32, v []float64) []float64 {
	m := make([]float64, len(g.count))
	for o, u := range unique {
		m[u] += v[o]
	}
	for u, k := range g.count {
		if k > 0 {
			m[u] /= k
		}
	}
	return m
}

func (g groups) centred(unique []int32, v []float64) []float64 {
	m := g.mean(unique, v)
	out := make([]float64, len(v))
	for o, u := range unique {
		out[o] = v[o] - m[u]
	}
	return out
}

func (g groups) weights(unique []int32, v []float64) []float64 {
	m := g.mean(unique, v)
	for u := range m {
		if m[u] > 0 {
			m[u] = 1 / m[u]
		}
	}
	return m
}
