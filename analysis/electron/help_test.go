package electron

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/crystal"
)

// invented is a structure of random carbon, nitrogen and oxygen atoms.
func invented(t testing.TB, symbol string, cell crystal.Cell, atoms int) *Structure {
	t.Helper()
	group, err := crystal.Lookup(symbol)
	if err != nil {
		t.Fatal(err)
	}
	r := rand.New(rand.NewPCG(7, uint64(atoms)))
	st := &Structure{Cell: cell, Group: group, B: 1}
	for i := range atoms {
		st.Atoms = append(st.Atoms, Atom{Element: []string{"C", "N", "O"}[i%3], X: r.Float64(), Y: r.Float64(), Z: r.Float64(), B: 1})
	}
	return st
}

func small(t testing.TB, symbol string) *Structure {
	c := crystal.Cell{A: 6, B: 7, C: 8.5, Alpha: 90, Beta: 90, Gamma: 90}
	if symbol == "P -1" {
		c.Alpha, c.Beta, c.Gamma = 83, 98, 105
	}
	return invented(t, symbol, c, 6)
}

// reciprocal has a*, b*, c* as columns: the inverse of the transposed basis.
func reciprocal(c crystal.Cell) [3][3]float64 {
	m := c.Orthogonal()
	var out [3][3]float64
	for j := range 3 {
		p, q := (j+1)%3, (j+2)%3
		u, v := [3]float64{m[0][p], m[1][p], m[2][p]}, [3]float64{m[0][q], m[1][q], m[2][q]}
		w := [3]float64{u[1]*v[2] - u[2]*v[1], u[2]*v[0] - u[0]*v[2], u[0]*v[1] - u[1]*v[0]}
		for i := range w {
			out[i][j] = w[i] / c.Volume()
		}
	}
	return out
}

// tilted is some orientation without a low zone axis near the beam.
func tilted() [3][3]float64 {
	a, b := math.Pi*0.137, math.Pi*0.291
	ca, sa, cb, sb := math.Cos(a), math.Sin(a), math.Cos(b), math.Sin(b)
	return [3][3]float64{{ca, -sa, 0}, {sa * cb, ca * cb, -sb}, {sa * sb, ca * sb, cb}}
}

func product(a, b [3][3]float64) [3][3]float64 {
	var out [3][3]float64
	for i := range 3 {
		for j := range 3 {
			for k := range 3 {
				out[i][j] += a[i][k] * b[k][j]
			}
		}
	}
	return out
}

func rotate(t testing.TB, st *Structure, sw *Sweep, set *BeamSettings) *Rotated {
	t.Helper()
	r, err := Rotate(context.Background(), st, sw, set)
	if err != nil {
		t.Fatal(err)
	}
	return r
}
