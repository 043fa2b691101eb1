package resample

import (
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Benjamini & Hochberg 1995, 15 p-values; adjusted values of R p.adjust.
var bh15 = []float64{.0001, .0004, .0019, .0095, .0201, .0278, .0298, .0344, .0459, .3240, .4262, .5719, .6528, .7590, 1}

func TestMultiple(t *testing.T) {
	for _, c := range []struct {
		name     string
		f        func([]float64) ([]float64, error)
		want     []float64 // as many as the source lists
		rejected int
		tol      float64
	}{
		{"Bonferroni", Bonferroni, []float64{.0015, .006, .0285}, 3, 1e-12},
		{"Holm", Holm, []float64{.0015, .0056, .0247, .114, .2211, .278, .278, .278, .3213, 1, 1, 1, 1, 1, 1}, 3, 1e-12},
		{"Hochberg", Hochberg, []float64{.0015, .0056, .0247, .114, .2211, .2682, .2682, .2752, .3213}, 3, 1e-12},
		{"Benjamini-Hochberg", BenjaminiHochberg, []float64{.0015, .003, .0095, .035625, .0603, .0638571429, .0638571429, .0645, .0765, .486, .5811818182, .714875, .7532307692, .8132142857, 1}, 4, 1e-10},
		{"Benjamini-Yekutieli", BenjaminiYekutieli, []float64{.00497734349, .00995468698, .0315231754, .118211908}, 3, 1e-9},
	} {
		before := slices.Clone(bh15)
		got := must[[]float64](t)(c.f(bh15))
		if !slices.Equal(before, bh15) {
			t.Errorf("%s changed its input", c.name)
		}
		n := 0
		for _, p := range got {
			if p <= 0.05 {
				n++
			}
		}
		if n != c.rejected {
			t.Errorf("%s: %d rejected, want %d", c.name, n, c.rejected)
		}
		floatcmp.CheckSlice(t, c.name, got[:len(c.want)], c.want, c.tol, 0)
		// Shuffled in, shuffled out.
		perm := NewSeed(1).Stream(0).Perm(len(bh15))
		mixed := make([]float64, len(bh15))
		for i, j := range perm {
			mixed[i] = bh15[j]
		}
		back := must[[]float64](t)(c.f(mixed))
		for i, j := range perm {
			floatcmp.Check(t, c.name+" shuffled", back[i], got[j], 1e-15, 0)
		}
		if empty := must[[]float64](t)(c.f(nil)); len(empty) != 0 {
			t.Errorf("%s of nothing: %v", c.name, empty)
		}
		floatcmp.CheckSlice(t, c.name+" of one p-value", must[[]float64](t)(c.f([]float64{.03})), []float64{.03}, 0, 0)
	}
}
