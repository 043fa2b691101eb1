package electron

import (
	"fmt"
	"math"

	"thinward/analysis/crystal"
)

// beam is one diffracted wave; the first of a list is the incident one.
type beam struct {
	hkl crystal.HKL
	// offSphere is 2 K s = K^2 - |K+g|^2, exact; along is g.n, n the normal of the
	// slab on the side where the beam leaves.
	offSphere, along float64
}

// excite solves the equation of many beams (Bethe 1928; with the obliquity of the
// surface as Metherell 1975, Electron Microscopy in Materials Science 2, 397, from memory)
// in a slab: the symmetric form
//
//	M_gh = A_gh / sqrt(q_g q_h),  A_gg = 2 K s_g,  A_gh = U_(g-h),  q_g = 1 + g.n/(K.n)
//
// whose wave exp(i pi M t/(K.n)) of the incident beam has the currents through the
// surface as squared moduli; they add up to 1. normal is K.n.
func excite(f *field, beams []beam, normal float64) (*propagator, error) {
	n := len(beams)
	a := make([]complex128, n*n)
	root := make([]float64, n)
	for i, b := range beams {
		q := 1 + b.along/normal
		if !(q > 0) {
			return nil, fmt.Errorf("electron: beam %d %d %d leaves through the entrance surface; tilt less", b.hkl.H, b.hkl.K, b.hkl.L)
		}
		root[i] = math.Sqrt(q)
		for j := range i {
			h := &beams[j].hkl
			a[i*n+j] = f.at(b.hkl.H-h.H, b.hkl.K-h.K, b.hkl.L-h.L) / complex(root[i]*root[j], 0)
		}
		a[i*n+i] = complex(b.offSphere/q, 0)
	}
	return diagonalise(a, n)
}

// single returns the current of a beam of unit U in the kinematic limit.
func (b *beam) single(normal, t float64) float64 {
	q := 1 + b.along/normal
	x := math.Pi * t / normal
	a := x * sinc(x*b.offSphere/(2*q))
	return a * a / q
}
