package intensity

import (
	"math"
	"slices"
	"sort"
)

// Shells cuts reflections into N shells of s^2 = 1/(4 d^2). Shell i holds what
// lies in Edges[i] <= s2 < Edges[i+1], the last one its upper edge too. Of is
// the shell of each reflection given, -1 where its s2 is NaN.
type Shells struct {
	Edges []float64
	Of    []int32
	N     int
}

// EqualCountShells cuts s2 (1/angstrom^2, any order) into n shells of equal
// count, low resolution first. Reflections of one s2 are never parted, so that
// fewer than n shells come out when many are equal; n below 1 counts as 1.
// NaN belongs to no shell. No reflections: N is 0 and Edges nil.
func EqualCountShells(s2 []float64, n int) *Shells {
	sorted := make([]float64, 0, len(s2))
	for _, x := range s2 {
		if !math.IsNaN(x) {
			sorted = append(sorted, x)
		}
	}
	slices.Sort(sorted)
	sh := &Shells{Of: make([]int32, len(s2))}
	if len(sorted) > 0 {
		sh.Edges = []float64{sorted[0]}
		for i := 1; i < max(n, 1); i++ {
			at := i * len(sorted) / n
			if at > 0 && sorted[at] > sorted[at-1] {
				if edge := sorted[at-1] + (sorted[at]-sorted[at-1])/2; edge > sh.Edges[len(sh.Edges)-1] {
					sh.Edges = append(sh.Edges, edge)
				}
			}
		}
		sh.Edges = append(sh.Edges, sorted[len(sorted)-1])
		sh.N = len(sh.Edges) - 1
	}
	for i, x := range s2 {
		sh.Of[i] = int32(sh.Find(x))
	}
	return sh
}

// Find returns the shell that s2 falls into, -1 when it lies outside all of
// them or is NaN.
func (sh *Shells) Find(s2 float64) int {
	if sh.N == 0 || !(s2 >= sh.Edges[0] && s2 <= sh.Edges[sh.N]) {
		return -1
	}
	i := sort.SearchFloat64s(sh.Edges, s2)
	if i < len(sh.Edges) && sh.Edges[i] == s2 {
		return min(i, sh.N-1)
	}
	return i - 1
}

// Spacing returns the limits of shell i in angstrom, the long spacing first:
// d = 1/(2 s). The long one is +Inf when the shell begins at s2 = 0.
func (sh *Shells) Spacing(i int) (long, short float64) {
	return 1 / (2 * math.Sqrt(sh.Edges[i])), 1 / (2 * math.Sqrt(sh.Edges[i+1]))
}

// Means returns the mean of value over each shell, weighted by weight (nil
// stands for 1), and the number of values that went in: those in a shell, not
// NaN, with a weight above zero. A shell without any has the mean NaN. value
// and weight are parallel to the s2 that made the shells.
func (sh *Shells) Means(value, weight []float64) (mean []float64, n []int) {
	if len(value) != len(sh.Of) || (weight != nil && len(weight) != len(sh.Of)) {
		panic("intensity: Shells.Means: values are not parallel to the shells")
	}
	mean, n = make([]float64, sh.N), make([]int, sh.N)
	total := make([]float64, sh.N)
	for i, s := range sh.Of {
		w := 1.0
		if weight != nil {
			w = weight[i]
		}
		if s < 0 || math.IsNaN(value[i]) || !(w > 0) {
			continue
		}
		mean[s] += w * value[i]
		total[s] += w
		n[s]++
	}
	for s := range mean {
		mean[s] /= total[s]
	}
	return mean, n
}
