package analysis

import (
	"strings"
	"testing"
)

// The position with the fewest negatives against Wilson's law is named, not the first; a
// list that has most of them, or of which hardly any are expected, is not.
func TestFewNegativesNamesTheWorstPosition(t *testing.T) {
	row := func(position string, seen int, expected float64) IntakeResult {
		return IntakeResult{Crystal: "L1", Position: position, Negative: []int{seen}, NegativeExp: []float64{expected}}
	}
	table := []IntakeResult{row("thin", 180, 200), row("mid", 80, 200), row("thick", 10, 201), row("edge", 0, 15), {Crystal: "L1", Position: "none"}}
	text := fewNegatives(table)
	for _, want := range []string{"Fewest below zero in L1/thick: 10, and Wilson's law expects 201", "kinematic crystal", "exchange or an offset"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q does not say %q", text, want)
		}
	}
	if text = fewNegatives(table[:1]); text != "" {
		t.Errorf("enough negatives: %s", text)
	}
}
