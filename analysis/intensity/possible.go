package intensity

import (
	"fmt"
	"math"

	"thinward/analysis/crystal"
)

// possibleMost bounds the box of indices that Possible walks through.
const possibleMost = 1 << 29

// Possible returns every allowed unique reflection of the group with
// 0 < s^2 <= s2max (1/angstrom^2), each by one index, and its s^2, by
// enumeration; Friedel mates are two reflections, unless centric, when apart is
// true. Errors: a cell that Check refuses, s2max that is not above zero and
// finite, a sphere of more than 5e8 indices.
func Possible(cell crystal.Cell, group *crystal.Group, s2max float64, apart bool) (hkl []crystal.HKL, s2 []float64, err error) {
	if err := cell.Check(); err != nil {
		return nil, nil, err
	}
	if !(s2max > 0) || math.IsInf(s2max, 1) {
		return nil, nil, fmt.Errorf("limit s^2 = %g is not above zero and finite", s2max)
	}
	// |h| <= |a| / d: the index is the scalar product of the scattering vector with the edge.
	reach := 2 * math.Sqrt(s2max) * (1 + 1e-12)
	m := [3]int{int(cell.A * reach), int(cell.B * reach), int(cell.C * reach)}
	box := 1.0
	for _, x := range m {
		box *= float64(2*x + 1)
	}
	if box > possibleMost {
		return nil, nil, fmt.Errorf("%.3g indices lie within d = %.3g angstrom, more than are counted", box, 1/(2*math.Sqrt(s2max)))
	}
	size := [3]int{2*m[0] + 1, 2*m[1] + 1, 2*m[2] + 1}
	seen := make([]uint64, (size[0]*size[1]*size[2]+63)/64)
	metric := cell.ReciprocalMetric()
	for h := -m[0]; h <= m[0]; h++ {
		for k := -m[1]; k <= m[1]; k++ {
			for l := -m[2]; l <= m[2]; l++ {
				at := ((h+m[0])*size[1]+k+m[1])*size[2] + l + m[2]
				index := crystal.HKL{H: h, K: k, L: l}
				if seen[at/64]>>(at%64)&1 == 1 || index == (crystal.HKL{}) {
					continue
				}
				s := crystal.InvD2(metric, index) / 4
				if s > s2max {
					continue
				}
				for _, e := range group.Equivalents(index) {
					if e.H < -m[0] || e.H > m[0] || e.K < -m[1] || e.K > m[1] || e.L < -m[2] || e.L > m[2] {
						continue
					}
					to := ((e.H+m[0])*size[1]+e.K+m[1])*size[2] + e.L + m[2]
					seen[to/64] |= 1 << (to % 64)
				}
				if group.Absent(index) {
					continue
				}
				hkl, s2 = append(hkl, index), append(s2, s)
				if apart && !group.Centric(index) {
					hkl, s2 = append(hkl, crystal.HKL{H: -h, K: -k, L: -l}), append(s2, s)
				}
			}
		}
	}
	return hkl, s2, nil
}
