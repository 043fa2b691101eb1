package pool

import (
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// z_.975 + z_.8 = 1.959963985 + 0.841621234 (R qnorm).
func TestVisible(t *testing.T) {
	floatcmp.Check(t, "smallest m", Visible(0.01, 0, 0), 0.02801585219, 1e-10, 0)
}

func TestDesign(t *testing.T) {
	d := Design{SE: 0.02, Pairs: 1000, Multiplicity: 2, NoiseShare: 0.5}
	floatcmp.Check(t, "as measured", d.SEFor(1, 1000, 2), 0.02, 1e-15, 0)
	floatcmp.Check(t, "four crystals halve it", d.SEFor(4, 1000, 2), 0.01, 1e-15, 0)
	floatcmp.Check(t, "four times the pairs halve it", d.SEFor(1, 4000, 2), 0.01, 1e-15, 0)
	floatcmp.Check(t, "endless counting leaves the deviations", d.SEFor(1, 1000, 1e12), 0.0141421356, 1e-9, 0)
	d.Tau = 0.03
	floatcmp.Check(t, "endless pairs leave the spread", d.SEFor(9, 1e15, 2), 0.01, 1e-9, 0)
	d.Tau = 0
	n, err := d.Crystals(0.02, 0, 0)
	if err != nil || n != 8 { // (2.8016)^2 = 7.85
		t.Errorf("crystals: %d, %v", n, err)
	}
	if _, err := d.Crystals(0, 0, 0); err == nil {
		t.Error("m = 0 needs infinitely many crystals and must be refused")
	}
}
