package electron

import (
	"context"
	"math"

	"thinward/analysis/crystal"
)

// field tabulates U(h) = gamma F(h)/(pi V) in 1/angstrom^2 for every index up to a
// reciprocal length, zero beyond.
type field struct {
	reach [3]int
	u     []complex128
}

func newField(ctx context.Context, st *Structure, energyKeV, longest float64) (*field, error) {
	c := st.Cell
	f := &field{reach: [3]int{int(c.A * longest), int(c.B * longest), int(c.C * longest)}}
	metric := c.ReciprocalMetric()
	var hkl []crystal.HKL
	var at []int
	for h := -f.reach[0]; h <= f.reach[0]; h++ {
		for k := -f.reach[1]; k <= f.reach[1]; k++ {
			for l := -f.reach[2]; l <= f.reach[2]; l++ {
				i := crystal.HKL{H: h, K: k, L: l}
				if crystal.InvD2(metric, i) <= longest*longest {
					hkl, at = append(hkl, i), append(at, len(f.u))
				}
				f.u = append(f.u, 0)
			}
		}
	}
	factors, err := StructureFactors(ctx, st, hkl)
	if err != nil {
		return nil, err
	}
	unit := complex(Gamma(energyKeV)/(math.Pi*c.Volume()), 0)
	for i, v := range factors {
		f.u[at[i]] = unit * v
	}
	return f, nil
}

func (f *field) at(h, k, l int) complex128 {
	r := &f.reach
	if h < -r[0] || h > r[0] || k < -r[1] || k > r[1] || l < -r[2] || l > r[2] {
		return 0
	}
	return f.u[((h+r[0])*(2*r[1]+1)+k+r[1])*(2*r[2]+1)+l+r[2]]
}
