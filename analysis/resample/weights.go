package resample

import (
	"fmt"
	"math"
)

// byteCounts says how many of the 256 byte values stand for a weight of 0, 1, ...
// 5. Mean and variance are exactly 1, the third moment is 4.98 (Poisson: 5).
var byteCounts = [...]int{94, 95, 46, 16, 4, 1}

// weightTable is the weight of each byte value; countTable is the byte itself.
// Neither is ever written after this.
var weightTable, countTable = func() (w, c [256]float64) {
	i := 0
	for k, n := range byteCounts {
		for range n {
			w[i] = float64(k)
			i++
		}
	}
	for i := range c {
		c[i] = float64(i)
	}
	return w, c
}()

// PoissonWeights fills dst with bootstrap weights of a Poisson-like law on 0..5
// with mean and variance exactly 1 (bootstrap by Poisson counts: Hanley &
// MacGibbon 2006, Comput. Methods Programs Biomed. 83:57). Use them for ratios
// only: their sum varies. One byte of the stream makes one weight, eight to a
// word, low byte first.
func PoissonWeights(s *Stream, dst []float64) {
	var word uint64
	for i := range dst {
		if i%8 == 0 {
			word = s.Uint64()
		}
		dst[i] = weightTable[uint8(word)]
		word >>= 8
	}
}

// packed holds one byte a unit, eight to a word, low byte first.
type packed []uint64

func newPacked(n int) packed { return make(packed, (n+7)/8) }

func (p packed) at(i int) uint8 { return uint8(p[i>>3] >> (8 * (i & 7))) }

func (p packed) add(i int, k uint8) { p[i>>3] += uint64(k) << (8 * (i & 7)) }

// units maps elements to what is drawn: of is nil when each element is a unit.
type units struct {
	of []int32
	n  int
}

func unitsOf(n int, blocks []int32) units {
	if blocks == nil {
		return units{n: n}
	}
	if len(blocks) != n {
		panic(fmt.Sprintf("resample: Settings.Blocks: %d groups for %d elements", len(blocks), n))
	}
	dense := make(map[int32]int32)
	of := make([]int32, n)
	for i, b := range blocks {
		u, ok := dense[b]
		if !ok {
			u = int32(len(dense))
			dense[b] = u
		}
		of[i] = u
	}
	return units{of: of, n: len(dense)}
}

// countIn returns the number of different units in each window.
func (u units) countIn(windows []Window) []int {
	out := make([]int, len(windows))
	if u.of == nil {
		for g, w := range windows {
			out[g] = w.Len()
		}
		return out
	}
	stamp := make([]int, u.n)
	for g, w := range windows {
		for _, v := range u.of[w.Lo:w.Hi] {
			if stamp[v] != g+1 {
				stamp[v] = g + 1
				out[g]++
			}
		}
	}
	return out
}

// sampler makes the unit counts of each replicate as bytes, to be read through
// table. prob is set when the replicates are all resamples there are.
type sampler struct {
	scheme Scheme
	n      int
	total  int
	seed   Seed
	table  *[256]float64
	rows   []uint8
	prob   []float64
}

func newSampler(n int, seed Seed, s *Settings, maxRows int) *sampler {
	m := &sampler{scheme: SchemePoisson, n: n, total: s.Replicates, seed: seed, table: &weightTable}
	if n >= poissonUnits {
		return m
	}
	m.scheme, m.table = SchemeMultinomial, &countTable
	if c := Multisets(n); c <= float64(min(s.ExactLimit, maxRows)) {
		m.scheme, m.total = SchemeExact, int(c)
		m.rows = make([]uint8, 0, m.total*n)
		m.prob = make([]float64, 0, m.total)
		eachMultiset(n, func(count []uint8, p float64) {
			m.rows = append(m.rows, count...)
			m.prob = append(m.prob, p)
		})
	}
	return m
}

func (m *sampler) fill(r int, dst packed) {
	switch m.scheme {
	case SchemeExact:
		clear(dst)
		for i, k := range m.rows[r*m.n : (r+1)*m.n] {
			dst.add(i, k)
		}
	case SchemeMultinomial:
		clear(dst)
		s := m.seed.Stream(r)
		for range m.n {
			dst.add(s.Intn(m.n), 1)
		}
	default:
		s := m.seed.Stream(r)
		for i := range dst {
			dst[i] = s.src.Uint64()
		}
	}
}

// Multisets returns the number of different resamples of n units, C(2n-1, n),
// exact up to n = 28; 0 for n < 1.
func Multisets(n int) float64 {
	if n < 1 {
		return 0
	}
	c := 1.0
	for i := 1; i < n; i++ {
		c = c * float64(n+i) / float64(i)
	}
	return math.Round(c)
}

// eachMultiset calls f with every count vector of n draws from n units and its
// probability n!/prod(c!)/n^n. count is reused.
func eachMultiset(n int, f func(count []uint8, p float64)) {
	inv := make([]float64, n+1)
	inv[0] = 1
	all := 1.0
	for k := 1; k <= n; k++ {
		inv[k] = inv[k-1] / float64(k)
		all *= float64(k) / float64(n)
	}
	count := make([]uint8, n)
	var walk func(i, left int, p float64)
	walk = func(i, left int, p float64) {
		if i == n-1 {
			count[i] = uint8(left)
			f(count, p*inv[left])
			return
		}
		for k := 0; k <= left; k++ {
			count[i] = uint8(k)
			walk(i+1, left-k, p*inv[k])
		}
	}
	walk(0, n, all)
}
