package analysis

import (
	"context"
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
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
	for _, c := range []struct{ m, q float64 }{{0.1, 0.01}, {0.1, 0}, {0, 0.01}, {0.05, 0.02}, {0.1, 0.08}, {0.1, 0.15}, {-0.05, 0.02}} {
		thick, mean := make([]float64, n), 0.0
		for i, j := range thin {
			thick[i] = j * math.Exp(-c.q*j)
			mean += thick[i] / n
		}
		for i := range thick {
			thick[i] = (1-c.m)*thick[i] + c.m*mean
		}
		forth, back := fit(thin, thick), fit(thick, thin)
		// The model is of second order in q.
		floatcmp.Check(t, "m", forth.M.Value, c.m, 2e-4+c.q*c.q*c.q, 0)
		off, most := math.Abs(back.M.Value+c.m/(1-c.m)), swappedOrder(c.m, c.q)
		if off > most+1e-9 || c.m*c.q > 0 && off < most/4 {
			t.Errorf("m %g, q %g: swapped m is off by %.5f, allowed %.5f", c.m, c.q, off, most)
		}
	}
}

// A detector that saturates takes half of unit intensity: a curb of 0.4 has no inverse
// within the strengths, m of the pair is 0.04 and that of the swapped pair above 0 too. The
// control fails in every crystal and says why, although leaving out groups of reflections
// moves both fits more than they claim.
func TestSwappedPairFailsUnderSaturation(t *testing.T) {
	p := simulate.Flawed(simulate.FlawSaturation, 1)
	s := studyOf(t, p, quick())
	ctx := context.Background()
	if _, err := s.Scale(ctx); err != nil {
		t.Fatal(err)
	}
	for _, contrast := range s.primaryContrasts() {
		x, err := s.paired(ctx, contrast)
		if err != nil {
			t.Fatal(err)
		}
		if err := s.sizes(ctx, x); err != nil {
			t.Fatal(err)
		}
		r := s.newReading(x)
		r.alarm = s.falseAlarm([]*Compared{x, x, x})
		got, err := s.swappedControl(ctx, r)
		if err != nil || len(got) != 1 {
			t.Fatal(got, err)
		}
		c := got[0]
		t.Logf("%s: m = %s, %.4f expected: %s", c.Crystal, span(c.M.Value, c.M.Lo, c.M.Hi), c.Expected, c.Why)
		if c.Passed || !(c.M.Lo > 0 && c.Expected < 0) || !strings.Contains(c.Why, "no curb describes the swapped pair") {
			t.Errorf("%+v", c)
		}
	}
}
