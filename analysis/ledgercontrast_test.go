package analysis

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// The leading model's figure beside that of one slope is of the same crystal and axis.
func TestMovedByAxisReadsTheSpecificationTable(t *testing.T) {
	row := func(crystal, choice, level string, m float64, leading bool) Specification {
		return Specification{Crystal: crystal, Choice: choice, Level: level, M: Interval{Value: m}, Leading: leading}
	}
	s := &Study{spec: []Specification{
		row("L1", "leading", "crystals", 0.1, true), row("L1", choiceAxis, "third", 0.098, false), row("L1", choiceScale, "third", 5, false),
		row("L2", "leading", "crystals", 0.2, true), row("L2", choiceAxis, "third", 0.15, false),
	}}
	floatcmp.Check(t, "L1", s.movedByAxis("L1", "third"), -0.002, 1e-12, 0)
	floatcmp.Check(t, "L2", s.movedByAxis("L2", "third"), -0.05, 1e-12, 0)
	floatcmp.Check(t, "no such axis", s.movedByAxis("L1", "inverse-variance"), math.NaN(), 0, 0)
	floatcmp.Check(t, "no table", new(Study).movedByAxis("L1", "third"), math.NaN(), 0, 0)
}
