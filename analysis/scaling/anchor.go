package scaling

import (
	"cmp"
	"slices"
)

// anchorShells is the number of equal-count shells of s^2 whose means make
// strengths comparable.
const anchorShells = 20

// anchor says which reflections determine the scale, j being their intensities
// in a fit with all.
func (t *table) anchor(a Anchor, j []float64) []bool {
	n := len(t.id)
	order := t.byResolution()
	used := make([]bool, n)
	switch a {
	case AnchorLow, AnchorHigh:
		for rank, g := range order {
			used[g] = (rank < n/2) == (a == AnchorLow)
		}
		return used
	}
	strength := t.strength(j)
	middle := median(slices.Clone(strength))
	for g, e := range strength {
		used[g] = (e < middle) == (a == AnchorWeak)
	}
	return used
}

func (t *table) byResolution() []int {
	order := make([]int, len(t.id))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(x, y int) int {
		return cmp.Or(cmp.Compare(t.s2[x], t.s2[y]), cmp.Compare(t.id[x], t.id[y]))
	})
	return order
}

// strength returns j over the mean of its resolution shell, 0 where that is not
// positive.
func (t *table) strength(j []float64) []float64 {
	order := t.byResolution()
	n := len(order)
	shells := max(1, min(anchorShells, n/20))
	strength := make([]float64, n)
	for k := range shells {
		part := order[k*n/shells : (k+1)*n/shells]
		mean := 0.0
		for _, g := range part {
			mean += j[g] / float64(len(part))
		}
		for _, g := range part {
			if mean > 0 {
				strength[g] = j[g] / mean
			}
		}
	}
	return strength
}
