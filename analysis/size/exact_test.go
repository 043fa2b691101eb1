package size

import (
	"math"
	"slices"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// noiseless returns pairs that obey the model exactly, y1 - y2 = m_s (y1 - 1) +
// (1-m) q (h Q - <h Q> y1), with shell means of the thick position that hold the
// offset o; the axis is another increasing function of the strength.
func noiseless(m, q, o float64, curb CurbForm) *Input {
	r := stream(11)
	p := plan{n: 1200, shells: 8, falloff: 9}
	in := p.draw(r)
	in.VarThin = make([]float64, p.n)
	in.Exposure = make([]float64, p.n)
	for i := range in.Exposure {
		in.Exposure[i] = 1 + r.Float64()
	}
	ref := 0.0
	rate := 0.0
	for i := range 400 {
		ref += in.Thin[i] / 400
		rate += in.Thin[i] * in.Exposure[i] / 400
	}
	for s := range 8 {
		lo, hi := s*150, (s+1)*150
		var mean float64
		for _, v := range in.Thin[lo:hi] {
			mean += v / 150
		}
		t := make([]float64, 150)
		var tm float64
		for i, v := range in.Thin[lo:hi] {
			switch curb {
			case CurbCommon:
				t[i] = v * v / (mean * ref)
			case CurbStrength:
				t[i] = v * v / (mean * mean)
			case CurbRate:
				t[i] = v * v * in.Exposure[lo+i] / (mean * rate)
			}
			tm += t[i] / 150
		}
		ms := m + (1-m)*o/(mean+o)
		for i, v := range in.Thin[lo:hi] {
			y := v / mean
			in.Thick[lo+i] = (mean + o) * (y - ms*(y-1) - (1-m)*q*(t[i]-tm*y))
			in.Z[lo+i] = y + 0.1*math.Sqrt(y)
		}
	}
	return in
}

func TestExactRecovery(t *testing.T) {
	for _, c := range []struct {
		model   Model
		m, q, o float64
		curb    CurbForm
	}{
		{M, 0, 0, 0, CurbCommon},
		{M, 0.3, 0, 0, CurbCommon},
		{M, -0.1, 0, 0, CurbCommon},
		{MQ, 0.07, 0.02, 0, CurbCommon},
		{MQ, 0.07, 0.02, 0, CurbStrength},
		{MQ, 0.07, 0.02, 0, CurbRate},
		{MQO, 0.07, 0.02, 0.01, CurbCommon},
		{MQO, 0.2, -0.01, 0.05, CurbStrength},
		{MQO, 0, 0, -0.005, CurbCommon},
	} {
		in := noiseless(c.m, c.q, c.o, c.curb)
		for _, flat := range []bool{false, true} {
			fit, err := Moments(in, nil, c.model, &Settings{Curb: c.curb, FlatShells: flat, FirstOrder: true, AsFound: true})
			fit = must(t, fit, err)
			if !fit.Estimable {
				t.Fatal(fit.Why)
			}
			floatcmp.Check(t, c.model.String()+" m", fit.M.Value, c.m, 1e-9, 0)
			floatcmp.Check(t, c.model.String()+" q", fit.Q.Value, c.q, 1e-9, 0)
			floatcmp.Check(t, c.model.String()+" o", fit.O.Value*fit.Reference, c.o, 1e-9, 0)
			floatcmp.Check(t, c.model.String()+" J", fit.J, 0, 1e-9, 0)
		}
		if c.q == 0 && c.o == 0 {
			x, err := Exchange(in, nil)
			floatcmp.Check(t, "exchange", must(t, x, err).M, c.m, 1e-12, 0)
			g, err := Giants(in, nil, nil)
			for _, v := range must(t, g, err) {
				floatcmp.Check(t, "giants left out", v.Instrument.M, c.m, 1e-12, 0)
			}
			classes, err := Classes(in, nil, nil, nil)
			for _, k := range must(t, classes, err) {
				if k.Name != "middle" {
					floatcmp.Check(t, k.Name, k.M.Value, c.m, 1e-10, 0)
				}
			}
		}
	}
}

// A curb J exp(-q J) with exchange after it, without noise, comes back to the order
// q^2 that the series leaves out, so four times as far off at twice the size; of first order
// alone it reads too little by the order q.
func TestCurbToSecondOrder(t *testing.T) {
	off := func(q float64, first bool) float64 {
		in := noiseless(0, 0, 0, CurbCommon)
		ref := 0.0
		for _, v := range in.Thin[:400] {
			ref += v / 400
		}
		for k := range 8 {
			lo, hi := k*150, (k+1)*150
			var mean float64
			for i := lo; i < hi; i++ {
				in.Thick[i] = in.Thin[i] * math.Exp(-q*in.Thin[i]/ref)
				mean += in.Thick[i] / 150
			}
			for i := lo; i < hi; i++ {
				in.Thick[i] = .9*in.Thick[i] + .1*mean
			}
		}
		f, err := Moments(in, nil, MQ, &Settings{FirstOrder: first, FlatShells: true, AsFound: true})
		f = must(t, f, err)
		floatcmp.Check(t, "m", f.M.Value, .1, .1*q, 0)
		return f.Q.Value/q - 1
	}
	one, two, linear := off(.01, false), off(.02, false), off(.01, true)
	if !(math.Abs(one) < 1e-5) || !(two/one > 3.5 && two/one < 4.5) || !(linear < -.004) {
		t.Errorf("relative errors %.3g at 0.01, %.3g at 0.02, %.3g of first order", one, two, linear)
	}
}

// sizes are all estimates of one input that must not depend on its form.
func sizes(t *testing.T, in *Input, w []float64) []float64 {
	t.Helper()
	x, err := Exchange(in, w)
	out := []float64{must(t, x, err).M, x.SE, x.F, x.Lo, x.Hi}
	for _, model := range []Model{M, MQ, MQO} {
		f, err := Moments(in, w, model, nil)
		f = must(t, f, err)
		out = append(out, f.M.Value, f.M.SE, f.Q.Value, f.Q.SE, f.O.Value, f.O.SE, f.J, f.F)
	}
	return out
}

func TestIdentities(t *testing.T) {
	in := plan{n: 1500, shells: 6, m: .05, o: .01, falloff: 9, noise: [3]float64{.03, .03, .03}, error: .2}.draw(stream(3))
	want := sizes(t, in, nil)
	clone := func() *Input {
		c := *in
		c.Z, c.Thin, c.Thick = slices.Clone(in.Z), slices.Clone(in.Thin), slices.Clone(in.Thick)
		c.VarThin, c.VarThick = slices.Clone(in.VarThin), slices.Clone(in.VarThick)
		c.Shell, c.S2 = slices.Clone(in.Shell), slices.Clone(in.S2)
		return &c
	}
	t.Run("constant scales", func(t *testing.T) {
		c := clone()
		for i := range c.Z {
			c.Z[i] *= 3
			c.Thin[i] *= 7
			c.VarThin[i] *= 49
			c.Thick[i] *= .2
			c.VarThick[i] *= .04
		}
		floatcmp.CheckSlice(t, "scaled", sizes(t, c, nil), want, 1e-9, 1e-8)
	})
	t.Run("scales by shell", func(t *testing.T) {
		c := clone()
		for i, s := range c.Shell {
			k := float64(s + 1)
			c.Z[i] *= k
			c.Thin[i] *= k * k
			c.VarThin[i] *= k * k * k * k
			c.Thick[i] /= k
			c.VarThick[i] /= k * k
		}
		x, err := Exchange(c, nil)
		floatcmp.Check(t, "m", must(t, x, err).M, want[0], 0, 1e-9)
		floatcmp.Check(t, "SE", x.SE, want[1], 0, 1e-9)
		set := &Settings{Curb: CurbStrength}
		a, err := Moments(in, nil, MQ, set)
		a = must(t, a, err)
		b, err := Moments(c, nil, MQ, set)
		b = must(t, b, err)
		floatcmp.Check(t, "m of (m,q)", b.M.Value, a.M.Value, 0, 1e-8)
		floatcmp.Check(t, "q of (m,q)", b.Q.Value, a.Q.Value, 0, 1e-8)
		floatcmp.Check(t, "SE of q", b.Q.SE, a.Q.SE, 0, 1e-8)
	})
	order := stream(4).Perm(len(in.Z))
	t.Run("permutation", func(t *testing.T) {
		c := clone()
		for i, j := range order {
			c.Z[i], c.Thin[i], c.Thick[i] = in.Z[j], in.Thin[j], in.Thick[j]
			c.VarThin[i], c.VarThick[i], c.S2[i], c.Shell[i] = in.VarThin[j], in.VarThick[j], in.S2[j], in.Shell[j]
		}
		floatcmp.CheckSlice(t, "permuted", sizes(t, c, nil), want, 1e-9, 1e-8)
	})
	t.Run("weight 2 is a row given twice", func(t *testing.T) {
		c, w := clone(), make([]float64, len(in.Z))
		for i := range w {
			w[i] = 1
		}
		// The lowest third in s^2 is a share of rows, so twice each row keeps it.
		for i := range in.Z {
			w[i] = 2
			c.Z, c.Thin, c.Thick = append(c.Z, in.Z[i]), append(c.Thin, in.Thin[i]), append(c.Thick, in.Thick[i])
			c.VarThin, c.VarThick = append(c.VarThin, in.VarThin[i]), append(c.VarThick, in.VarThick[i])
			c.S2, c.Shell = append(c.S2, in.S2[i]), append(c.Shell, in.Shell[i])
		}
		floatcmp.CheckSlice(t, "doubled", sizes(t, in, w), sizes(t, c, nil), 1e-9, 1e-8)
		// A single doubled row, without the reference of the lowest third.
		one, single := clone(), make([]float64, len(in.Z))
		one.S2 = nil
		d := clone()
		d.S2 = nil
		for i := range single {
			single[i] = 1
		}
		single[77] = 2
		d.Z, d.Thin, d.Thick = append(d.Z, in.Z[77]), append(d.Thin, in.Thin[77]), append(d.Thick, in.Thick[77])
		d.VarThin, d.VarThick, d.Shell = append(d.VarThin, in.VarThin[77]), append(d.VarThick, in.VarThick[77]), append(d.Shell, in.Shell[77])
		floatcmp.CheckSlice(t, "one doubled", sizes(t, one, single), sizes(t, d, nil), 1e-9, 1e-8)
	})
	t.Run("weight 0 is a row left out", func(t *testing.T) {
		w := make([]float64, len(in.Z))
		c := &Input{Shells: in.Shells}
		for i := range w {
			if i%3 == 0 {
				continue
			}
			w[i] = 1
			c.Z, c.Thin, c.Thick = append(c.Z, in.Z[i]), append(c.Thin, in.Thin[i]), append(c.Thick, in.Thick[i])
			c.VarThin, c.VarThick, c.Shell = append(c.VarThin, in.VarThin[i]), append(c.VarThick, in.VarThick[i]), append(c.Shell, in.Shell[i])
		}
		all := clone()
		all.S2 = nil
		floatcmp.CheckSlice(t, "without a third", sizes(t, all, w), sizes(t, c, nil), 1e-9, 1e-8)
	})
	t.Run("inputs stay and the second run is the same", func(t *testing.T) {
		c := clone()
		got := sizes(t, in, nil)
		for i := range got {
			if got[i] != want[i] {
				t.Errorf("estimate %d: %g, then %g", i, want[i], got[i])
			}
		}
		if !slices.Equal(c.Z, in.Z) || !slices.Equal(c.Thin, in.Thin) || !slices.Equal(c.Thick, in.Thick) || !slices.Equal(c.S2, in.S2) {
			t.Error("an input changed")
		}
	})
	t.Run("nil settings are zero settings", func(t *testing.T) {
		a, err := ExchangeWith(in, nil, nil)
		b, err2 := ExchangeWith(in, nil, &Settings{Level: .95, Clip: 6})
		if must(t, a, err).M != must(t, b, err2).M || a.Lo != b.Lo {
			t.Errorf("%v and %v", a, b)
		}
	})
}

func TestRefusals(t *testing.T) {
	good := func() *Input { return plan{n: 200, shells: 2, noise: [3]float64{.1, .1, .1}}.draw(stream(5)) }
	for _, c := range []struct {
		name string
		harm func(in *Input)
		want string
	}{
		{"NaN intensity", func(in *Input) { in.Thin[7] = math.NaN() }, "intensity of reflection 7 is NaN"},
		{"infinite axis", func(in *Input) { in.Z[3] = math.Inf(1) }, "Z of reflection 3 is +Inf"},
		{"shell outside", func(in *Input) { in.Shell[9] = 2 }, "shell 2 of reflection 9 is outside 0 to 1"},
		{"negative variance", func(in *Input) { in.VarThin[1] = -1 }, "VarThin of reflection 1 is -1"},
		{"empty shell mean", func(in *Input) {
			for i := range 100 {
				in.Thick[i] = -in.Thick[i]
			}
		}, "the mean of shell 0 is -"},
	} {
		in := good()
		c.harm(in)
		if _, err := Exchange(in, nil); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", c.name, err, c.want)
		}
	}
	in := good()
	in.VarThin = nil
	if _, err := Moments(in, nil, MQ, nil); err == nil || !strings.Contains(err.Error(), "needs VarThin") {
		t.Errorf("curb without variances: %v", err)
	}
	if _, err := Moments(good(), nil, MQ, &Settings{Curb: CurbRate}); err == nil || !strings.Contains(err.Error(), "needs Exposure") {
		t.Errorf("curb by rate without exposure: %v", err)
	}
	if f, err := Moments(plan{n: 400, noise: [3]float64{.1, .1, .1}}.draw(stream(6)), nil, MQO, nil); err != nil || f.Estimable || !strings.Contains(f.Why, "do not tell") || !math.IsNaN(f.M.Value) || !math.IsInf(f.M.Hi, 1) {
		t.Errorf("offset with one shell: %+v, %v", f, err)
	}
	defer func() {
		if v := recover(); v != "size: Exchange: Thin has length 1, Z has 2" {
			t.Errorf("panic %v", v)
		}
	}()
	_, _ = Exchange(&Input{Z: make([]float64, 2), Thin: make([]float64, 1)}, nil)
}

// Reflections without a strength stay in the shell means: with the axis missing
// for all weak reflections an exact exchange is still found.
func TestMissingStrength(t *testing.T) {
	in := noiseless(0.2, 0, 0, CurbCommon)
	for i, z := range in.Z {
		if z < 0.5 {
			in.Z[i] = math.NaN()
		}
	}
	x, err := Exchange(in, nil)
	x = must(t, x, err)
	floatcmp.Check(t, "m", x.M, 0.2, 1e-12, 0)
	if x.N >= float64(len(in.Z)) {
		t.Errorf("N = %g counts reflections without a strength", x.N)
	}
}
