package simulate

import (
	"math"

	"thinward/analysis/crystal"
)

// Geometry is a crystal on the rotation axis of an electron diffraction
// experiment. The laboratory frame has the beam along +z, the rotation axis
// along x; the incident wave vector is k = (0, 0, 1/Wavelength).
type Geometry struct {
	Wavelength  float64       // angstrom
	Reciprocal  [3][3]float64 // columns a*, b*, c* in a Cartesian frame of the crystal, 1/angstrom
	Orientation [3][3]float64 // crystal frame to laboratory at rotation angle 0
}

// At returns the reciprocal lattice vector of h in the laboratory at rotation
// angle phi in degrees, in 1/angstrom.
func (g *Geometry) At(h crystal.HKL, phi float64) [3]float64 {
	v := g.still(h)
	s, c := math.Sincos(phi * math.Pi / 180)
	return [3]float64{v[0], v[1]*c - v[2]*s, v[1]*s + v[2]*c}
}

func (g *Geometry) still(h crystal.HKL) [3]float64 {
	return times(g.Orientation, times(g.Reciprocal, [3]float64{float64(h.H), float64(h.K), float64(h.L)}))
}

// Crossings returns the rotation angles in degrees, -180 to 180 and rising, at
// which h lies on the Ewald sphere: |k + g| = |k|, that is
// g_z(phi) = -|g|^2 Wavelength/2 (Ewald 1921). n is 2, or 0 for an index too near
// the axis ever to cross (and for 0 0 0).
func (g *Geometry) Crossings(h crystal.HKL) (phi [2]float64, n int) {
	v := g.still(h)
	rho := math.Hypot(v[1], v[2])
	want := -0.5 * g.Wavelength * (v[0]*v[0] + rho*rho)
	if rho == 0 || math.Abs(want) >= rho {
		return phi, 0
	}
	mid, half := math.Atan2(v[1], v[2]), math.Acos(want/rho)
	phi[0], phi[1] = wrap(mid-half), wrap(mid+half)
	if phi[0] > phi[1] {
		phi[0], phi[1] = phi[1], phi[0]
	}
	return phi, 2
}

// Lorentz returns how much longer h stays near the sphere at angle phi than a
// reflection that crosses it at full speed: |g| / |dg_z/dphi|, 1 or more, +Inf
// for one that only touches.
func (g *Geometry) Lorentz(h crystal.HKL, phi float64) float64 {
	v := g.At(h, phi)
	return math.Sqrt(v[0]*v[0]+v[1]*v[1]+v[2]*v[2]) / math.Abs(v[1])
}

func wrap(radians float64) float64 {
	d := math.Remainder(radians*180/math.Pi, 360)
	return d
}

// eulerRotation turns about z, then x, then z again by the three angles in degrees.
func eulerRotation(deg []float64) [3][3]float64 {
	z := func(a float64) [3][3]float64 {
		s, c := math.Sincos(a * math.Pi / 180)
		return [3][3]float64{{c, -s, 0}, {s, c, 0}, {0, 0, 1}}
	}
	s, c := math.Sincos(deg[1] * math.Pi / 180)
	x := [3][3]float64{{1, 0, 0}, {0, c, -s}, {0, s, c}}
	return product(z(deg[2]), product(x, z(deg[0])))
}

// quaternionRotation is the rotation of the quaternion w + xi + yj + zk, which
// need not be of unit length; four normal numbers give a uniform one.
func quaternionRotation(w, x, y, z float64) [3][3]float64 {
	n := math.Sqrt(w*w + x*x + y*y + z*z)
	w, x, y, z = w/n, x/n, y/n, z/n
	return [3][3]float64{
		{1 - 2*(y*y+z*z), 2 * (x*y - w*z), 2 * (x*z + w*y)},
		{2 * (x*y + w*z), 1 - 2*(x*x+z*z), 2 * (y*z - w*x)},
		{2 * (x*z - w*y), 2 * (y*z + w*x), 1 - 2*(x*x+y*y)},
	}
}

// smallRotation turns by the length of v, in degrees, about v.
func smallRotation(v [3]float64) [3][3]float64 {
	angle := math.Sqrt(v[0]*v[0]+v[1]*v[1]+v[2]*v[2]) * math.Pi / 180
	if angle == 0 {
		return [3][3]float64{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}
	}
	s, c := math.Sincos(angle / 2)
	f := s / (angle * 180 / math.Pi)
	return quaternionRotation(c, v[0]*f, v[1]*f, v[2]*f)
}

func times(m [3][3]float64, v [3]float64) [3]float64 {
	var out [3]float64
	for i := range out {
		out[i] = m[i][0]*v[0] + m[i][1]*v[1] + m[i][2]*v[2]
	}
	return out
}

func product(a, b [3][3]float64) [3][3]float64 {
	var out [3][3]float64
	for i := range out {
		for j := range out {
			out[i][j] = a[i][0]*b[0][j] + a[i][1]*b[1][j] + a[i][2]*b[2][j]
		}
	}
	return out
}
