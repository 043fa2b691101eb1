package analysis

import (
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/simulate"
)

// A group merges reflections of unequal spacing in a cell that has not its symmetry.
func TestCellThatContradictsTheGroup(t *testing.T) {
	series := seriesOf(t, simulate.Sound(1))
	for _, c := range []struct{ group, want string }{
		{"P 4 2 2", "which asks for a = b"}, {"P 2 3", "which asks for a = b and b = c"}, {"P 21 21 21", ""}, {"P 1 1 21", ""},
	} {
		g, err := crystal.Lookup(c.group)
		if err != nil {
			t.Fatal(err)
		}
		series.Group = g
		_, err = New(series, nil)
		if (err == nil) != (c.want == "") || err != nil && !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", c.group, err, c.want)
		}
	}
	series.Cell.A = 1.015 * series.Cell.B
	series.Group, _ = crystal.Lookup("P 4")
	if _, err := New(series, nil); err != nil {
		t.Errorf("within the tolerance: %v", err)
	}
	series.CellTolerance = 0.01
	if _, err := New(series, nil); err == nil {
		t.Error("a cell beyond the tolerance of the series was taken")
	}
}
