package difference

import (
	"testing"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

// Identity: where all positions hold the same reflections, strengths in another crystal and in a
// third position have mean 1 in every shell, whatever the falloff and the factors
// epsilon, and a factor on the other position changes none of them.
func TestStrengthsHaveMeanOneInEveryShell(t *testing.T) {
	w := newTruth(t, 0.045)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 1e6})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 1e6})
	p := mustPair(t, thin, thick, w.cat, &Settings{Matching: MatchNever})
	if p.Shells < 4 {
		t.Fatalf("%d shells", p.Shells)
	}
	m := intensity.Merge(w.cat.Len(), w.position(invention{seed: 3, crystal: 2, gain: 1e6}))
	third, err := p.Third(m)
	if err != nil {
		t.Fatal(err)
	}
	crystals, err := p.Crystals([]OtherCrystal{{"L2", []*intensity.Merged{m}}})
	if err != nil {
		t.Fatal(err)
	}
	for u := range m.J {
		m.J[u], m.Var[u] = 7*m.J[u], 49*m.Var[u]
	}
	scaled, err := p.Crystals([]OtherCrystal{{"L2", []*intensity.Merged{m}}})
	if err != nil {
		t.Fatal(err)
	}
	for _, s := range []*Strengths{third, crystals, scaled} {
		sum, n := make([]float64, p.Shells), make([]float64, p.Shells)
		special := 0
		for i, k := range p.Shell {
			sum[k] += s.Z[i]
			n[k]++
			if p.Epsilon[i] > 1 {
				special++
			}
		}
		if special < 5 {
			t.Errorf("%d reflections of epsilon above 1", special)
		}
		for k := range sum {
			floatcmp.Check(t, s.Axis.String(), sum[k]/n[k], 1, 1e-9, 0)
		}
	}
	floatcmp.CheckSlice(t, "another factor", scaled.Z, crystals.Z, 0, 1e-12)
}
