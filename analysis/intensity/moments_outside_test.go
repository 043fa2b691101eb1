package intensity

import (
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

// Closed form: intensities that are epsilon times one function of the resolution, narrow
// shells, have strength 1 throughout, so that all moments are 1; two strengths a and b
// in turn have (a^2+b^2)/2 over ((a+b)/2)^2.
func TestHalfMomentsOfKnownStrengths(t *testing.T) {
	g := lookup(t, "P m m 2")
	var hkl []crystal.HKL
	for h := range 12 {
		for k := range 12 {
			for l := range 12 {
				if h+k+l > 0 {
					hkl = append(hkl, crystal.HKL{H: h, K: k, L: l})
				}
			}
		}
	}
	cat, err := NewCatalogue(tarnCell, g, indices(hkl...))
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct{ a, b float64 }{{1, 1}, {0.5, 2}} {
		m := &Merged{J: make([]float64, cat.Len()), Var: make([]float64, cat.Len()), N: make([]int32, cat.Len())}
		seen := [2]int{}
		special := 0
		for u := range m.J {
			kind := 0
			if cat.Centric[u] {
				kind = 1
			}
			m.J[u], m.Var[u], m.N[u] = c.a*float64(cat.Epsilon[u]), 1, 1
			if seen[kind]%2 == 1 {
				m.J[u] = c.b * float64(cat.Epsilon[u])
			}
			seen[kind]++
			if cat.Epsilon[u] > 1 {
				special++
			}
		}
		if special < 100 {
			t.Fatalf("%d reflections of epsilon above 1", special)
		}
		acentric, centric := HalfMoments(m, m, cat, cat.Shells(1, m))
		mean := (c.a + c.b) / 2
		for _, x := range []*Moments{acentric, centric} {
			// An odd one out is one of a hundred.
			floatcmp.Check(t, "second", x.Second, (c.a*c.a+c.b*c.b)/2/(mean*mean), 0, 0.02*math.Abs(c.a-c.b)+1e-12)
			floatcmp.Check(t, "third", x.Third, (c.a*c.a*c.a+c.b*c.b*c.b)/2/(mean*mean*mean), 0, 0.03*math.Abs(c.a-c.b)+1e-12)
		}
	}
}
