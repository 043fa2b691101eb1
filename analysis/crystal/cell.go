package crystal

import (
	"fmt"
	"math"
)

// Cell is a unit cell: lengths in angstrom, angles in degrees. The methods
// other than Check assume a cell that passes Check and give NaN where it does
// not.
type Cell struct{ A, B, C, Alpha, Beta, Gamma float64 }

// Bounds of a length in angstrom that Check accepts.
const (
	minLength = 1
	maxLength = 10000
)

// Check reports the first thing that makes the six numbers no cell: a length
// outside 1 to 10000 angstrom, an angle outside 0 to 180 degrees, angles that
// cannot meet in a corner, NaN or infinity.
func (c Cell) Check() error {
	for i, v := range [3]float64{c.A, c.B, c.C} {
		switch name := "abc"[i]; {
		case math.IsNaN(v) || math.IsInf(v, 0):
			return fmt.Errorf("cell length %c is %g", name, v)
		case v <= 0:
			return fmt.Errorf("cell length %c = %g is not positive", name, v)
		case v < minLength:
			return fmt.Errorf("cell length %c = %g is under %d angstrom; are the lengths in nanometres?", name, v, minLength)
		case v > maxLength:
			return fmt.Errorf("cell length %c = %g is over %d angstrom; are the lengths in picometres?", name, v, maxLength)
		}
	}
	angles := [3]float64{c.Alpha, c.Beta, c.Gamma}
	for i, v := range angles {
		switch name := [3]string{"alpha", "beta", "gamma"}[i]; {
		case math.IsNaN(v) || math.IsInf(v, 0):
			return fmt.Errorf("cell angle %s is %g", name, v)
		case v <= 0 || v >= 180:
			return fmt.Errorf("cell angle %s = %g is not between 0 and 180 degrees", name, v)
		}
	}
	if c.Alpha < math.Pi && c.Beta < math.Pi && c.Gamma < math.Pi {
		return fmt.Errorf("cell angles %g, %g, %g are all under %.3g degrees; are they in radians?", c.Alpha, c.Beta, c.Gamma, math.Pi)
	}
	if sum := c.Alpha + c.Beta + c.Gamma; sum >= 360 {
		return fmt.Errorf("cell angles add to %g degrees; three edges cannot meet at 360 or more", sum)
	}
	for i, v := range angles {
		p, q := angles[(i+1)%3], angles[(i+2)%3]
		if v >= p+q {
			return fmt.Errorf("cell angle %s = %g is not less than the sum of the other two, %g",
				[3]string{"alpha", "beta", "gamma"}[i], v, p+q)
		}
	}
	return nil
}

// Metric is the metric tensor of the direct cell as a symmetric matrix in square
// angstrom: the scalar products of the edges.
func (c Cell) Metric() [3][3]float64 {
	ab := c.A * c.B * cosd(c.Gamma)
	ac := c.A * c.C * cosd(c.Beta)
	bc := c.B * c.C * cosd(c.Alpha)
	return [3][3]float64{{c.A * c.A, ab, ac}, {ab, c.B * c.B, bc}, {ac, bc, c.C * c.C}}
}

// Volume is a b c sqrt(1 - cos^2 alpha - cos^2 beta - cos^2 gamma
// + 2 cos alpha cos beta cos gamma), in cubic angstrom.
func (c Cell) Volume() float64 {
	x, y, z := cosd(c.Alpha), cosd(c.Beta), cosd(c.Gamma)
	return c.A * c.B * c.C * math.Sqrt(1-x*x-y*y-z*z+2*x*y*z)
}

// Reciprocal is the reciprocal cell without a factor 2 pi: lengths in inverse
// angstrom, angles in degrees. The reciprocal of the reciprocal is the cell.
func (c Cell) Reciprocal() Cell {
	v := c.Volume()
	sa, sb, sc := sind(c.Alpha), sind(c.Beta), sind(c.Gamma)
	ca, cb, cc := cosd(c.Alpha), cosd(c.Beta), cosd(c.Gamma)
	return Cell{
		A: c.B * c.C * sa / v, B: c.A * c.C * sb / v, C: c.A * c.B * sc / v,
		Alpha: acosd((cb*cc - ca) / (sb * sc)),
		Beta:  acosd((ca*cc - cb) / (sa * sc)),
		Gamma: acosd((ca*cb - cc) / (sa * sb)),
	}
}

// ReciprocalMetric returns m with
// 1/d^2 = m0 h^2 + m1 k^2 + m2 l^2 + m3 k l + m4 h l + m5 h k, in inverse square
// angstrom; take it once for many reflections.
func (c Cell) ReciprocalMetric() [6]float64 {
	r := c.Reciprocal()
	return [6]float64{r.A * r.A, r.B * r.B, r.C * r.C,
		2 * r.B * r.C * cosd(r.Alpha), 2 * r.A * r.C * cosd(r.Beta), 2 * r.A * r.B * cosd(r.Gamma)}
}

// InvD2 is 1/d^2 of a reflection in inverse square angstrom, 0 for 000.
func (c Cell) InvD2(h HKL) float64 { return InvD2(c.ReciprocalMetric(), h) }

// InvD2 is 1/d^2 of a reflection by the ReciprocalMetric of the cell.
func InvD2(m [6]float64, h HKL) float64 {
	a, b, c := float64(h.H), float64(h.K), float64(h.L)
	return m[0]*a*a + m[1]*b*b + m[2]*c*c + m[3]*b*c + m[4]*a*c + m[5]*a*b
}

// D is the spacing of the planes of a reflection in angstrom, +Inf for 000.
func (c Cell) D(h HKL) float64 { return 1 / math.Sqrt(c.InvD2(h)) }

// Orthogonal is the matrix M that takes fractional coordinates to Cartesian ones
// in angstrom: a along X, b in the plane of X and Y, c* along Z (the convention
// of International Tables B 3.3.1.1, (3.3.1.9)).
func (c Cell) Orthogonal() [3][3]float64 {
	sg := sind(c.Gamma)
	return [3][3]float64{
		{c.A, c.B * cosd(c.Gamma), c.C * cosd(c.Beta)},
		{0, c.B * sg, c.C * (cosd(c.Alpha) - cosd(c.Beta)*cosd(c.Gamma)) / sg},
		{0, 0, c.Volume() / (c.A * c.B * sg)},
	}
}

// cellOfMetric is the cell whose metric tensor is g.
func cellOfMetric(g [3][3]float64) Cell {
	a, b, c := math.Sqrt(g[0][0]), math.Sqrt(g[1][1]), math.Sqrt(g[2][2])
	return Cell{a, b, c, acosd(g[1][2] / (b * c)), acosd(g[0][2] / (a * c)), acosd(g[0][1] / (a * b))}
}

// cosd is exact at the multiples of 90 and 60 degrees that cells are full of, so
// that a right angle leaves no 1e-17 in the metric.
func cosd(deg float64) float64 {
	switch deg {
	case 90:
		return 0
	case 60:
		return 0.5
	case 120:
		return -0.5
	}
	return math.Cos(deg * math.Pi / 180)
}

func sind(deg float64) float64 { return math.Sin(deg * math.Pi / 180) }

func acosd(x float64) float64 {
	switch x {
	case 0:
		return 90
	case 0.5:
		return 60
	case -0.5:
		return 120
	}
	return math.Acos(math.Max(-1, math.Min(1, x))) * 180 / math.Pi
}
