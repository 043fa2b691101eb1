package intensity

import (
	"cmp"
	"slices"
)

// Halves deals the observations into two halves, 0 and 1, by raw index: all
// observations of one raw index stay together, and the raw indices of one
// unique reflection, in an order drawn from key, go to the two halves in turn,
// so that their numbers differ by at most one. A reflection with a single raw
// index lands in one half only. The same key and ids give the same halves.
// Copies and repeats of one index share their geometry, so that a split by row
// would make the halves look more alike than two measurements are.
func Halves(s *Scaled, key uint64) []uint8 {
	type entry struct {
		unique, raw int32
		draw        uint64
	}
	top := int32(-1)
	for _, r := range s.Raw {
		top = max(top, r)
	}
	seen := make([]bool, top+1)
	var list []entry
	for o, r := range s.Raw {
		if !seen[r] {
			seen[r] = true
			list = append(list, entry{s.Unique[o], r, mix(key ^ mix(uint64(uint32(r))))})
		}
	}
	slices.SortFunc(list, func(a, b entry) int {
		return cmp.Or(cmp.Compare(a.unique, b.unique), cmp.Compare(a.draw, b.draw), cmp.Compare(a.raw, b.raw))
	})
	side := make([]uint8, top+1)
	var turn uint8
	for i, e := range list {
		if i == 0 || e.unique != list[i-1].unique {
			turn = uint8(mix(^key^mix(uint64(uint32(e.unique)))) & 1)
		}
		side[e.raw] = turn
		turn ^= 1
	}
	half := make([]uint8, len(s.Raw))
	for o, r := range s.Raw {
		half[o] = side[r]
	}
	return half
}

// MergeHalves merges the two halves of Halves(s, key) apart, each as Merge
// does. It panics on what Scaled.Check refuses.
func MergeHalves(n int, s *Scaled, key uint64) (a, b *Merged) {
	if err := s.Check(n); err != nil {
		panic("intensity: MergeHalves: " + err.Error())
	}
	half := Halves(s, key)
	return mergePart(n, s, half, 0), mergePart(n, s, half, 1)
}
