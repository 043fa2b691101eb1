package analysis

import (
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/evidence"
)

// lying compares how the crystals lay in the beam: the angle between their rotation
// axes in the frame of the crystal, symmetry allowed for. Crystals turned about
// the same axis of their own meet the same orientations. One entry for each crystal
// of a contrast, against the others.
func (s *Study) lying(list []*Compared) []placed {
	axes := make([]*evidence.Axis, len(s.Series.Crystals))
	for i := range axes {
		axes[i] = s.rotationAxis(i)
	}
	turns := cartesianTurns(s.Series.Group, s.Series.Cell)
	var out []placed
	for _, x := range list {
		if x.Leading != leadCrystals {
			continue
		}
		own, name := axes[x.Contrast.Crystal], x.Result.Crystal
		nearest, other := math.NaN(), ""
		for i, a := range axes {
			if i == x.Contrast.Crystal || a == nil || own == nil {
				continue
			}
			if d := axesApart(own.Direction, a.Direction, turns); !(d >= nearest) {
				nearest, other = d, s.Series.Crystals[i].Name
			}
		}
		out = append(out, placed{name, evidence.LyingOf(nearest, other)})
	}
	return out
}

// rotationAxis finds the axis of a crystal from the first of its positions that tells
// it; nil when none does.
func (s *Study) rotationAxis(i int) *evidence.Axis {
	for j := range s.intake.Positions[i] {
		o := s.intake.Positions[i][j].Observations
		if o.Phi == nil {
			continue
		}
		axis, err := evidence.RotationAxis(s.scatteringVectors(o), o.Phi)
		if err == nil && axis.ResidualDeg <= 3 {
			return axis
		}
	}
	return nil
}

// cartesianTurns gives the rotations of the point group in the Cartesian frame of
// scatteringVectors. A reflection goes to h R, so a column of indices to the transpose of R
// times it.
func cartesianTurns(g *crystal.Group, c crystal.Cell) [][3][3]float64 {
	m := c.Reciprocal().Orthogonal()
	var out [][3][3]float64
	w := invertUpper(m)
	for _, op := range g.Operators() {
		var t [3][3]float64
		for a := range 3 {
			for b := range 3 {
				t[a][b] = float64(op.R[b][a])
			}
		}
		out = append(out, multiply(multiply(m, t), w))
	}
	return out
}

func multiply(a, b [3][3]float64) (c [3][3]float64) {
	for i := range 3 {
		for j := range 3 {
			for k := range 3 {
				c[i][j] += float64(a[i][k] * b[k][j])
			}
		}
	}
	return c
}

// invertUpper inverts an upper triangular matrix.
func invertUpper(m [3][3]float64) (w [3][3]float64) {
	for i := range 3 {
		w[i][i] = 1 / m[i][i]
	}
	w[0][1] = -m[0][1] * w[0][0] * w[1][1]
	w[1][2] = -m[1][2] * w[1][1] * w[2][2]
	w[0][2] = -(m[0][1]*w[1][2] + m[0][2]*w[2][2]) * w[0][0]
	return w
}

// axesApart is the least angle in degrees, 0 to 90, between the lines along a and
// any image of b.
func axesApart(a, b [3]float64, turns [][3][3]float64) float64 {
	most := 0.0
	for _, t := range turns {
		sum := 0.0
		for i := range 3 {
			sum += a[i] * (float64(t[i][0]*b[0]) + float64(t[i][1]*b[1]) + float64(t[i][2]*b[2]))
		}
		most = math.Max(most, math.Abs(sum))
	}
	return math.Acos(math.Min(1, most)) * 180 / math.Pi
}
