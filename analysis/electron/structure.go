package electron

import (
	"context"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/parallel"
)

// Atom is one atom of the asymmetric unit: fractional coordinates and a B factor
// in square angstrom.
type Atom struct {
	Element string
	X, Y, Z float64
	B       float64
}

// Structure is what scatters. Atoms on special positions count once for every
// operator. B is added to the B of every atom.
type Structure struct {
	Cell  crystal.Cell
	Group *crystal.Group
	Atoms []Atom
	B     float64
}

// atomKind is what atoms share in a structure factor.
type atomKind struct {
	element string
	b       float64
}

// StructureFactors returns F(h) of every index in angstrom, the sum over the atoms
// and their symmetry copies of f(s) exp(-B s^2) exp(2 pi i h.x), f from
// ScatteringFactor and s = 1/(2d). No atoms give zeros. It returns an error for an
// unknown element or when ctx ends, and panics for a nil structure or group.
func StructureFactors(ctx context.Context, st *Structure, hkl []crystal.HKL) ([]complex128, error) {
	const block = 256
	if st == nil || st.Group == nil {
		panic("electron: StructureFactors: nil structure or group")
	}
	kinds, members := sorted(st.Atoms)
	for _, k := range kinds {
		if _, err := ScatteringFactor(k.element, 0); err != nil {
			return nil, err
		}
	}
	var sites [][3]float64
	ends := make([]int, len(kinds))
	for i := range kinds {
		for _, a := range members[i] {
			for _, op := range st.Group.Operators() {
				sites = append(sites, apply(op, [3]float64{a.X, a.Y, a.Z}))
			}
		}
		ends[i] = len(sites)
	}
	waves := newWaves(sites, hkl)
	metric := st.Cell.ReciprocalMetric()
	out := make([]complex128, len(hkl))
	err := parallel.For(ctx, (len(hkl)+block-1)/block, 0, func(_ context.Context, b int) error {
		for i := b * block; i < min(len(hkl), (b+1)*block); i++ {
			s2 := crystal.InvD2(metric, hkl[i]) / 4
			re, im, from := 0.0, 0.0, 0
			for k, kind := range kinds {
				f, err := ScatteringFactor(kind.element, math.Sqrt(s2))
				if err != nil {
					return err
				}
				f *= math.Exp(-(kind.b + st.B) * s2)
				r, m := waves.sum(hkl[i], from, ends[k])
				re, im, from = re+float64(f*r), im+float64(f*m), ends[k]
			}
			out[i] = complex(re, im)
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	return out, nil
}

func apply(op crystal.Op, x [3]float64) [3]float64 {
	var out [3]float64
	for i := range out {
		out[i] = float64(op.T[i]) / 24
		for j := range x {
			out[i] += float64(op.R[i][j]) * x[j]
		}
	}
	return out
}

func sorted(atoms []Atom) ([]atomKind, [][]Atom) {
	var kinds []atomKind
	var members [][]Atom
	place := map[atomKind]int{}
	for _, a := range atoms {
		k := atomKind{a.Element, a.B}
		i, ok := place[k]
		if !ok {
			i = len(kinds)
			place[k] = i
			kinds, members = append(kinds, k), append(members, nil)
		}
		members[i] = append(members[i], a)
	}
	return kinds, members
}

// waves tabulates exp(2 pi i h x) by axis, index and site, so that a structure
// factor takes two complex products a site and no sine.
type waves struct {
	sites int
	low   [3]int
	table [3][]complex128
}

func newWaves(sites [][3]float64, hkl []crystal.HKL) *waves {
	w := &waves{sites: len(sites)}
	var high [3]int
	for i, h := range hkl {
		for axis, v := range [3]int{h.H, h.K, h.L} {
			if i == 0 || v < w.low[axis] {
				w.low[axis] = v
			}
			if i == 0 || v > high[axis] {
				high[axis] = v
			}
		}
	}
	for axis := range w.table {
		for h := w.low[axis]; h <= high[axis]; h++ {
			for _, x := range sites {
				s, c := math.Sincos(2 * math.Pi * float64(h) * x[axis])
				w.table[axis] = append(w.table[axis], complex(c, s))
			}
		}
	}
	return w
}

func (w *waves) sum(h crystal.HKL, from, to int) (re, im float64) {
	row := func(axis, v int) []complex128 {
		start := (v - w.low[axis]) * w.sites
		return w.table[axis][start+from : start+to]
	}
	x, y, z := row(0, h.H), row(1, h.K), row(2, h.L)
	var total complex128
	for i := range x {
		total += x[i] * y[i] * z[i]
	}
	return real(total), imag(total)
}
