package resample

import (
	"math"
	"slices"
)

// flipPass computes the window statistics of one set under one flip.
type flipPass struct {
	y      []float64 // in the order of the set
	unit   []int32   // unit of each rank; nil = rank
	edges  []int
	lo, hi []int
	scale  []float64 // one over the denominator, 0 where that is 0
}

type flipScratch struct {
	words []uint64 // one sign bit a unit
	sum   []float64
}

func newFlipScratch(n int, passes []*flipPass) *flipScratch {
	edges := 0
	for _, p := range passes {
		edges = max(edges, len(p.edges))
	}
	return &flipScratch{words: make([]uint64, (n+63)/64), sum: make([]float64, edges)}
}

func newFlipPass(y []float64, set FlipSet, u units, plainSum bool) *flipPass {
	p := &flipPass{y: y, unit: u.of}
	if set.Order != nil {
		p.y = make([]float64, len(set.Order))
		p.unit = make([]int32, len(set.Order))
		for k, e := range set.Order {
			p.y[k], p.unit[k] = y[e], e
			if u.of != nil {
				p.unit[k] = u.of[e]
			}
		}
	}
	for _, w := range set.Windows {
		p.edges = append(p.edges, w.Lo, w.Hi)
	}
	slices.Sort(p.edges)
	p.edges = slices.Compact(p.edges)
	for _, w := range set.Windows {
		lo, _ := slices.BinarySearch(p.edges, w.Lo)
		hi, _ := slices.BinarySearch(p.edges, w.Hi)
		p.lo, p.hi = append(p.lo, lo), append(p.hi, hi)
		q := 1.0
		if !plainSum {
			q = 0
			for _, v := range p.y[w.Lo:w.Hi] {
				q += float64(v * v)
			}
		}
		if q > 0 {
			q = 1 / math.Sqrt(q)
		}
		p.scale = append(p.scale, q)
	}
	return p
}

// run returns the largest |statistic| under the flip in t.words, and writes the
// signed statistics to dst unless that is nil.
func (p *flipPass) run(t *flipScratch, dst []float64) float64 {
	s := 0.0
	for e := 1; e < len(p.edges); e++ {
		a, b := p.edges[e-1], p.edges[e]
		if p.unit == nil {
			s += flippedRow(p.y, a, b, t.words)
		} else {
			s += flippedGather(p.y[a:b], p.unit[a:b], t.words)
		}
		t.sum[e] = s
	}
	top := 0.0
	for g, sc := range p.scale {
		v := (t.sum[p.hi[g]] - t.sum[p.lo[g]]) * sc
		top = math.Max(top, math.Abs(v))
		if dst != nil {
			dst[g] = v
		}
	}
	return top
}

// flipped changes the sign of v when the lowest bit of word is set.
func flipped(v float64, word uint64) float64 {
	return math.Float64frombits(math.Float64bits(v) ^ word<<63)
}

func flippedRow(y []float64, a, b int, words []uint64) float64 {
	var s0, s1, s2, s3 float64
	for ; a < b && a&7 != 0; a++ {
		s0 += flipped(y[a], words[a>>6]>>(a&63))
	}
	for ; a+8 <= b; a += 8 {
		q, v := words[a>>6]>>(a&63), y[a:a+8:a+8]
		s0 += flipped(v[0], q)
		s1 += flipped(v[1], q>>1)
		s2 += flipped(v[2], q>>2)
		s3 += flipped(v[3], q>>3)
		s0 += flipped(v[4], q>>4)
		s1 += flipped(v[5], q>>5)
		s2 += flipped(v[6], q>>6)
		s3 += flipped(v[7], q>>7)
	}
	for ; a < b; a++ {
		s1 += flipped(y[a], words[a>>6]>>(a&63))
	}
	return (s0 + s1) + (s2 + s3)
}

func flippedGather(y []float64, unit []int32, words []uint64) float64 {
	var s0, s1 float64
	unit = unit[:len(y)]
	i := 0
	for ; i+2 <= len(y); i += 2 {
		u0, u1 := unit[i], unit[i+1]
		s0 += flipped(y[i], words[u0>>6]>>(u0&63))
		s1 += flipped(y[i+1], words[u1>>6]>>(u1&63))
	}
	if i < len(y) {
		u := unit[i]
		s0 += flipped(y[i], words[u>>6]>>(u&63))
	}
	return s0 + s1
}
