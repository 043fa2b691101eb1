package simulate

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/crystal"
)

const (
	absentScrewGlide uint8 = 1 << iota
	absentCentring
)

const mostIndices = 20_000_000

// indices is every reciprocal lattice point within the resolution limit, in
// order of h, k, l, with its place among the unique ones.
type indices struct {
	raw    []crystal.HKL
	unique []int32
	absent []uint8 // of each raw index
	at     []int32 // raw index of a grid point, -1 outside
	reach  [3]int
}

// lookup returns the raw number of h, or -1.
func (x *indices) lookup(h crystal.HKL) int32 {
	if h.H < -x.reach[0] || h.H > x.reach[0] || h.K < -x.reach[1] || h.K > x.reach[1] || h.L < -x.reach[2] || h.L > x.reach[2] {
		return -1
	}
	return x.at[((h.H+x.reach[0])*(2*x.reach[1]+1)+h.K+x.reach[1])*(2*x.reach[2]+1)+h.L+x.reach[2]]
}

// enumerate lists the indices and fills the HKL, S2, Epsilon, Centric and Absent
// of the truth.
func enumerate(ctx context.Context, cell crystal.Cell, group *crystal.Group, dMin float64) (*indices, *Truth, error) {
	box := (2*cell.A/dMin + 1) * (2*cell.B/dMin + 1) * (2*cell.C/dMin + 1)
	if !(box <= mostIndices) {
		return nil, nil, fmt.Errorf("simulate: d_min %g leaves %.3g lattice points, more than %d; raise d_min or shrink the cell", dMin, box, mostIndices)
	}
	x := &indices{reach: [3]int{int(cell.A / dMin), int(cell.B / dMin), int(cell.C / dMin)}}
	x.at = make([]int32, 0, int(box))
	limit := 1 / (dMin * dMin)
	translations := centrings(group)
	number := map[crystal.HKL]int32{}
	t := &Truth{}
	metric := cell.ReciprocalMetric()
	for h := -x.reach[0]; h <= x.reach[0]; h++ {
		if err := ctx.Err(); err != nil {
			return nil, nil, err
		}
		for k := -x.reach[1]; k <= x.reach[1]; k++ {
			for l := -x.reach[2]; l <= x.reach[2]; l++ {
				hkl := crystal.HKL{H: h, K: k, L: l}
				q := crystal.InvD2(metric, hkl)
				if q > limit || (h == 0 && k == 0 && l == 0) {
					x.at = append(x.at, -1)
					continue
				}
				rep := group.Canonical(hkl)
				u, ok := number[rep]
				if !ok {
					u = int32(len(t.HKL))
					number[rep] = u
					t.HKL = append(t.HKL, rep)
					t.S2 = append(t.S2, crystal.InvD2(metric, rep)/4)
				}
				x.at = append(x.at, int32(len(x.raw)))
				x.raw = append(x.raw, hkl)
				x.unique = append(x.unique, u)
				x.absent = append(x.absent, absence(group, translations, hkl))
			}
		}
	}
	if len(x.raw) == 0 {
		return nil, nil, fmt.Errorf("simulate: no reflection lies within d_min %g", dMin)
	}
	x.renumber(t)
	for _, h := range t.HKL {
		t.Epsilon = append(t.Epsilon, int8(group.Epsilon(h)))
		t.Centric = append(t.Centric, group.Centric(h))
		t.Absent = append(t.Absent, group.Absent(h))
	}
	return x, t, nil
}

// renumber sorts the unique reflections by s^2, those of equal s^2 by index.
func (x *indices) renumber(t *Truth) {
	order := make([]int32, len(t.HKL))
	for i := range order {
		order[i] = int32(i)
	}
	slices.SortFunc(order, func(a, b int32) int {
		if c := compare(t.S2[a], t.S2[b]); c != 0 {
			return c
		}
		p, q := t.HKL[a], t.HKL[b]
		return slices.Compare([]int{p.H, p.K, p.L}, []int{q.H, q.K, q.L})
	})
	place := make([]int32, len(order))
	hkl, s2 := make([]crystal.HKL, len(order)), make([]float64, len(order))
	for i, o := range order {
		place[o], hkl[i], s2[i] = int32(i), t.HKL[o], t.S2[o]
	}
	t.HKL, t.S2 = hkl, s2
	for i, u := range x.unique {
		x.unique[i] = place[u]
	}
}

// compare treats values that differ only by rounding as equal, so that the order
// of reflections of equal d does not hang on the last bit.
func compare(a, b float64) int {
	if math.Abs(a-b) <= 1e-12*(a+b) {
		return 0
	}
	if a < b {
		return -1
	}
	return 1
}

func centrings(group *crystal.Group) [][3]int8 {
	var out [][3]int8
	for _, op := range group.Operators() {
		if op.R == [3][3]int8{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}} && op.T != [3]int8{} {
			out = append(out, op.T)
		}
	}
	return out
}

func absence(group *crystal.Group, translations [][3]int8, h crystal.HKL) uint8 {
	for _, t := range translations {
		if (h.H*int(t[0])+h.K*int(t[1])+h.L*int(t[2]))%24 != 0 {
			return absentCentring
		}
	}
	if group.Absent(h) {
		return absentScrewGlide
	}
	return 0
}
