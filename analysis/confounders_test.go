package analysis

import (
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// A slab is t/|cos| thick along the beam, which repeats every half turn.
func TestTiltOf(t *testing.T) {
	for _, c := range []struct{ phi, zero, want float64 }{
		{0, 0, 0}, {-55, 0, 55}, {40, -10, 50}, {305, 0, 55}, {180, 0, 0}, {125, 0, 55}, {-125, 0, 55}, {90, 0, 90}, {10, 180, 10},
	} {
		floatcmp.Check(t, "tilt", tiltOf(c.phi, c.zero), c.want, 1e-12, 0)
	}
}

func TestTimesOfDoesNotMixDoseWithOrder(t *testing.T) {
	position := func(dose float64, order int) Position { return Position{DosePerA2: dose, Order: order} }
	for _, c := range []struct {
		name string
		in   []Position
		want []float64
	}{
		{"dose", []Position{position(3.6, 1), position(1.2, 2)}, []float64{3.6, 1.2}},
		{"one dose missing", []Position{position(3.6, 1), position(0, 2)}, []float64{1, 2}},
		{"order alone", []Position{position(0, 2), position(0, 1)}, []float64{2, 1}},
		{"neither of all", []Position{position(3.6, 0), position(0, 2)}, nil},
	} {
		if got := timesOf(&Specimen{Positions: c.in}, []int{0, 1}); !slices.Equal(got, c.want) {
			t.Errorf("%s: %v, want %v", c.name, got, c.want)
		}
	}
}
