package evidence

import (
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Counted by hand: of the 2^3 ways only the measured one and its mirror reach the
// sum of three equal effects, so p = 2/8; with one of them of the other sign the
// pooled value is a third, which all 8 ways reach; of 0.1, 0.02 and -0.02 only the two
// ways with both small ones against the large one fall short.
func TestSwap(t *testing.T) {
	for _, c := range []struct {
		name        string
		m           []float64
		p, smallest float64
	}{
		{"three alike", []float64{0.1, 0.1, 0.1}, 0.25, 0.25},
		{"one against two", []float64{0.1, 0.1, -0.1}, 1, 0.25},
		{"two that cancel", []float64{0.1, 0.02, -0.02}, 0.75, 0.25},
		{"one crystal", []float64{0.1}, 1, 1},
		{"five alike", []float64{0.1, 0.11, 0.09, 0.1, 0.12}, 2.0 / 32, 2.0 / 32},
	} {
		t.Run(c.name, func(t *testing.T) {
			back, se := make([]float64, len(c.m)), make([]float64, len(c.m))
			for i, m := range c.m {
				back[i], se[i] = -m/(1-m), 0.02
			}
			w, err := Swap(c.m, back, se)
			if err != nil {
				t.Fatal(err)
			}
			floatcmp.Check(t, "p", w.P, c.p, 1e-12, 0)
			floatcmp.Check(t, "smallest p", w.Smallest, c.smallest, 1e-12, 0)
			if w.Ways != 1<<len(c.m) {
				t.Errorf("%d ways", w.Ways)
			}
		})
	}
}

func TestSwapRefuses(t *testing.T) {
	for name, c := range map[string][3][]float64{
		"nothing":         {},
		"unequal lengths": {{0.1}, {0.1, 0.2}, {0.1}},
		"no error":        {{0.1}, {-0.1}, {0}},
	} {
		if _, err := Swap(c[0], c[1], c[2]); err == nil {
			t.Errorf("%s passed", name)
		}
	}
}
