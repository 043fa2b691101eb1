package curve

import (
	"math"
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// A pure B change with deviations: thick = thin k exp(-2 dB s^2) e^x.
func resolved(n int, dB, bump float64, name string) (s2, thin, thick []float64) {
	s := seedOf(name).Stream(0)
	for range n {
		q := 0.35 * s.Float64()
		j := s.Exponential() * math.Exp(-8*q)
		k := 1.1 * math.Exp(-2*dB*q+0.2*s.Normal()-0.02)
		if q > 0.15 && q < 0.2 {
			k *= 1 + bump
		}
		s2, thin, thick = append(s2, q), append(thin, j), append(thick, k*j)
	}
	return s2, thin, thick
}

func TestByResolutionLine(t *testing.T) {
	o := &Settings{Resample: resample.Settings{Replicates: 800}}
	s2, thin, thick := resolved(6000, 1.5, 0, "line")
	c := must[*Shells](t)(ByResolution(bg, s2, thin, thick, o))
	floatcmp.Check(t, "Delta B", c.DeltaB, 1.5, 4*c.DeltaBSE, 0)
	floatcmp.Check(t, "intercept", c.Intercept, math.Log(1.1), 0.05, 0)
	if !(c.DeltaBSE > 0 && c.DeltaBSE < 0.1 && c.DeltaBLo < c.DeltaB && c.DeltaB < c.DeltaBHi && c.Share > 0.97) || c.DF != 10 || !(c.P > 0.001) {
		t.Errorf("Delta B %g +- %g, share %g, p %g", c.DeltaB, c.DeltaBSE, c.Share, c.P)
	}
	for k := range c.S2 {
		var a, b float64
		n := 0
		for i, q := range s2 {
			if q >= c.S2Lo[k] && q <= c.S2Hi[k] {
				a, b, n = a+thin[i], b+thick[i], n+1
			}
		}
		floatcmp.Check(t, "ratio of sums", c.LnRatio[k], math.Log(b/a), 1e-12, 0)
		floatcmp.Check(t, "rest", c.Rest[k], c.LnRatio[k]-c.Intercept+2*c.DeltaB*c.S2[k], 1e-12, 0)
		if n != c.N[k] || n != 500 {
			t.Errorf("shell %d: %d reflections, %d counted", k, c.N[k], n)
		}
		if !(c.RestLoSim[k] < c.Rest[k] && c.Rest[k] < c.RestHiSim[k]) {
			t.Errorf("shell %d: rest %g outside its band", k, c.Rest[k])
		}
	}
	// What is no line shows in the rest.
	s2, thin, thick = resolved(6000, 0, 0.5, "bump")
	c = must[*Shells](t)(ByResolution(bg, s2, thin, thick, o))
	if !(c.P < 1e-6) || !(c.Share < 0.5) || !(slices.Max(c.RestLoSim) > 0) {
		t.Errorf("bump: p %g, share %g, rest %v", c.P, c.Share, c.Rest)
	}
}

func TestByResolutionIdentities(t *testing.T) {
	o := &Settings{Shells: 6, Resample: resample.Settings{Replicates: 300}}
	s2, thin, thick := resolved(1200, 1, 0, "identity")
	a := must[*Shells](t)(ByResolution(bg, s2, thin, thick, o))
	b := must[*Shells](t)(ByResolution(bg, s2, thick, thin, o))
	scaled := slices.Clone(thick)
	for i := range scaled {
		scaled[i] *= 3
	}
	c := must[*Shells](t)(ByResolution(bg, s2, thin, scaled, o))
	for k := range a.S2 {
		floatcmp.Check(t, "swapped", b.Lo[k], -a.Hi[k], 1e-12, 0)
		floatcmp.Check(t, "scaled", c.Hi[k], a.Hi[k]+math.Log(3), 1e-12, 0)
		floatcmp.Check(t, "scale leaves the rest", c.RestHi[k], a.RestHi[k], 1e-9, 0)
	}
	floatcmp.Check(t, "swapped Delta B", b.DeltaB, -a.DeltaB, 1e-9, 0)
	floatcmp.Check(t, "overall", c.Overall, a.Overall+math.Log(3), 1e-12, 0)
	e := must[*Shells](t)(ByResolution(bg, s2, thin, thin, o))
	for k := range e.S2 {
		floatcmp.Check(t, "nothing changed", e.HiSim[k], 0, 0, 0)
	}
	if !math.IsNaN(e.DeltaB) || !math.IsInf(e.DeltaBHi, 1) {
		t.Errorf("a line without error: %g", e.DeltaB)
	}
}

func TestByResolutionWeak(t *testing.T) {
	s2, thin, thick := resolved(1200, 0, 0, "weak")
	s := seedOf("noise").Stream(0)
	for i := range thin {
		if s2[i] > 0.3 {
			thin[i] = s.Normal()
		}
	}
	c := must[*Shells](t)(ByResolution(bg, s2, thin, thick, nil))
	if len(c.Warnings) == 0 || c.Warnings[0].Code != CodeWeakShell || !math.IsNaN(c.LnRatio[11]) || !math.IsInf(c.HiSim[11], 1) || !math.IsInf(c.RestLo[11], -1) || math.IsNaN(c.LnRatio[0]) {
		t.Errorf("warnings %v, ratios %v", c.Warnings, c.LnRatio)
	}
	for _, v := range []struct {
		want            string
		s2, thin, thick []float64
	}{
		{"curve: ByResolution: 3 reflections for 12 shells", []float64{1, 2, 3}, []float64{1, 2, 3}, []float64{1, 2, 3}},
		{"curve: ByResolution: value 1 is NaN", []float64{1, math.NaN()}, []float64{1, 2}, []float64{1, 2}},
		{"curve: ByResolution: no shell has a mean intensity clear of zero", s2, make([]float64, 1200), thick},
	} {
		if _, err := ByResolution(bg, v.s2, v.thin, v.thick, nil); err == nil || err.Error() != v.want {
			t.Errorf("error %v, want %q", err, v.want)
		}
	}
}
