package difference

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// Ghost is the curve that noise alone draws when the difference is set against
// an axis a = c1 thin + c2 thick that shares its noise, in eps units:
//
//	ghost(a) = -(1/f) d/da [ f(a) E(c1 v1 - c2 v2 | a) ]
//
// with f the density of the axis and v the variances at the expected
// intensities (the formula of Tweedie, Robbins 1956, for variances that change
// with intensity). It is the ghost of noise only: reproducible deviations of a
// position draw one of their own, which this does not hold.
//
// In kernel form it is -sum g k'(a - x) / sum k(a - x) over the pairs, with
// g = c1 v1 - c2 v2. Kernels at the axis values themselves would blur the
// density, or leave it rough. Here x is (c1 + c2) times the inverse-variance
// mean of the pair and k the normal density of standard deviation
// |g| / sqrt(v1 + v2): without a true difference, a - x is g/(v1 + v2) times the
// difference and independent of x, so that these kernels make the density of
// the axis exactly and no width has to be chosen. Where g is nearly zero the
// width is kept at a quarter of the axis' own sigma.
type Ghost struct {
	Axis   Axis
	axis   []float64 // observed, ascending
	centre []float64
	slope  []float64 // g
	width  []float64
}

// GhostOf makes the ghost of the axis c1 thin + c2 thick from pairs in eps units
// and their variances, all parallel and finite, the variances above zero.
func GhostOf(thin, thick, varThin, varThick []float64, c1, c2 float64) (*Ghost, error) {
	n := len(thin)
	if n == 0 || len(thick) != n || len(varThin) != n || len(varThick) != n {
		return nil, fmt.Errorf("ghost from %d thin, %d thick, %d and %d variances", n, len(thick), len(varThin), len(varThick))
	}
	g := &Ghost{axis: make([]float64, n), centre: make([]float64, n), slope: make([]float64, n), width: make([]float64, n)}
	for i := range thin {
		v1, v2 := varThin[i], varThick[i]
		g.axis[i] = c1*thin[i] + c2*thick[i]
		g.centre[i] = (c1 + c2) * (v2*thin[i] + v1*thick[i]) / (v1 + v2)
		g.slope[i] = c1*v1 - c2*v2
		g.width[i] = math.Max(math.Abs(g.slope[i])/math.Sqrt(v1+v2), 0.25*math.Sqrt(c1*c1*v1+c2*c2*v2))
		if !(v1 > 0 && v2 > 0) || math.IsInf(v1+v2, 0) || math.IsNaN(g.axis[i]) || math.IsInf(g.axis[i], 0) {
			return nil, fmt.Errorf("ghost: values %g and %g with variances %g and %g at %d cannot be used", thin[i], thick[i], v1, v2, i)
		}
	}
	slices.Sort(g.axis)
	return g, nil
}

// Ghost returns the ghost of a naive or the inverse-variance axis of the pairs;
// that of the last is zero by construction. Other axes share no noise with the
// difference and have none: an error.
func (p *Pairs) Ghost(axis Axis) (*Ghost, error) {
	c1, c2 := 0.5, 0.5
	switch {
	case axis.Naive():
		c1, c2 = naiveCoefficients(axis)
	case axis != AxisInverseVariance:
		return nil, fmt.Errorf("axis %s shares no noise with the difference and has no ghost", axis)
	}
	n := p.Len()
	thin, thick, v1, v2 := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	for i, s := range p.MeanPooled {
		thin[i], thick[i] = p.Thin[i]/s, p.Thick[i]/s
		v1[i], v2[i] = p.VarThin[i]/(s*s), p.VarThick[i]/(s*s)
	}
	g, err := GhostOf(thin, thick, v1, v2, c1, c2)
	if err != nil {
		return nil, err
	}
	g.Axis = axis
	if axis == AxisInverseVariance {
		copy(g.axis, g.centre)
		slices.Sort(g.axis)
		clear(g.slope)
	}
	return g, nil
}

// At returns the ghost at each point of grid (any order), NaN where the axis
// has no pair within six kernel widths.
func (g *Ghost) At(grid []float64) []float64 {
	out := make([]float64, len(grid))
	order, sorted := ascending(grid)
	density, flow := make([]float64, len(grid)), make([]float64, len(grid))
	g.spread(sorted, func(k, i int, u, normal float64) {
		density[k] += normal
		flow[k] += g.slope[i] * u / g.width[i] * normal
	})
	for k, at := range order {
		out[at] = math.NaN()
		if density[k] > 0 {
			out[at] = flow[k] / density[k]
		}
	}
	return out
}

// Windows returns the mean of the ghost over windows of the pairs in ascending
// order of the axis, [lo, hi) in rank; it is what a moving mean over those
// windows shows. The integral of the formula over a window is exact,
//
//	mean = (F(a_lo) - F(a_hi)) / P,  F(a) = sum over pairs of g k(a - x)
//
// with P the number of pairs that the kernels put between a_lo and a_hi. It
// panics on windows that are empty or outside.
func (g *Ghost) Windows(lo, hi []int) []float64 {
	if len(lo) != len(hi) {
		panic("difference: Ghost.Windows: lo and hi differ in length")
	}
	n := len(g.axis)
	edges := make([]float64, 0, 2*len(lo))
	for i := range lo {
		if lo[i] < 0 || hi[i] > n || lo[i] >= hi[i] {
			panic(fmt.Sprintf("difference: Ghost.Windows: window %d is %d to %d of %d", i, lo[i], hi[i], n))
		}
		edges = append(edges, g.edge(lo[i]), g.edge(hi[i]))
	}
	order, sorted := ascending(edges)
	flow, below := make([]float64, len(edges)), make([]float64, len(edges))
	for i, x := range g.centre {
		h := g.width[i]
		from := sort.SearchFloat64s(sorted, x-reach*h)
		for k := from; k < len(sorted); k++ {
			u := (sorted[k] - x) / h
			if u > reach {
				below[order[k]]++
				continue
			}
			below[order[k]] += 0.5 * math.Erfc(-u/math.Sqrt2)
			flow[order[k]] += g.slope[i] * math.Exp(-0.5*u*u) / (h * math.Sqrt(2*math.Pi))
		}
	}
	out := make([]float64, len(lo))
	for i := range out {
		out[i] = (flow[2*i] - flow[2*i+1]) / (below[2*i+1] - below[2*i])
	}
	return out
}

// edge is the axis value between ranks r-1 and r, infinite outside all.
func (g *Ghost) edge(r int) float64 {
	switch r {
	case 0:
		return math.Inf(-1)
	case len(g.axis):
		return math.Inf(1)
	}
	return 0.5 * (g.axis[r-1] + g.axis[r])
}

// reach is how many widths a kernel is followed.
const reach = 6

// spread calls f for every pair i and every place sorted[k] within reach of
// it, with u = (place - centre)/width and the normal density there.
func (g *Ghost) spread(sorted []float64, f func(k, i int, u, normal float64)) {
	for i, x := range g.centre {
		h := g.width[i]
		for k := sort.SearchFloat64s(sorted, x-reach*h); k < len(sorted) && sorted[k] <= x+reach*h; k++ {
			u := (sorted[k] - x) / h
			f(k, i, u, math.Exp(-0.5*u*u)/(h*math.Sqrt(2*math.Pi)))
		}
	}
}

func ascending(x []float64) (order []int, sorted []float64) {
	order = make([]int, len(x))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int { return compareFloat(x[a], x[b]) })
	sorted = make([]float64, len(x))
	for k, i := range order {
		sorted[k] = x[i]
	}
	return order, sorted
}

func compareFloat(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	}
	return 0
}
