package scaling

import (
	"context"
	"errors"
	"math"
	"reflect"
	"slices"
	"strings"
	"testing"
	"time"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

func has(w []intensity.Warning, code, at string) bool {
	return slices.ContainsFunc(w, func(x intensity.Warning) bool { return x.Code == code && (at == "" || x.Where == at) })
}

// Without equivalents the common curve is not determined: it must be a constant,
// and said to be; the curves between positions stay.
func TestNoEquivalents(t *testing.T) {
	in, truth := simulate(simPlan{seed: 5, mates: 1, unique: 2400})
	f := estimate(t, in, nil)
	if !f.Constant || !has(f.Warnings, "curve-constant", "") {
		t.Fatalf("constant %v, warnings %v", f.Constant, f.Warnings)
	}
	if !(f.SoftSE > 0.1) {
		t.Errorf("softest direction has SE %g", f.SoftSE)
	}
	for phi := -58.0; phi < 60; phi += 9 {
		floatcmp.Check(t, "ln K of position 0", f.LnKAt(0, phi), 0, 1e-12, 0)
		for p := 1; p < 3; p++ {
			d := (f.LnKAt(p, phi) - (truth.lnK(p, phi) - truth.lnK(0, phi))) / f.LnKSEAt(p, phi)
			floatcmp.Check(t, "relative curve in standard errors", d, 0, 4.5, 0)
		}
	}
	for i, g := range f.Scale {
		if !(g > 0) || math.IsInf(g, 0) {
			t.Fatalf("scale of row %d is %g", i, g)
		}
	}
}

func TestOneFrameRange(t *testing.T) {
	in, truth := simulate(simPlan{seed: 6, span: 1.5, unique: 300})
	f := estimate(t, in, nil)
	for p := range 3 {
		if len(f.LnK[p]) != 1 || !has(f.Warnings, "angle-range", where(p)) {
			t.Errorf("position %d: %d coefficients, warnings %v", p, len(f.LnK[p]), f.Warnings)
		}
		if p > 0 {
			z := (f.LnKMean[p] - truth.lnK(p, 0) + truth.lnK(0, 0)) / f.LnKMeanSE[p]
			floatcmp.Check(t, "constant in standard errors", z, 0, 4, 0)
		}
	}
	if !f.Converged {
		t.Error("not converged")
	}
}

func TestPositionsWithoutAngles(t *testing.T) {
	in, _ := simulate(simPlan{seed: 7})
	in.HasAngle = []bool{true, false, true}
	f := estimate(t, in, nil)
	if len(f.LnK[1]) != 1 || len(f.LnK[0]) < 10 || len(f.LnK[2]) < 10 || !has(f.Warnings, "no-angles", "position 1") {
		t.Errorf("coefficients %d %d %d, warnings %v", len(f.LnK[0]), len(f.LnK[1]), len(f.LnK[2]), f.Warnings)
	}
	in.HasAngle, in.Phi = nil, nil
	f = estimate(t, in, nil)
	for p := range 3 {
		if len(f.LnK[p]) != 1 {
			t.Errorf("position %d without any angle has %d coefficients", p, len(f.LnK[p]))
		}
	}
}

// Frame numbers, different in origin and pace from position to position, stand
// for the angle only when asked, and then give each position its own curve.
func TestFramesForAngles(t *testing.T) {
	in, truth := simulate(simPlan{seed: 8, unique: 1500})
	in.HasAngle = []bool{false, false, false}
	for i, p := range in.Position {
		in.Phi[i] = math.Round((in.Phi[i]+60)*2) + 1000*float64(p)
	}
	f := estimate(t, in, &Settings{FrameAsAngle: true})
	for p := range 3 {
		if len(f.LnK[p]) < 10 {
			t.Fatalf("position %d: %d coefficients", p, len(f.LnK[p]))
		}
		for phi := -50.0; phi <= 50; phi += 20 {
			frame := (phi+60)*2 + 1000*float64(p)
			z := (f.LnKAt(p, frame) - truth.lnK(p, phi)) / f.LnKSEAt(p, frame)
			floatcmp.Check(t, "curve against frames in standard errors", z, 0, 4.5, 0)
		}
	}
}

func TestGauge(t *testing.T) {
	in, _ := simulate(simPlan{seed: 9})
	for _, m := range []Model{Full, PhiOnly, BOnly, Constant} {
		f := estimate(t, in, &Settings{Model: m})
		sum, n := 0.0, 0.0
		for i, g := range f.Scale {
			if in.Position[i] == 0 {
				sum += math.Log(g)
				n++
			}
		}
		floatcmp.Check(t, m.String()+": mean ln K of position 0", sum/n, 0, 1e-10, 0)
		if (m == PhiOnly || m == Constant) != (f.B[1] == 0) || f.B[0] != 0 || f.BSE[0] != 0 {
			t.Errorf("%v: B %v, SE %v", m, f.B, f.BSE)
		}
		if curved := len(f.LnK[0]) > 1; curved != (m == Full || m == PhiOnly) {
			t.Errorf("%v: %d coefficients", m, len(f.LnK[0]))
		}
	}
}

func TestAngleGap(t *testing.T) {
	in, truth := simulate(simPlan{seed: 10, unique: 1500})
	in = rows(in, func(i int) bool { return in.Position[i] != 1 || in.Phi[i] < 10 || in.Phi[i] > 42 })
	f := estimate(t, in, nil)
	if !has(f.Warnings, "angle-gap", "position 1") {
		t.Errorf("warnings %v", f.Warnings)
	}
	if !(f.LnKSEAt(1, 26) > 2*f.LnKSEAt(1, -20)) {
		t.Errorf("SE %g in the gap, %g outside", f.LnKSEAt(1, 26), f.LnKSEAt(1, -20))
	}
	for _, phi := range []float64{-40, -10, 50} {
		floatcmp.Check(t, "curve outside the gap", f.LnKAt(1, phi), truth.lnK(1, phi), 0.12, 0)
	}
}

// rows keeps the rows for which keep holds.
func rows(in Input, keep func(i int) bool) Input {
	out := Input{Positions: in.Positions, HasAngle: in.HasAngle}
	for i := range in.I {
		if keep(i) {
			out.add(int(in.Position[i]), int(in.Unique[i]), in.S2[i], in.I[i], in.Var[i])
			out.Raw[len(out.Raw)-1] = in.Raw[i]
			out.Phi = append(out.Phi, in.Phi[i])
		}
	}
	return out
}

func TestDisconnected(t *testing.T) {
	in, _ := simulate(simPlan{seed: 11})
	in = rows(in, func(i int) bool { return (in.Position[i] == 2) == (in.Unique[i]%2 == 0) })
	f := estimate(t, in, nil)
	if !has(f.Warnings, "disconnected", "position 2") || has(f.Warnings, "disconnected", "position 1") {
		t.Errorf("warnings %v", f.Warnings)
	}
	floatcmp.Check(t, "mean ln K of the loose position", f.LnKMean[2], 0, 1e-10, 0)
	if f.B[2] != 0 || f.B[1] == 0 {
		t.Errorf("B %v", f.B)
	}
}

func TestFewOverlapsAndEmptyPosition(t *testing.T) {
	in, _ := simulate(simPlan{seed: 12})
	in = rows(in, func(i int) bool {
		switch in.Position[i] {
		case 1:
			return false
		case 2:
			return in.Unique[i] < 30 || in.Unique[i] >= 300
		}
		return in.Unique[i] < 300
	})
	f := estimate(t, in, nil)
	if !has(f.Warnings, "few-overlaps", "position 2") || !has(f.Warnings, "no-observations", "position 1") {
		t.Errorf("warnings %v", f.Warnings)
	}
	if f.LnKMean[1] != 0 || !math.IsInf(f.LnKMeanSE[1], 1) {
		t.Errorf("position without observations: ln K %g, SE %g", f.LnKMean[1], f.LnKMeanSE[1])
	}
}

func TestSinglePosition(t *testing.T) {
	in, truth := simulate(simPlan{seed: 13, lnGain: []float64{5}, b: []float64{0}, noiseB: []float64{0.05}, unique: 1200})
	f := estimate(t, in, nil)
	if f.Constant || !f.Converged {
		t.Fatalf("constant %v, converged %v", f.Constant, f.Converged)
	}
	for phi := -50.0; phi <= 50; phi += 20 {
		floatcmp.Check(t, "curve in standard errors", (f.LnKAt(0, phi)-truth.lnK(0, phi))/f.LnKSEAt(0, phi), 0, 4, 0)
	}
	in = rows(in, func(i int) bool { return in.Raw[i]%4 == 0 })
	if f = estimate(t, in, nil); !f.Constant {
		t.Error("a single position without equivalents kept a curve")
	}
}

func TestUndeterminedB(t *testing.T) {
	in, _ := simulate(simPlan{seed: 14})
	for i := range in.S2 {
		in.S2[i] = 0.05
	}
	f := estimate(t, in, nil)
	if !has(f.Warnings, "undetermined", "") {
		t.Errorf("warnings %v", f.Warnings)
	}
	for _, g := range f.Scale {
		if !(g > 0) || math.IsInf(g, 0) {
			t.Fatal("scale is not finite")
		}
	}
}

// One position multiplied by 7, with its variances by 49: its K by 7, all else
// as it was.
func TestMultiplyingAPosition(t *testing.T) {
	in, _ := simulate(simPlan{seed: 15})
	a := estimate(t, in, nil)
	b := in
	b.I, b.Var = slices.Clone(in.I), slices.Clone(in.Var)
	for i, p := range in.Position {
		if p == 1 {
			b.I[i] *= 7
			b.Var[i] *= 49
		}
	}
	f := estimate(t, b, nil)
	floatcmp.Check(t, "mean ln K", f.LnKMean[1], a.LnKMean[1]+math.Log(7), 1e-6, 0)
	floatcmp.Check(t, "B", f.B[1], a.B[1], 1e-5, 0)
	floatcmp.Check(t, "SE of B", f.BSE[1], a.BSE[1], 0, 1e-3)
	floatcmp.CheckSlice(t, "J", f.J, a.J, 1e-7, 1e-5)
	for phi := -55.0; phi < 60; phi += 10 {
		floatcmp.Check(t, "ln K of position 0", f.LnKAt(0, phi), a.LnKAt(0, phi), 1e-6, 0)
	}
}

func TestRowOrderDoesNotMatter(t *testing.T) {
	in, _ := simulate(simPlan{seed: 16})
	a := estimate(t, in, nil)
	n := in.Len()
	at := func(i int) int { return (i*7919 + 13) % n } // 7919 is prime and no divisor of n
	if n%7919 == 0 {
		t.Fatal("not a permutation")
	}
	b := Input{Positions: in.Positions}
	for i := range n {
		k := at(i)
		b.add(int(in.Position[k]), int(in.Unique[k]), in.S2[k], in.I[k], in.Var[k])
		b.Raw[i] = in.Raw[k]
		b.Phi = append(b.Phi, in.Phi[k])
	}
	f := estimate(t, b, nil)
	for p := range f.LnK {
		floatcmp.CheckSlice(t, "coefficients", f.LnK[p], a.LnK[p], 1e-10, 0)
	}
	floatcmp.CheckSlice(t, "B", f.B, a.B, 1e-10, 0)
	floatcmp.CheckSlice(t, "J", f.J, a.J, 1e-10, 1e-10)
	for i := range n {
		floatcmp.Check(t, "scale", f.Scale[i], a.Scale[at(i)], 0, 1e-10)
	}
}

func TestSameBitsAndUntouchedInput(t *testing.T) {
	in := wide(150000) // several chunks
	before := in
	before.I, before.Var, before.Phi, before.S2 = slices.Clone(in.I), slices.Clone(in.Var), slices.Clone(in.Phi), slices.Clone(in.S2)
	before.Unique, before.Raw, before.Position = slices.Clone(in.Unique), slices.Clone(in.Raw), slices.Clone(in.Position)
	a := estimate(t, in, &Settings{Workers: 1})
	b := estimate(t, in, &Settings{Workers: 2})
	if !reflect.DeepEqual(in, before) {
		t.Error("the input was changed")
	}
	if !reflect.DeepEqual(a.LnK, b.LnK) || !reflect.DeepEqual(a.B, b.B) || !reflect.DeepEqual(a.J, b.J) ||
		!reflect.DeepEqual(a.Scale, b.Scale) || !reflect.DeepEqual(a.Cov, b.Cov) || !reflect.DeepEqual(a.VarExpected, b.VarExpected) {
		t.Error("one and two workers differ in bits")
	}
}

func TestNilSettingsAreZeroSettings(t *testing.T) {
	in, _ := simulate(simPlan{seed: 17, unique: 200})
	a, b := estimate(t, in, nil), estimate(t, in, &Settings{})
	if !reflect.DeepEqual(a, b) {
		t.Error("nil and zero settings differ")
	}
}

func TestCancellation(t *testing.T) {
	in := wide(600000)
	ctx, cancel := context.WithCancel(context.Background())
	var asked time.Time
	time.AfterFunc(100*time.Millisecond, func() { asked = time.Now(); cancel() })
	_, err := Estimate(ctx, in, nil)
	if !errors.Is(err, context.Canceled) {
		t.Fatalf("got %v", err)
	}
	if d := time.Since(asked); d > 500*time.Millisecond {
		t.Errorf("returned %v after cancellation", d)
	}
}

func TestInputErrors(t *testing.T) {
	good, _ := simulate(simPlan{seed: 18, unique: 20})
	for _, c := range []struct {
		want   string
		change func(in *Input)
	}{
		{"column Var has 1 rows", func(in *Input) { in.Var = in.Var[:1] }},
		{"column Phi has 1 rows", func(in *Input) { in.Phi = in.Phi[:1] }},
		{"row 3: variance is 0", func(in *Input) { in.Var[3] = 0 }},
		{"row 3: variance is NaN", func(in *Input) { in.Var[3] = math.NaN() }},
		{"row 2: intensity is NaN", func(in *Input) { in.I[2] = math.NaN() }},
		{"row 2: intensity is +Inf", func(in *Input) { in.I[2] = math.Inf(1) }},
		{"row 1: s^2 is -1", func(in *Input) { in.S2[1] = -1 }},
		{"row 4: angle is NaN", func(in *Input) { in.Phi[4] = math.NaN() }},
		{"row 5: position 3 outside 0 to 2", func(in *Input) { in.Position[5] = 3 }},
		{"row 6: negative number of a reflection (-1", func(in *Input) { in.Unique[6] = -1 }},
		{"are one reflection but have s^2", func(in *Input) { in.S2[0] = 0.2 }},
		{"0 positions", func(in *Input) { in.Positions = 0 }},
		{"HasAngle has 1 entries for 3", func(in *Input) { in.HasAngle = []bool{true} }},
		{"no observations", func(in *Input) { *in = Input{Positions: 1} }},
	} {
		in := rows(good, func(int) bool { return true })
		c.change(&in)
		_, err := Estimate(context.Background(), in, nil)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, want %q", err, c.want)
		}
	}
	for want, set := range map[string]*Settings{
		"KnotDeg is -1":       {KnotDeg: -1},
		"KnotDeg is NaN":      {KnotDeg: math.NaN()},
		"TailDF is 0.5":       {TailDF: 0.5},
		"MaxIter -1":          {MaxIter: -1},
		"unknown model 9":     {Model: 9},
		"unknown anchor 9":    {Anchor: 9},
		"knot spacing must":   {KnotDeg: math.Inf(1)},
		"Tolerance is -1e-09": {Tolerance: -1e-9},
	} {
		if _, err := Estimate(context.Background(), good, set); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("got %v, want %q", err, want)
		}
	}
}

func TestLnKAtPanics(t *testing.T) {
	defer func() {
		if v := recover(); v == nil || !strings.Contains(v.(string), "scaling: LnKAt: position 1 of 1") {
			t.Errorf("got %v", v)
		}
	}()
	(&Fit{curve: []curveAxis{{flat: true}}}).LnKAt(1, 0)
}
