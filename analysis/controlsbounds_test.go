package analysis

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/size"
)

// Twelve readings a crystal and two a replicate share five per cent.
func TestControlsShareOneErrorRate(t *testing.T) {
	s := &Study{}
	s.Series.Crystals = make([]Specimen, 3)
	list := []*Compared{{Contrast: Contrast{Crystal: 0}}, {Contrast: Contrast{Crystal: 1}}, {Contrast: Contrast{Crystal: 2}}}
	floatcmp.Check(t, "three crystals", s.falseAlarm(list), 0.05/36, 1e-15, 0)
	floatcmp.Check(t, "one crystal", s.falseAlarm(list[:1]), 0.05/12, 1e-15, 0)
	s.Series.Crystals[1].Positions = []Position{{Name: "thin"}, {Name: "again", ReplicateOf: "thin"}}
	r := &reading{study: &Study{settings: Settings{Flips: 200}}, alarm: s.falseAlarm(list)}
	floatcmp.Check(t, "with a replicate", r.alarm, 0.05/38, 1e-15, 0)
	// A p that fails must be one that can come out.
	if n := r.flipsForControls(); !(1/float64(n+1) < r.alarm) {
		t.Errorf("the least p of %d flips is not below %g", n, r.alarm)
	}
}

// Without noise the swapped fit differs from -m/(1-m) by no more than the order m q that
// the control allows, and by a good part of it: without that allowance a sound fit would fail.
func TestSwappedOrder(t *testing.T) {
	const n = 4000
	// As many functions as numbers, so that no weight is needed where there is no noise.
	fit := func(thin, thick []float64) *size.Fit {
		f, err := size.Moments(&size.Input{Z: thin, Thin: thin, Thick: thick, VarThin: make([]float64, n), Shell: make([]int32, n), Shells: 1}, nil, size.MQ, &size.Settings{Knots: []float64{1, 6}})
		if err != nil || !f.Estimable {
			t.Fatal(err, f)
		}
		return f
	}
	thin := make([]float64, n)
	for i := range thin {
		thin[i] = -math.Log((float64(i) + 0.5) / n)
	}
	for _, c := range []struct{ m, q float64 }{{0.1, 0.01}, {0.1, 0}, {0, 0.01}, {0.05, 0.02}} {
		thick, mean := make([]float64, n), 0.0
		for i, j := range thin {
			thick[i] = j * math.Exp(-c.q*j)
			mean += thick[i] / n
		}
		for i := range thick {
			thick[i] = (1-c.m)*thick[i] + c.m*mean
		}
		forth, back := fit(thin, thick), fit(thick, thin)
		floatcmp.Check(t, "m", forth.M.Value, c.m, 2e-4, 0)
		off, most := math.Abs(back.M.Value+c.m/(1-c.m)), swappedOrder(c.m, c.q)
		if off > most+1e-9 || c.m*c.q > 0 && off < most/4 {
			t.Errorf("m %g, q %g: swapped m is off by %.5f, allowed %.5f", c.m, c.q, off, most)
		}
	}
}
