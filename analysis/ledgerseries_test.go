package analysis

import (
	"math"
	"testing"
)

// TestAlwaysFilled: an element counts by its weakest position, and only where enough
// of its reflections were recorded. The numbers are made up, the answers follow by hand.
func TestAlwaysFilled(t *testing.T) {
	row := func(element, position string, n int, ratio, su float64) Forbidden {
		return Forbidden{Crystal: "L1", Position: position, Element: element, N: n, Ratio: ratio, SU: su}
	}
	for _, c := range []struct {
		name    string
		list    []Forbidden
		least   float64
		element string
	}{
		{"nothing recorded", nil, math.NaN(), ""},
		{"too few", []Forbidden{row("C", "thin", 4, 1, 0.1)}, math.NaN(), ""},
		{"filled in one position only", []Forbidden{row("C", "thin", 9, 0.25, 0.125), row("C", "thick", 9, 1, 0.125)}, 0, "C"},
		{"filled in both", []Forbidden{row("C", "thin", 9, 1.25, 0.125), row("C", "thick", 9, 1, 0.125)}, 0.75, "C"},
		{"the worse of two elements, never their sum", []Forbidden{row("all", "thin", 18, 2, 0), row("C", "thin", 9, 0.25, 0), row("2_1 along a", "thin", 9, 0.75, 0)}, 0.75, "2_1 along a"},
		{"not a number", []Forbidden{row("C", "thin", 9, math.NaN(), 0.1), row("C", "thick", 9, 0.5, 0.125)}, 0.25, "C"},
	} {
		least, element := alwaysFilled(c.list)
		if element != c.element || math.IsNaN(least) != math.IsNaN(c.least) || !math.IsNaN(least) && least != c.least {
			t.Errorf("%s: %g by %q, want %g by %q", c.name, least, element, c.least, c.element)
		}
	}
}
