package scaling

import "math"

// splineAxis is a uniform cubic B-spline axis: cells intervals of width step
// from lo, cells+3 functions of which four differ from 0 in each interval.
type splineAxis struct {
	lo, step float64
	cells    int
}

// newSplineAxis spans [lo, hi] with intervals as near to knot as fits.
func newSplineAxis(lo, hi, knot float64) splineAxis {
	cells := int(math.Round((hi - lo) / knot))
	cells = max(1, min(cells, 1000))
	return splineAxis{lo: lo, step: (hi - lo) / float64(cells), cells: cells}
}

func (a splineAxis) functions() int { return a.cells + 3 }

// locate returns the interval of x and the place within it, 0 to 1; x beyond the
// ends is taken to the nearer one.
func (a splineAxis) locate(x float64) (cell int, u float64) {
	t := (x - a.lo) / a.step
	if !(t > 0) {
		return 0, 0
	}
	if t >= float64(a.cells) {
		return a.cells - 1, 1
	}
	cell = int(t)
	return cell, t - float64(cell)
}

// cubicBasis returns the four functions at u in [0, 1] of an interval; they sum
// to 1 (de Boor 1978, ch. X, uniform knots).
func cubicBasis(u float64) (b0, b1, b2, b3 float64) {
	const sixth = 1.0 / 6
	v := 1 - u
	u2, v2 := u*u, v*v
	b0 = v2 * v * sixth
	b3 = u2 * u * sixth
	b1 = (4 - 6*u2 + 3*u2*u) * sixth
	b2 = (4 - 6*v2 + 3*v2*v) * sixth
	return b0, b1, b2, b3
}
