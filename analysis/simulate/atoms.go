package simulate

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/crystal"
	"thinward/analysis/electron"
	"thinward/analysis/resample"
)

// placeAtoms draws the atoms of one asymmetric unit uniformly in the cell, each
// at least MinDistance from all atoms and symmetry copies before it and from its
// own copies, so none lies on a special position.
func placeAtoms(ctx context.Context, o *Structure, cell crystal.Cell, group *crystal.Group, rnd *resample.Stream) ([]Atom, error) {
	const tries = 2000
	ops := group.Operators()
	kinds := o.Atoms
	if len(kinds) == 0 {
		n := max(6, int(cell.Volume()/(18*float64(len(ops)))))
		kinds = []AtomKind{{Element: "C", Number: n - 2*(n/6)}, {Element: "N", Number: n / 6}, {Element: "O", Number: n / 6}}
	}
	basis := cell.Orthogonal()
	var atoms []Atom
	var taken [][3]float64
	for _, kind := range kinds {
		for range kind.Number {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			placed := false
			for range tries {
				x := [3]float64{rnd.Float64(), rnd.Float64(), rnd.Float64()}
				if !fits(x, ops, taken, basis, o.MinDistance) {
					continue
				}
				for _, op := range ops {
					taken = append(taken, apply(op, x))
				}
				atoms = append(atoms, Atom{Element: kind.Element, X: x[0], Y: x[1], Z: x[2], B: kind.B})
				placed = true
				break
			}
			if !placed {
				return nil, fmt.Errorf("simulate: no room for atom %d (%s) at min_distance %g; lower it, use fewer atoms or a larger cell", len(atoms)+1, kind.Element, o.MinDistance)
			}
		}
	}
	return atoms, nil
}

// fits looks at the copies of x against x itself and x against what is taken; by
// symmetry that covers every pair.
func fits(x [3]float64, ops []crystal.Op, taken [][3]float64, basis [3][3]float64, least float64) bool {
	for _, op := range ops {
		if op.R == [3][3]int8{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}} {
			continue
		}
		if !apart(x, apply(op, x), basis, least) {
			return false
		}
	}
	for _, y := range taken {
		if !apart(x, y, basis, least) {
			return false
		}
	}
	return true
}

func apart(x, y [3]float64, basis [3][3]float64, least float64) bool {
	var d [3]float64
	for i := range d {
		d[i] = x[i] - y[i]
		d[i] -= math.Round(d[i])
	}
	for a := -1.0; a <= 1; a++ {
		for b := -1.0; b <= 1; b++ {
			for c := -1.0; c <= 1; c++ {
				v := times(basis, [3]float64{d[0] + a, d[1] + b, d[2] + c})
				if v[0]*v[0]+v[1]*v[1]+v[2]*v[2] < least*least {
					return false
				}
			}
		}
	}
	return true
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

// reciprocalBasis has a*, b*, c* as columns in the frame of Cell.Orthogonal.
func reciprocalBasis(c crystal.Cell) [3][3]float64 {
	m := c.Orthogonal()
	var out [3][3]float64
	for j := range 3 {
		p, q := (j+1)%3, (j+2)%3
		u := [3]float64{m[0][p], m[1][p], m[2][p]}
		v := [3]float64{m[0][q], m[1][q], m[2][q]}
		w := [3]float64{u[1]*v[2] - u[2]*v[1], u[2]*v[0] - u[0]*v[2], u[0]*v[1] - u[1]*v[0]}
		volume := m[0][j]*w[0] + m[1][j]*w[1] + m[2][j]*w[2]
		for i := range 3 {
			out[i][j] = w[i] / volume
		}
	}
	return out
}

// knownElements returns an error for an element without a scattering factor.
func knownElements(o *Structure) error {
	check := func(e string) error {
		if !slices.Contains(electron.Elements(), e) {
			return fmt.Errorf("simulate: no scattering factor for element %q; there are %v", e, electron.Elements())
		}
		return nil
	}
	for _, k := range o.Atoms {
		if err := check(k.Element); err != nil {
			return err
		}
	}
	for _, a := range o.Given {
		if err := check(a.Element); err != nil {
			return err
		}
	}
	return nil
}
