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
type Ghost struct {
	Axis  Axis
	axis  []float64 // ascending
	slope []float64 // c1 v1 - c2 v2 over the pooled mean squared
	width []float64 // kernel width of each point
}

// GhostOf makes the ghost of an axis from its values, the terms c1 v1 - c2 v2
// and the sigma of the axis at each pair, all parallel, finite and in one
// unit. The kernel is normal, of 0.4 the sigma at each point, narrower than the
// half beyond which the kernel's own spread would show.
func GhostOf(axis, slope, sigma []float64) (*Ghost, error) {
	if len(axis) == 0 || len(slope) != len(axis) || len(sigma) != len(axis) {
		return nil, fmt.Errorf("ghost from %d axis values, %d slopes, %d sigmas", len(axis), len(slope), len(sigma))
	}
	order := make([]int, len(axis))
	for i := range order {
		order[i] = i
		if !(sigma[i] > 0) || math.IsNaN(axis[i]+slope[i]) || math.IsInf(axis[i]+slope[i]+sigma[i], 0) {
			return nil, fmt.Errorf("ghost: axis %g, slope %g, sigma %g at %d cannot be used", axis[i], slope[i], sigma[i], i)
		}
	}
	slices.SortStableFunc(order, func(a, b int) int { return compareFloat(axis[a], axis[b]) })
	g := &Ghost{axis: make([]float64, len(axis)), slope: make([]float64, len(axis)), width: make([]float64, len(axis))}
	for k, i := range order {
		g.axis[k], g.slope[k], g.width[k] = axis[i], slope[i], 0.4*sigma[i]
	}
	return g, nil
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

// Ghost returns the ghost of a naive or the inverse-variance axis of the pairs;
// that of the last is zero by construction. Other axes share no noise with the
// difference and have none: an error.
func (p *Pairs) Ghost(axis Axis) (*Ghost, error) {
	if !axis.Naive() && axis != AxisInverseVariance {
		return nil, fmt.Errorf("axis %s shares no noise with the difference and has no ghost", axis)
	}
	n := p.Len()
	a, slope, sigma := make([]float64, n), make([]float64, n), make([]float64, n)
	for i := range a {
		v1, v2 := p.VarThin[i], p.VarThick[i]
		c1, c2 := v2/(v1+v2), v1/(v1+v2)
		if axis.Naive() {
			c1, c2 = naiveCoefficients(axis)
		}
		s := p.MeanPooled[i]
		a[i] = (c1*p.Thin[i] + c2*p.Thick[i]) / s
		sigma[i] = math.Sqrt(c1*c1*v1+c2*c2*v2) / s
		if axis.Naive() {
			slope[i] = (c1*v1 - c2*v2) / (s * s)
		}
	}
	g, err := GhostOf(a, slope, sigma)
	if err != nil {
		return nil, err
	}
	g.Axis = axis
	return g, nil
}

// At returns the ghost at each point of grid (any order), NaN where the axis
// has no point within five kernel widths.
func (g *Ghost) At(grid []float64) []float64 {
	out := make([]float64, len(grid))
	order, sorted := ascending(grid)
	density, flow := make([]float64, len(grid)), make([]float64, len(grid))
	g.spread(sorted, func(k, i int, u, kernel float64) {
		density[k] += kernel
		flow[k] += g.slope[i] * u / g.width[i] * kernel
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
//	n mean = F(a_lo) - F(a_hi),  F(a) = sum over pairs of slope times kernel
//
// and needs no derivative of a density. It panics on windows that are empty or
// outside.
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
	flow := make([]float64, len(edges))
	g.spread(sorted, func(k, i int, _, kernel float64) { flow[order[k]] += g.slope[i] * kernel })
	out := make([]float64, len(lo))
	for i := range out {
		out[i] = (flow[2*i] - flow[2*i+1]) / float64(hi[i]-lo[i])
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

// spread calls f for every point i and every place sorted[k] within five kernel
// widths of it, with u = (place - point)/width and the kernel density there.
func (g *Ghost) spread(sorted []float64, f func(k, i int, u, kernel float64)) {
	const reach = 5
	for i, x := range g.axis {
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
