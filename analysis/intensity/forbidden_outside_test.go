package intensity

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Closed form: every allowed reflection is 100 exp(-50 s^2) times its epsilon and
// every forbidden one a tenth of the mean of its own shell, so that the ratio is 0.1
// exactly, in all and for each screw axis, though the means fall more than tenfold from the
// first shell to the last.
func TestForbiddenOverItsOwnShell(t *testing.T) {
	g := lookup(t, "P 21 21 21")
	hkl, _, err := Possible(tarnCell, lookup(t, "P 2 2 2"), 0.06, false)
	if err != nil {
		t.Fatal(err)
	}
	cat, err := NewCatalogue(tarnCell, g, indices(hkl...))
	if err != nil {
		t.Fatal(err)
	}
	m := &Merged{J: make([]float64, cat.Len()), Var: make([]float64, cat.Len()), N: make([]int32, cat.Len())}
	for u := range m.J {
		m.N[u], m.Var[u] = 1, 1
		m.J[u] = 100 * math.Exp(-50*cat.S2[u]) * float64(cat.Epsilon[u])
	}
	sh := cat.Shells(12, m)
	sum, n := make([]float64, sh.N), make([]float64, sh.N)
	for u, s := range sh.Of {
		if s >= 0 && !cat.Absent[u] {
			sum[s] += m.J[u] / float64(cat.Epsilon[u])
			n[s]++
		}
	}
	if fall := sum[0] / n[0] / (sum[sh.N-1] / n[sh.N-1]); !(fall > 10) {
		t.Fatalf("the means fall by %.1f only: nothing is tested", fall)
	}
	for u, s := range sh.Of {
		if s >= 0 && cat.Absent[u] {
			m.J[u] = 0.1 * sum[s] / n[s]
		}
	}
	for _, f := range MeasureForbidden(m, cat, sh) {
		if f.N < 5 {
			t.Errorf("%s: %d reflections", f.Element, f.N)
		}
		floatcmp.Check(t, f.Element, f.Ratio, 0.1, 0, 1e-12)
	}
}

// There is no lattice point where a centring forbids: what is measured there stands apart
// from what a screw axis forbids, which is a tenth of the mean here, and half where the
// centring does.
func TestCentringStandsApart(t *testing.T) {
	hkl, _, err := Possible(tarnCell, lookup(t, "P 2 2 2"), 0.06, false)
	if err != nil {
		t.Fatal(err)
	}
	measured := func(symbol string) []Forbidden {
		cat, err := NewCatalogue(tarnCell, lookup(t, symbol), indices(hkl...))
		if err != nil {
			t.Fatal(err)
		}
		m := &Merged{J: make([]float64, cat.Len()), Var: make([]float64, cat.Len()), N: make([]int32, cat.Len())}
		for u, h := range cat.HKL {
			m.N[u], m.Var[u] = 1, 1
			switch {
			case (h.H+h.K)%2 != 0:
				m.J[u] = 50
			case cat.Absent[u]:
				m.J[u] = 10
			default:
				m.J[u] = 100 * float64(cat.Epsilon[u])
			}
		}
		return MeasureForbidden(m, cat, cat.Shells(4, m))
	}
	f := measured("C 2 2 21")
	if len(f) != 3 || f[0].Centring || !f[1].Centring || f[2].Centring {
		t.Fatalf("%+v", f)
	}
	if f[0].N == 0 || f[0].N != f[2].N || f[1].N < 100 {
		t.Errorf("%d in all, %d of the centring, %d of the screw", f[0].N, f[1].N, f[2].N)
	}
	floatcmp.Check(t, "all", f[0].Ratio, 0.1, 0, 1e-12)
	floatcmp.Check(t, "the centring", f[1].Ratio, 0.5, 0, 1e-12)
	if f = measured("C 2 2 2"); f[0].N != 0 || f[0].Why != OnlyCentring || f[1].N < 100 {
		t.Errorf("a centring alone: %+v", f)
	}
}
