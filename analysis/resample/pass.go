package resample

import (
	"math"
	"slices"
)

// pass computes all window means of one replicate. Sums run over the segments
// between neighbouring window edges and are added up from the left, so that a
// window costs two look-ups.
type pass struct {
	u           units
	table       *[256]float64
	y, w        []float64 // y centred, and times w when w is not nil
	centre      float64
	edges       []int
	lo, hi      []int // edge numbers of each window
	plainMean   []float64
	plainWeight []float64
}

type passScratch struct {
	units, elements packed
	sumW, sumY      []float64
}

func newPass(y, w []float64, windows []Window, u units, table *[256]float64) *pass {
	p := &pass{u: u, table: table, y: make([]float64, len(y)), w: w}
	p.centre = centreOf(y, w)
	for i, v := range y {
		p.y[i] = v - p.centre
		if w != nil {
			p.y[i] *= w[i]
		}
	}
	for _, win := range windows {
		p.edges = append(p.edges, win.Lo, win.Hi)
	}
	slices.Sort(p.edges)
	p.edges = slices.Compact(p.edges)
	p.lo, p.hi = make([]int, len(windows)), make([]int, len(windows))
	for g, win := range windows {
		p.lo[g], _ = slices.BinarySearch(p.edges, win.Lo)
		p.hi[g], _ = slices.BinarySearch(p.edges, win.Hi)
	}
	t := p.scratch()
	one := uint8(slices.Index(table[:], 1))
	for i := range p.u.n {
		t.units.add(i, one)
	}
	p.plainMean = make([]float64, len(windows))
	p.run(t, p.plainMean)
	p.plainWeight = make([]float64, len(windows))
	for g := range windows {
		p.plainWeight[g] = t.sumW[p.hi[g]] - t.sumW[p.lo[g]]
	}
	return p
}

// centreOf returns the weighted mean, exactly the constant when y is one: prefix
// sums of centred values do not lose a mean far above the scatter.
func centreOf(y, w []float64) float64 {
	base := y[0]
	sum, weight := 0.0, 0.0
	for i, v := range y {
		c := 1.0
		if w != nil {
			c = w[i]
		}
		sum += float64(c * (v - base))
		weight += c
	}
	if !(weight > 0) || math.IsInf(sum/weight, 0) || math.IsNaN(sum/weight) {
		return base
	}
	return base + sum/weight
}

func (p *pass) scratch() *passScratch {
	t := &passScratch{units: newPacked(p.u.n), sumW: make([]float64, len(p.edges)), sumY: make([]float64, len(p.edges))}
	t.elements = t.units
	if p.u.of != nil {
		t.elements = newPacked(len(p.y))
	}
	return t
}

// run writes the window means of the unit counts in t.units to dst, NaN where a
// window drew nothing.
func (p *pass) run(t *passScratch, dst []float64) {
	if p.u.of != nil {
		clear(t.elements)
		for i, v := range p.u.of {
			t.elements.add(i, t.units.at(int(v)))
		}
	}
	var sw, sy float64
	for e := 1; e < len(p.edges); e++ {
		a, b := p.edges[e-1], p.edges[e]
		var dw, dy float64
		if p.w == nil {
			dw, dy = plainSums(t.elements, a, b, p.y, p.table)
		} else {
			dw, dy = weightedSums(t.elements, a, b, p.w, p.y, p.table)
		}
		sw += dw
		sy += dy
		t.sumW[e], t.sumY[e] = sw, sy
	}
	for g := range dst {
		w := t.sumW[p.hi[g]] - t.sumW[p.lo[g]]
		if !(w > 0) {
			dst[g] = math.NaN()
			continue
		}
		dst[g] = (t.sumY[p.hi[g]] - t.sumY[p.lo[g]]) / w
	}
}

// plainSums returns sum c and sum c*y over elements [a, b) for the counts c that
// table gives. Four running sums in a pattern fixed by a and b: the bits do not
// depend on who calls it. The float64 conversions forbid fused multiply-add,
// which some processors would use.
func plainSums(count packed, a, b int, y []float64, table *[256]float64) (sw, sy float64) {
	var w0, w1, w2, w3, s0, s1, s2, s3 float64
	for ; a < b && a&7 != 0; a++ {
		c := table[count.at(a)]
		w0 += c
		s0 += float64(c * y[a])
	}
	for ; a+8 <= b; a += 8 {
		q, v := count[a>>3], y[a:a+8:a+8]
		c0, c1, c2, c3 := table[uint8(q)], table[uint8(q>>8)], table[uint8(q>>16)], table[uint8(q>>24)]
		w0 += c0
		w1 += c1
		w2 += c2
		w3 += c3
		s0 += float64(c0 * v[0])
		s1 += float64(c1 * v[1])
		s2 += float64(c2 * v[2])
		s3 += float64(c3 * v[3])
		c0, c1, c2, c3 = table[uint8(q>>32)], table[uint8(q>>40)], table[uint8(q>>48)], table[uint8(q>>56)]
		w0 += c0
		w1 += c1
		w2 += c2
		w3 += c3
		s0 += float64(c0 * v[4])
		s1 += float64(c1 * v[5])
		s2 += float64(c2 * v[6])
		s3 += float64(c3 * v[7])
	}
	for ; a < b; a++ {
		c := table[count.at(a)]
		w1 += c
		s1 += float64(c * y[a])
	}
	return (w0 + w1) + (w2 + w3), (s0 + s1) + (s2 + s3)
}

// weightedSums returns sum c*w and sum c*wy over elements [a, b).
func weightedSums(count packed, a, b int, w, wy []float64, table *[256]float64) (sw, sy float64) {
	var w0, w1, w2, w3, s0, s1, s2, s3 float64
	for ; a < b && a&7 != 0; a++ {
		c := table[count.at(a)]
		w0 += float64(c * w[a])
		s0 += float64(c * wy[a])
	}
	for ; a+8 <= b; a += 8 {
		q, v, u := count[a>>3], wy[a:a+8:a+8], w[a:a+8:a+8]
		c0, c1, c2, c3 := table[uint8(q)], table[uint8(q>>8)], table[uint8(q>>16)], table[uint8(q>>24)]
		w0 += float64(c0 * u[0])
		w1 += float64(c1 * u[1])
		w2 += float64(c2 * u[2])
		w3 += float64(c3 * u[3])
		s0 += float64(c0 * v[0])
		s1 += float64(c1 * v[1])
		s2 += float64(c2 * v[2])
		s3 += float64(c3 * v[3])
		c0, c1, c2, c3 = table[uint8(q>>32)], table[uint8(q>>40)], table[uint8(q>>48)], table[uint8(q>>56)]
		w0 += float64(c0 * u[4])
		w1 += float64(c1 * u[5])
		w2 += float64(c2 * u[6])
		w3 += float64(c3 * u[7])
		s0 += float64(c0 * v[4])
		s1 += float64(c1 * v[5])
		s2 += float64(c2 * v[6])
		s3 += float64(c3 * v[7])
	}
	for ; a < b; a++ {
		c := table[count.at(a)]
		w1 += float64(c * w[a])
		s1 += float64(c * wy[a])
	}
	return (w0 + w1) + (w2 + w3), (s0 + s1) + (s2 + s3)
}
