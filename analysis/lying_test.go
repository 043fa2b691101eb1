package analysis

import (
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

// Turns of the point group keep lengths, are as many as its rotations, and take an axis to
// one of no distance. In 222 the lines (x, y, z) and (-x, y, z) are images of each
// other, in point group 1 they are not.
func TestAxesApart(t *testing.T) {
	for _, c := range []struct {
		symbol string
		cell   crystal.Cell
	}{
		{"P 21 21 21", crystal.Cell{A: 9, B: 11, C: 13, Alpha: 90, Beta: 90, Gamma: 90}},
		{"P 1 21/n 1", crystal.Cell{A: 8, B: 11, C: 13, Alpha: 90, Beta: 97, Gamma: 90}},
		{"P 31 2 1", crystal.Cell{A: 9, B: 9, C: 13, Alpha: 90, Beta: 90, Gamma: 120}},
		{"P 1", crystal.Cell{A: 9, B: 10, C: 12, Alpha: 82, Beta: 96, Gamma: 103}},
	} {
		g, err := crystal.Lookup(c.symbol)
		if err != nil {
			t.Fatal(err)
		}
		turns := cartesianTurns(g, c.cell)
		if len(turns) != len(g.Operators()) {
			t.Errorf("%s: %d turns", c.symbol, len(turns))
		}
		d := [3]float64{0.6, 0.48, 0.64}
		for _, m := range turns {
			var image [3]float64
			length := 0.0
			for i := range 3 {
				for j := range 3 {
					image[i] += m[i][j] * d[j]
				}
				length += image[i] * image[i]
			}
			floatcmp.Check(t, c.symbol+": length", length, 1, 1e-12, 0)
			floatcmp.Check(t, c.symbol+": image", axesApart(d, image, turns), 0, 1e-5, 0)
		}
	}
	p1 := [][3][3]float64{{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}}
	floatcmp.Check(t, "point group 1", axesApart([3]float64{0.6, 0.8, 0}, [3]float64{-0.6, 0.8, 0}, p1), math.Acos(0.28)*180/math.Pi, 1e-9, 0)
	floatcmp.Check(t, "opposite", axesApart([3]float64{0, 0, 1}, [3]float64{0, 0, -1}, p1), 0, 1e-5, 0)
}
