package electron

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/internal/floatcmp"
)

// randomHermitian has coupling of the given scale and a diagonal ten times larger.
func randomHermitian(seed uint64, n int, scale float64) []complex128 {
	r := rand.New(rand.NewPCG(seed, 1))
	a := make([]complex128, n*n)
	for i := range n {
		for j := range i {
			a[i*n+j] = complex(scale*r.NormFloat64(), scale*r.NormFloat64())
			a[j*n+i] = cmplx.Conj(a[i*n+j])
		}
		a[i*n+i] = complex(10*scale*r.NormFloat64(), 0)
	}
	return a
}

// bySymmetric is the oracle: the Hermitian matrix A + iB as the real symmetric [A -B; B A] of
// twice the size, by the eigenvectors of gonum.
func bySymmetric(t *testing.T, a []complex128, n int, tau float64) []complex128 {
	t.Helper()
	m := mat.NewSymDense(2*n, nil)
	for i := range n {
		for j := range n {
			x := a[i*n+j]
			if j <= i {
				m.SetSym(i, j, real(x))
				m.SetSym(n+i, n+j, real(x))
			}
			m.SetSym(n+i, j, imag(x))
		}
	}
	var e mat.EigenSym
	if !e.Factorize(m, true) {
		t.Fatal("no eigenvectors")
	}
	var v mat.Dense
	e.VectorsTo(&v)
	out := make([]complex128, n)
	for k, value := range e.Values(nil) {
		// The start vector is real, so its overlap with eigenvector k is v(0,k), and exp(i tau M)
		// acts as cos + i sin, i being the map (x, y) to (-y, x).
		s, c := math.Sincos(tau * value)
		for i := range out {
			x := complex(v.At(i, k), v.At(n+i, k))
			out[i] += complex(c*v.At(0, k), 0)*x + complex(0, s*v.At(0, k))*x
		}
	}
	return out
}

func TestPropagatorAgainstRealSymmetricForm(t *testing.T) {
	for _, n := range []int{1, 2, 3, 4, 17, 60} {
		a := randomHermitian(uint64(n), n, 0.3)
		p, err := diagonalise(append([]complex128(nil), a...), n)
		if err != nil {
			t.Fatal(err)
		}
		got := make([]complex128, n)
		for _, tau := range []float64{0, 0.1, 3, 40} {
			p.wave(got, tau)
			want := bySymmetric(t, a, n, tau)
			sum := 0.0
			for i := range got {
				floatcmp.Check(t, fmt.Sprintf("n %d tau %g beam %d re", n, tau, i), real(got[i]), real(want[i]), 1e-11, 0)
				floatcmp.Check(t, fmt.Sprintf("n %d tau %g beam %d im", n, tau, i), imag(got[i]), imag(want[i]), 1e-11, 0)
				sum += real(got[i])*real(got[i]) + imag(got[i])*imag(got[i])
			}
			floatcmp.Check(t, "norm", sum, 1, 1e-12, 0)
		}
	}
}

func TestPropagatorOfUncoupledBeams(t *testing.T) {
	n := 5
	a := make([]complex128, n*n)
	for i := range n {
		a[i*n+i] = complex(float64(i)+0.5, 0)
	}
	a[3*n+1], a[1*n+3] = 2i, -2i // coupled to each other, not to the incident beam
	p, err := diagonalise(a, n)
	if err != nil {
		t.Fatal(err)
	}
	got := make([]complex128, n)
	p.wave(got, 2)
	floatcmp.Check(t, "re", real(got[0]), math.Cos(1), 1e-14, 0)
	floatcmp.Check(t, "im", imag(got[0]), math.Sin(1), 1e-14, 0)
	for _, x := range got[1:] {
		floatcmp.Check(t, "others", cmplx.Abs(x), 0, 1e-14, 0)
	}
}

func BenchmarkDiagonalise(b *testing.B) {
	for _, n := range []int{50, 100, 200} {
		a := randomHermitian(1, n, 0.3)
		b.Run(fmt.Sprintf("beams=%d", n), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := diagonalise(append([]complex128(nil), a...), n); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
