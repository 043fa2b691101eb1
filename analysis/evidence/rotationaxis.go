package evidence

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

// Axis is the direction about which a crystal was turned, found from the angles
// at which its reflections crossed the sphere.
type Axis struct {
	Direction [3]float64 // unit vector in the frame of the scattering vectors
	// ResidualDeg is the rms angle by which crossings miss the plane across the
	// beam at their angle.
	ResidualDeg float64
	// Beam and Beam90 are unit vectors along the beam in the crystal at 0 and at 90
	// degrees. Their common sign follows from the curvature of the sphere and is
	// known when Sense is true: when the mean of (u cos phi + w sin phi) . x/|x| is
	// below zero by five of its standard errors.
	Beam, Beam90 [3]float64
	Sense        bool
}

// RotationAxis finds the axis of a rotation series without an orientation
// matrix. With u, w the beam direction in the crystal at 0 and at 90 degrees, a
// reflection with scattering vector x (Cartesian, crystal frame) that crosses at
// phi has
//
//	(u cos phi + w sin phi) . x = -lambda |x|^2/2,
//
// which for electrons is all but 0: its Friedel mates average the rest away. u and w
// are the least eigenvector of the normal matrix of unit vectors x, and the axis
// is u cross w. Errors: fewer than 50 crossings, unequal lengths, u and w not of
// one length and square to each other within 0.1 (angles that are not those of
// one rotation, or too narrow a range).
func RotationAxis(x [][3]float64, phiDeg []float64) (*Axis, error) {
	if len(x) != len(phiDeg) {
		return nil, fmt.Errorf("evidence: RotationAxis: %d vectors, %d angles", len(x), len(phiDeg))
	}
	if len(x) < 50 {
		return nil, fmt.Errorf("%d crossings are too few to find the rotation axis", len(x))
	}
	normal := mat.NewSymDense(6, nil)
	for i, v := range x {
		row := crossingRow(v, phiDeg[i])
		for a := range 6 {
			for b := a; b < 6; b++ {
				normal.SetSym(a, b, normal.At(a, b)+float64(row[a]*row[b]))
			}
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(normal, true) {
		return nil, fmt.Errorf("the rotation axis cannot be found: no eigenvectors")
	}
	var vectors mat.Dense
	eig.VectorsTo(&vectors)
	var u, w [3]float64
	for k := range 3 {
		u[k], w[k] = vectors.At(k, 0), vectors.At(k+3, 0)
	}
	nu, nw := math.Sqrt(dot(u, u)), math.Sqrt(dot(w, w))
	if !(nu > 0 && nw > 0) || math.Abs(math.Log(nu/nw)) > 0.1 || math.Abs(dot(u, w))/(nu*nw) > 0.1 {
		return nil, fmt.Errorf("the angles are not those of one rotation of this crystal, or span too little")
	}
	d := [3]float64{u[1]*w[2] - u[2]*w[1], u[2]*w[0] - u[0]*w[2], u[0]*w[1] - u[1]*w[0]}
	n := math.Sqrt(dot(d, d))
	out := &Axis{Direction: [3]float64{d[0] / n, d[1] / n, d[2] / n}}
	out.orient(u, w, x, phiDeg)
	out.ResidualDeg = math.Asin(math.Min(1, math.Sqrt(eig.Values(nil)[0]/float64(len(x)))/math.Sqrt(nu*nw))) * 180 / math.Pi
	return out, nil
}

// orient sets the directions of the beam.
func (a *Axis) orient(u, w [3]float64, x [][3]float64, phiDeg []float64) {
	nu, nw := math.Sqrt(dot(u, u)), math.Sqrt(dot(w, w))
	sum, square := 0.0, 0.0
	for i, v := range x {
		s, c := math.Sincos(phiDeg[i] * math.Pi / 180)
		r := (float64(c*dot(u, v)) + float64(s*dot(w, v))) / math.Sqrt(dot(v, v))
		sum += r
		square += r * r
	}
	n := float64(len(x))
	sign := 1.0
	if sum > 0 {
		sign = -1
	}
	a.Sense = math.Abs(sum) > 5*math.Sqrt(math.Max(square-sum*sum/n, 0))
	for k := range 3 {
		a.Beam[k], a.Beam90[k] = sign*u[k]/nu, sign*w[k]/nw
	}
}

func crossingRow(v [3]float64, phiDeg float64) [6]float64 {
	s, c := math.Sincos(phiDeg * math.Pi / 180)
	n := math.Sqrt(dot(v, v))
	var row [6]float64
	for k := range 3 {
		row[k], row[k+3] = c*v[k]/n, s*v[k]/n
	}
	return row
}

func dot(a, b [3]float64) float64 {
	return float64(a[0]*b[0]) + float64(a[1]*b[1]) + float64(a[2]*b[2])
}

// AngleDeg is the angle between the axis and a scattering vector, 0 to 90.
func (a *Axis) AngleDeg(x [3]float64) float64 {
	c := math.Abs(dot(a.Direction, x)) / math.Sqrt(dot(x, x))
	return math.Acos(math.Min(1, c)) * 180 / math.Pi
}
