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
