package difference

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

// small makes a catalogue of 1 2 3 (two raw indices), 2 2 3, 4 0 0 and the
// forbidden 3 0 0.
func small(t *testing.T) (*intensity.Catalogue, func(hkl ...crystal.HKL) (u, raw []int32)) {
	t.Helper()
	g, err := crystal.Lookup("P 21 21 21")
	if err != nil {
		t.Fatal(err)
	}
	columns := func(hkl ...crystal.HKL) *intensity.Columns {
		c := &intensity.Columns{}
		for _, x := range hkl {
			c.H, c.K, c.L = append(c.H, int16(x.H)), append(c.K, int16(x.K)), append(c.L, int16(x.L))
			c.I, c.Sigma = append(c.I, 1), append(c.Sigma, 1)
		}
		return c
	}
	cat, err := intensity.NewCatalogue(tarnCell, g, columns(crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: -1, K: -2, L: 3}, crystal.HKL{H: 2, K: 2, L: 3}, crystal.HKL{H: 4}, crystal.HKL{H: 3}))
	if err != nil {
		t.Fatal(err)
	}
	return cat, func(hkl ...crystal.HKL) (u, raw []int32) {
		c := columns(hkl...)
		u, err := cat.Assign(c)
		if err != nil {
			t.Fatal(err)
		}
		return u, cat.RawIDs(c)
	}
}

func TestPairMatched(t *testing.T) {
	cat, ids := small(t)
	a, b := crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: -1, K: -2, L: 3}
	c, d, e := crystal.HKL{H: 2, K: 2, L: 3}, crystal.HKL{H: 4}, crystal.HKL{H: 3}
	thin, thick := &intensity.Scaled{}, &intensity.Scaled{}
	thin.Unique, thin.Raw = ids(a, b, c, c, d, e, c)
	thin.I = []float64{100, 110, 50, 52, 30, 5, 55}
	thin.Var = []float64{1, 3, 1, 1, 1, 1, 1}
	thin.Phi = []float64{10, 20, 5, 25, 8, 9, 40}
	thick.Unique, thick.Raw = ids(b, a, c, d, e, c)
	thick.I = []float64{104, 90, 48, 31, 9, 70}
	thick.Var = []float64{5, 1, 1, 1, 1, 1}
	thick.Phi = []float64{20.4, 9.7, 25.2, 8.3, 9.1, 5.6}
	before := fmt.Sprint(*thin, *thick)
	p := mustPair(t, thin, thick, cat, &Settings{SameCrystal: true, AngleToleranceDeg: 0.5, Shells: 1})
	if !p.Matched || p.Len() != 3 {
		t.Fatalf("%d pairs, matched %v", p.Len(), p.Matched)
	}
	at := map[crystal.HKL]int{}
	for i, u := range p.Unique {
		at[cat.HKL[u]] = i
	}
	i := at[a]
	// Weights 1/2 and 1/8: (100/2 + 110/8)/(5/8) = 102, (90/2 + 104/8)/(5/8) = 92.8,
	// variances (1/4 + 3/64) 64/25 = 0.76 and (1/4 + 5/64) 64/25 = 0.84.
	floatcmp.Check(t, "thin", p.Thin[i], 102, 0, 1e-13)
	floatcmp.Check(t, "thick", p.Thick[i], 92.8, 0, 1e-13)
	floatcmp.Check(t, "variance", p.VarThin[i], 0.76, 0, 1e-13)
	floatcmp.Check(t, "variance of thick", p.VarThick[i], 0.84, 0, 1e-13)
	floatcmp.Check(t, "angle", p.Phi[i], 15, 0, 1e-13)
	// 2 2 3: only the pair at 25 degrees lies within half a degree.
	i = at[c]
	floatcmp.Check(t, "thin 2 2 3", p.Thin[i], 52, 0, 0)
	floatcmp.Check(t, "thick 2 2 3", p.Thick[i], 48, 0, 0)
	if want := (Counts{ThinObservations: 7, ThickObservations: 6, ThinUnique: 3, ThickUnique: 3, Common: 3, MatchedObservations: 4, Absent: 1, Pairs: 3,
		Thin: SideCounts{Absent: 1, OutsideRange: 2, Used: 4}, Thick: SideCounts{Absent: 1, Alone: 1, Used: 4}}); p.Counts != want {
		t.Errorf("counts %+v, want %+v", p.Counts, want)
	}
	// Epsilon of 4 0 0 is 2: mean of thin (102 + 52 + 30/2)/3.
	floatcmp.Check(t, "local mean", p.MeanThin[at[a]], (102.0+52+15)/3, 0, 1e-13)
	floatcmp.Check(t, "local mean of 4 0 0", p.MeanThin[at[d]], 2*(102.0+52+15)/3, 0, 1e-13)
	thinOnly, thickOnly, v1, v2 := p.OverEpsilon()
	floatcmp.CheckSlice(t, "4 0 0 over epsilon", []float64{thinOnly[at[d]], thickOnly[at[d]], v1[at[d]], v2[at[d]]}, []float64{15, 15.5, 0.25, 0.25}, 0, 1e-13)
	floatcmp.Check(t, "eps", p.Eps()[i], 4/p.MeanPooled[i], 0, 1e-13)
	if fmt.Sprint(*thin, *thick) != before {
		t.Error("the observations were changed")
	}
}

