package electron

import (
	"fmt"
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/lapack"
	lapackgonum "gonum.org/v1/gonum/lapack/gonum"
)

// propagator holds a Hermitian matrix M = Q T Q^H with T real, symmetric and
// tridiagonal, T = Z diag(values) Z^T, and the first column of Q the first unit vector,
// so that exp(i tau M) of that vector costs two products of a matrix with a vector.
// This does a quarter of the work of the real symmetric form of twice the size, which the
// tests compare it with.
type propagator struct {
	n       int
	values  []float64
	z       []float64      // eigenvectors of T, row-major
	mirrors [][]complex128 // unit vectors of the Householder reflections, the k-th from row k+1 on
	phase   []complex128
	work    []complex128
}

// diagonalise reduces the n by n Hermitian matrix whose lower triangle stands in a
// (row-major), which is overwritten: Householder reflections to tridiagonal form (Golub & Van
// Loan 1996, Matrix Computations, 8.3.1, for complex matrices), then implicit QL.
func diagonalise(a []complex128, n int) (*propagator, error) {
	p := &propagator{n: n, mirrors: make([][]complex128, max(0, n-2)), phase: make([]complex128, n), work: make([]complex128, n)}
	q := make([]complex128, n)
	for k := range p.mirrors {
		p.mirrors[k] = reflectColumn(a, n, k, q)
	}
	d, e := make([]float64, n), make([]float64, max(0, n-1))
	p.phase[0] = 1
	for k := range d {
		d[k] = real(a[k*n+k])
		if k == 0 {
			continue
		}
		below := a[k*n+k-1]
		e[k-1] = cmplx.Abs(below)
		p.phase[k] = p.phase[k-1]
		if e[k-1] > 0 {
			p.phase[k] *= below / complex(e[k-1], 0)
		}
	}
	p.z = make([]float64, n*n)
	if !(lapackgonum.Implementation{}).Dsteqr(lapack.EVTridiag, n, d, e, p.z, n, make([]float64, max(1, 2*n-2))) {
		return nil, fmt.Errorf("electron: the eigenvalues of %d beams do not converge", n)
	}
	p.values = d
	return p, nil
}

// reflectColumn applies the reflection that clears column k below the
// subdiagonal from both sides and returns its unit vector, nil when nothing is to clear.
func reflectColumn(a []complex128, n, k int, q []complex128) []complex128 {
	m := n - k - 1
	v := make([]complex128, m)
	norm := 0.0
	for i := range v {
		v[i] = a[(k+1+i)*n+k]
		norm += real(v[i])*real(v[i]) + imag(v[i])*imag(v[i])
	}
	first := real(v[0])*real(v[0]) + imag(v[0])*imag(v[0])
	if norm == first {
		return nil
	}
	norm = math.Sqrt(norm)
	target := complex(-norm, 0)
	if first > 0 {
		target *= v[0] / complex(math.Sqrt(first), 0)
	}
	v[0] -= target
	length := 0.0
	for _, x := range v {
		length += real(x)*real(x) + imag(x)*imag(x)
	}
	scale := complex(1/math.Sqrt(length), 0)
	for i := range v {
		v[i] *= scale
		q[i] = 0
	}
	a[(k+1)*n+k] = target
	for i := range m {
		row := a[(k+1+i)*n+k+1 : (k+1+i)*n+k+1+i]
		sum, vi := complex128(0), v[i]
		for j, x := range row {
			sum += x * v[j]
			q[j] += cmplx.Conj(x) * vi
		}
		q[i] += sum + a[(k+1+i)*n+k+1+i]*vi
	}
	inner := 0.0
	for i := range m {
		inner += real(v[i])*real(q[i]) + imag(v[i])*imag(q[i])
	}
	for i := range m {
		q[i] = 2 * (q[i] - complex(inner, 0)*v[i])
	}
	for i := range m {
		row := a[(k+1+i)*n+k+1 : (k+1+i)*n+k+2+i]
		vi, qi := v[i], q[i]
		for j := range row {
			row[j] -= vi*cmplx.Conj(q[j]) + qi*cmplx.Conj(v[j])
		}
	}
	return v
}

// wave writes exp(i tau M) times the first unit vector into dst.
func (p *propagator) wave(dst []complex128, tau float64) {
	w := p.work
	for k := range w {
		s, c := math.Sincos(tau * p.values[k])
		w[k] = complex(c*p.z[k], s*p.z[k])
	}
	for i := range dst {
		var re, im float64
		for k, z := range p.z[i*p.n : (i+1)*p.n] {
			re += z * real(w[k])
			im += z * imag(w[k])
		}
		dst[i] = complex(re, im) * p.phase[i]
	}
	for k := len(p.mirrors) - 1; k >= 0; k-- {
		v := p.mirrors[k]
		if v == nil {
			continue
		}
		tail, sum := dst[k+1:], complex128(0)
		for i, x := range v {
			sum += cmplx.Conj(x) * tail[i]
		}
		sum *= 2
		for i, x := range v {
			tail[i] -= sum * x
		}
	}
}
