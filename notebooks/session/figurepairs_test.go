package session

import (
	"testing"

	"thinward/analysis"
)

// Gains first, then losses, each in the order given; a pair that did not change is neither. Over
// noise alone is 3 over the root of 0.3^2 + 0.4^2.
func TestMostChangedBothWays(t *testing.T) {
	list := []*analysis.PairRow{{Z: -5}, {Z: -4}, {Z: 2}, {Z: -3}, {Z: 0}, {Z: 1.5}}
	got := bothWays(list, []int{0, 1, 3, 2, 5, 4}, 2)
	want := []int{0, 1, 2, 5}
	if len(got) != len(want) {
		t.Fatalf("got %v, want %v", got, want)
	}
	for i := range want {
		if got[i] != want[i] {
			t.Errorf("got %v, want %v", got, want)
		}
	}
	if z := overNoise(&analysis.PairRow{DI: 3, SUThin: 0.3, SUThick: 0.4, Z: 1}); number(z, 6) != "6.000000" {
		t.Errorf("over noise %g, want 6", z)
	}
}
