package resample

import (
	"fmt"
	"math"
	"slices"
)

// maxOrderedCells bounds states times values of the exact law of Jonckheere.
const maxOrderedCells = 20_000_000

// Jonckheere is the Jonckheere-Terpstra test of ordered groups (Terpstra 1952;
// Jonckheere 1954, Biometrika 41:133): J counts the pairs from an earlier and a
// later group in which the later value is larger, equal ones by half. Upper is the
// p-value of a rise. The law is exact given the ties (all assignments of the
// pooled values to the groups) while that is affordable, else normal with the
// tie-corrected variance (Hollander & Wolfe 1973).
//
// Fewer than two groups, an empty group and a NaN are errors.
func Jonckheere(groups [][]float64) (*RankTest, error) {
	if len(groups) < 2 {
		return nil, fmt.Errorf("resample: Jonckheere: %d groups, need two", len(groups))
	}
	r := &RankTest{}
	var pooled []float64
	sizes := make([]int, len(groups))
	for i, g := range groups {
		if len(g) == 0 {
			return nil, fmt.Errorf("resample: Jonckheere: group %d is empty", i)
		}
		for j, v := range g {
			if math.IsNaN(v) {
				return nil, fmt.Errorf("resample: Jonckheere: group %d value %d is NaN", i, j)
			}
			for _, u := range pooled {
				r.Stat += half(u, v)
			}
		}
		pooled = append(pooled, g...)
		sizes[i] = len(g)
	}
	r.N = len(pooled)
	ties := tieSizes(pooled)
	r.Expected, r.Var = jonckheereMoments(sizes, ties, r.N)
	r.deviate()
	if l, ok := jonckheereLaw(sizes, ties); ok {
		r.fromLattice(l, int(math.Round(2*r.Stat)))
	} else {
		r.fromNormal()
	}
	return r, nil
}

func half(earlier, later float64) float64 {
	switch {
	case later > earlier:
		return 1
	case later == earlier:
		return 0.5
	}
	return 0
}

func jonckheereMoments(sizes, ties []int, n int) (mean, variance float64) {
	sums := func(list []int) (a, b, c, squares float64) {
		for _, v := range list {
			t := float64(v)
			a += t * (t - 1) * (2*t + 5)
			b += t * (t - 1) * (t - 2)
			c += t * (t - 1)
			squares += t * t
		}
		return a, b, c, squares
	}
	a1, b1, c1, sq := sums(sizes)
	a2, b2, c2, _ := sums(ties)
	f := float64(n)
	mean = (f*f - sq) / 4
	variance = (f*(f-1)*(2*f+5) - a1 - a2) / 72
	if n > 2 {
		variance += b1 * b2 / (36 * f * (f - 1) * (f - 2))
	}
	return mean, variance + c1*c2/(8*f*(f-1))
}

// jonckheereLaw is the law of 2J. The pooled values are dealt out in ascending
// order, a tied set at a time; the state is how many each group has got.
func jonckheereLaw(sizes, ties []int) (lattice, bool) {
	k := len(sizes)
	stride := make([]int, k)
	states, pairs, n := 1, 0, 0
	for i, s := range sizes {
		stride[i] = states
		states *= s + 1
		pairs += n * s
		n += s
		if states > maxOrderedCells {
			return lattice{}, false
		}
	}
	if states*(2*pairs+1) > maxOrderedCells {
		return lattice{}, false
	}
	law := map[int]lattice{0: point(0)}
	for _, t := range ties {
		law = dealTies(law, sizes, stride, t)
	}
	return law[states-1], true
}

// dealTies hands out t equal values to the groups in every way, each way weighted
// by the number of assignments it stands for. Weights are kept as shares of all
// ways so far, so that nothing overflows.
func dealTies(law map[int]lattice, sizes, stride []int, t int) map[int]lattice {
	k := len(sizes)
	next := make(map[int]lattice)
	keys := make([]int, 0, len(law))
	for key := range law {
		keys = append(keys, key)
	}
	slices.Sort(keys)
	n := 0
	for _, s := range sizes {
		n += s
	}
	for _, key := range keys {
		have := make([]int, k)
		dealt := 0
		for i := range have {
			have[i] = key / stride[i] % (sizes[i] + 1)
			dealt += have[i]
		}
		var deal func(i, left, to, gain, got, tied int, ways float64)
		// gain: twice the pairs won; got: dealt before to earlier groups; tied: of
		// these values, to earlier groups.
		deal = func(i, left, to, gain, got, tied int, ways float64) {
			if i == k {
				if left == 0 {
					addLaw(next, to, law[key], gain, ways/binomial(n-dealt, t))
				}
				return
			}
			for m := 0; m <= min(left, sizes[i]-have[i]); m++ {
				deal(i+1, left-m, to+m*stride[i], gain+m*(2*got+tied), got+have[i], tied+m, ways*binomial(sizes[i]-have[i], m))
			}
		}
		deal(0, t, key, 0, 0, 0, 1)
	}
	return next
}

func addLaw(to map[int]lattice, key int, from lattice, shift int, weight float64) {
	moved := lattice{first: from.first + shift, p: from.p}
	old, ok := to[key]
	if !ok {
		old = lattice{first: moved.first, p: make([]float64, len(moved.p))}
	}
	first := min(old.first, moved.first)
	last := max(old.first+len(old.p), moved.first+len(moved.p))
	sum := lattice{first: first, p: make([]float64, last-first)}
	copy(sum.p[old.first-first:], old.p)
	for i, v := range moved.p {
		sum.p[moved.first-first+i] += float64(v * weight)
	}
	to[key] = sum
}

func binomial(n, k int) float64 {
	c := 1.0
	for i := range k {
		c = c * float64(n-i) / float64(i+1)
	}
	return math.Round(c)
}