func TestPairFallsBackToMerged(t *testing.T) {
	w := newTruth(t, 0.02)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2})
	bare := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2, noAngles: true})
	other := w.position(invention{seed: 3, crystal: 2, gain: 100, background: 0.2})
	for _, c := range []struct {
		name  string
		thick *intensity.Scaled
		same  bool
		word  string // empty: matched
	}{
		{"same crystal", thick, true, ""},
		{"other crystal", thick, false, "different crystals"},
		{"no angles", bare, true, "no angles"},
		{"other angles", other, true, "same angle"},
	} {
		p := mustPair(t, thin, c.thick, w.cat, &Settings{SameCrystal: c.same})
		if c.word == "" {
			if !p.Matched || len(p.Warnings) != 0 {
				t.Errorf("%s: matched %v, %v", c.name, p.Matched, p.Warnings)
			}
			continue
		}
		if p.Matched || len(p.Warnings) != 1 || !strings.Contains(p.Warnings[0].Text, c.word) || p.Len() != p.Counts.Common {
			t.Errorf("%s: matched %v, %v", c.name, p.Matched, p.Warnings)
		}
		if _, err := Pair(context.Background(), thin, c.thick, w.cat, &Settings{SameCrystal: c.same, Matching: MatchAlways}); err == nil || !strings.Contains(err.Error(), c.word) {
			t.Errorf("%s, matching demanded: %v", c.name, err)
		}
	}
	if p := mustPair(t, thin, thick, w.cat, &Settings{SameCrystal: true, Matching: MatchNever}); p.Matched {
		t.Error("matched though told not to")
	}
}

func TestPairMergedEqualsMerge(t *testing.T) {
	w := newTruth(t, 0.02)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 2, gain: 50, background: 0.2})
	p := mustPair(t, thin, thick, w.cat, nil)
	m := intensity.Merge(w.cat.Len(), thin)
	for i, u := range p.Unique {
		if p.Thin[i] != m.J[u] || p.VarThin[i] != m.Var[u] || p.NThin[i] != m.N[u] {
			t.Fatalf("pair %d differs from the merged position", i)
		}
	}
	sum := make([]float64, p.Shells)
	for i, e := range p.Eps() {
		floatcmp.Check(t, "eps", e, (p.Thin[i]-p.Thick[i])/p.MeanPooled[i], 0, 1e-14)
		sum[p.Shell[i]] += p.Thin[i]/p.MeanThin[i] - 1
	}
	for k, s := range sum {
		floatcmp.Check(t, fmt.Sprintf("mean strength of shell %d", k), s, 0, 1e-8, 0)
	}
}

func TestPairLeavesOutShellsOfNoise(t *testing.T) {
	w := newTruth(t, 0.05)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 2, gain: 100, background: 0.2})
	edge := 0.04
	for o, u := range thick.Unique {
		if w.cat.S2[u] > edge {
			thick.I[o] -= w.j[u]
		}
	}
	p := mustPair(t, thin, thick, w.cat, &Settings{Shells: 20})
	if p.Counts.Unusable == 0 || p.Shells >= 20 || p.Counts.Pairs != p.Len() {
		t.Errorf("%d shells, %+v", p.Shells, p.Counts)
	}
	found := false
	for _, x := range p.Warnings {
		found = found || x.Code == "shells-without-signal"
	}
	if !found {
		t.Errorf("warnings %v", p.Warnings)
	}
	for i := range p.Thin {
		if !(p.MeanThin[i] > 0 && p.MeanThick[i] > 0) || int(p.Shell[i]) >= p.Shells || p.Shell[i] < 0 || p.S2[i] != w.cat.S2[p.Unique[i]] {
			t.Fatalf("pair %d: means %g and %g, shell %d", i, p.MeanThin[i], p.MeanThick[i], p.Shell[i])
		}
	}
}

