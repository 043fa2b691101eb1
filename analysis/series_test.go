package analysis

import (
	"strings"
	"testing"

	"thinward/analysis/simulate"
)

// Positions that stand under a crystal each are no contrast, and the error says where they
// belong.
func TestNoContrastSaysWhereThePositionsBelong(t *testing.T) {
	series := seriesOf(t, simulate.Sound(1))
	one := series.Crystals[0]
	series.Crystals = nil
	for _, p := range one.Positions {
		series.Crystals = append(series.Crystals, Specimen{Name: "C" + p.Name, Positions: []Position{p}})
	}
	if _, err := New(series, nil); err == nil || !strings.Contains(err.Error(), "put the positions of one crystal under one [[crystal]]") {
		t.Errorf("error %v", err)
	}
}