func TestPairErrors(t *testing.T) {
	cat, ids := small(t)
	u, raw := ids(crystal.HKL{H: 1, K: 2, L: 3})
	one := &intensity.Scaled{Unique: u, Raw: raw, I: []float64{1}, Var: []float64{1}}
	bad := &intensity.Scaled{Unique: u, Raw: raw, I: []float64{1}, Var: []float64{0}}
	for name, f := range map[string]func() error{
		"at least 2 are needed": func() error { _, err := Pair(context.Background(), one, one, cat, nil); return err },
		"thick position: row 0": func() error { _, err := Pair(context.Background(), one, bad, cat, nil); return err },
		"is not above zero": func() error {
			_, err := Pair(context.Background(), one, one, cat, &Settings{AngleToleranceDeg: -1})
			return err
		},
	} {
		if err := f(); err == nil || !strings.Contains(err.Error(), name) {
			t.Errorf("%s: got %v", name, err)
		}
	}
	w := newTruth(t, 0.01)
	s := w.position(invention{seed: 1, crystal: 1, gain: 100})
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Pair(ctx, s, s, w.cat, &Settings{SameCrystal: true}); err == nil {
		t.Error("a cancelled context is ignored")
	}
}

func BenchmarkPair(b *testing.B) {
	w := newTruth(b, 0.3)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 100, background: 0.2})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 100, background: 0.2})
	b.Run(fmt.Sprintf("observations=%d", len(thin.I)), func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			if _, err := Pair(context.Background(), thin, thick, w.cat, &Settings{SameCrystal: true}); err != nil {
				b.Fatal(err)
			}
		}
	})
}

// Deviations of relative scatter 0.25 in each of two merged positions, unrelated
// and on top of the counting variances: b_D^2 is 2 (e^(0.0625) - 1)/n, n the
// equivalents averaged.
func TestRefitVarD(t *testing.T) {
	w := newTruth(t, 0.05)
	for _, c := range []struct {
		name    string
		scatter float64
		factor  float64 // on the variances given
	}{{"counting only", 0, 1}, {"deviations", 0.25, 1}, {"variances twice too large", 0, 2}} {
		thin := w.position(invention{seed: 11, crystal: 1, gain: 400, background: 0.05, scatter: c.scatter})
		thick := w.position(invention{seed: 12, crystal: 2, gain: 400, background: 0.05, scatter: c.scatter})
		for o := range thin.Var {
			thin.Var[o] *= c.factor
			thick.Var[o] *= c.factor
		}
		p := mustPair(t, thin, thick, w.cat, nil)
		d := p.D()
		strong, claimed := 0.0, 0.0
		var z2 float64
		for i, v := range p.VarD {
			z2 += d[i] * d[i] / v / float64(p.Len())
			if p.Thin[i] > 1.5*p.MeanThin[i] {
				strong += d[i] * d[i] / (p.Thin[i] * p.Thin[i])
				claimed += v / (p.Thin[i] * p.Thin[i])
			}
		}
		if c.factor == 1 {
			floatcmp.Check(t, c.name+": scatter of the strong", claimed, strong, 0, 0.15)
			floatcmp.Check(t, c.name+": mean square over VarD", z2, 1, 0.15, 0)
		}
		switch c.name {
		case "counting only":
			if !(p.ExtraDLo <= 0.02 && p.ExtraDHi >= -0.02 && math.Abs(p.ExtraD) < 0.04) {
				t.Errorf("%s: b_D %g from %g to %g", c.name, p.ExtraD, p.ExtraDLo, p.ExtraDHi)
			}
		case "deviations":
			n := 0.0
			for _, k := range p.NThin {
				n += 1 / float64(k) / float64(p.Len())
			}
			want := math.Sqrt(2 * math.Expm1(0.0625) * n)
			floatcmp.Check(t, c.name, p.ExtraD, want, 0, 0.12)
			if !(p.ExtraDLo < p.ExtraD && p.ExtraD < p.ExtraDHi && p.ExtraDLo > 0.05) {
				t.Errorf("%s: b_D %g from %g to %g", c.name, p.ExtraD, p.ExtraDLo, p.ExtraDHi)
			}
		default:
			if !(p.ExtraD < -0.02) {
				t.Errorf("%s: b_D %g is not negative", c.name, p.ExtraD)
			}
		}
	}
}

// The factor for which normal deviates keep their variance: as many degrees of
// freedom as you like make it 1; for 4 by the defining integral with another
// rule (midpoints).
func TestNormalScale(t *testing.T) {
	floatcmp.Check(t, "many", normalScale(1e6), 1, 1e-4, 0)
	c, sum := normalScale(4), 0.0
	const n = 200000
	for k := range n {
		z := 20 * (float64(k) + 0.5) / n
		sum += 5 * z * z / (4*c + z*z) * math.Exp(-0.5*z*z) * 2 / math.Sqrt(2*math.Pi) * 20 / n
	}
	floatcmp.Check(t, "score at 4", sum, 1, 1e-8, 0)
}
