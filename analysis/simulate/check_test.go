package simulate

import (
	"context"
	"encoding/json"
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestCheckNamesTheFault(t *testing.T) {
	for _, c := range []struct {
		want  string
		spoil func(p *Plan)
	}{
		{"energy_keV -1", func(p *Plan) { p.EnergyKeV = -1 }},
		{"energy_keV NaN", func(p *Plan) { p.EnergyKeV = math.NaN() }},
		{"d_min -2", func(p *Plan) { p.DMin = -2 }},
		{"shells -1", func(p *Plan) { p.Shells = -1 }},
		{"simulate: cell:", func(p *Plan) { p.Cell.A = -3 }},
		{"simulate: declared: cell", func(p *Plan) { p.Declared = "P 4" }},
		{"simulate: declared:", func(p *Plan) { p.Declared = "Q 7" }},
		{"simulate: space_group:", func(p *Plan) { p.SpaceGroup = "Q 7" }},
		{"do not have the symmetry of P 41", func(p *Plan) { p.SpaceGroup = "P 41" }},
		{"min_distance -1", func(p *Plan) { p.Structure.MinDistance = -1 }},
		{`element "Xx"`, func(p *Plan) { p.Structure.Atoms = []AtomKind{{Element: "Xx", Number: 3}} }},
		{`element "Yy"`, func(p *Plan) { p.Structure.Given = []Atom{{Element: "Yy"}} }},
		{"number -3 of C", func(p *Plan) { p.Structure.Atoms = []AtomKind{{Element: "C", Number: -3}} }},
		{"no crystal", func(p *Plan) { p.Crystals = nil }},
		{`two crystals are named "L1"`, func(p *Plan) { p.Crystals = append(p.Crystals, Crystal{Name: "L1", Wedge: &Wedge{}}) }},
		{"crystal a/b: a name holds", func(p *Plan) { p.Crystals[0].Name = "a/b" }},
		{"euler_deg needs three", func(p *Plan) { p.Crystals[0].Euler = []float64{1, 2} }},
		{"neighbour_correlation 1.5", func(p *Plan) { p.Crystals[0].Neighbours = 1.5 }},
		{"crystal L1: no position", func(p *Plan) { p.Crystals[0].Positions = nil }},
		{`two positions are named "thin"`, func(p *Plan) { p.Crystals[0].Positions[1].Name = "thin" }},
		{`replicate_of "nil"`, func(p *Plan) { p.Crystals[0].Positions[1].ReplicateOf = "nil" }},
		{"position thick: thickness_nm -4", func(p *Plan) { p.Crystals[0].Positions[1].ThicknessNM = -4 }},
		{"exchange 1.2", func(p *Plan) { p.Common.Exchange = 1.2 }},
		{"counts -1", func(p *Plan) { p.Common.Counts = -1 }},
		{"curb NaN", func(p *Plan) { p.Common.Curb = math.NaN() }},
		{"curb_form 9", func(p *Plan) { p.Common.CurbForm = 9 }},
		{"ln_scale_cos", func(p *Plan) { p.Common.Cos = []float64{math.Inf(1)} }},
		{"cut_below_sigma", func(p *Plan) { p.Common.CutBelow = new(float64); *p.Common.CutBelow = math.NaN() }},
		{"tilt_deg [60 -60]", func(p *Plan) { p.Common.TiltDeg = []float64{60, -60} }},
		{"gap_deg [1]", func(p *Plan) { p.Common.GapDeg = []float64{1} }},
		{"frame_deg 500", func(p *Plan) { p.Common.FrameDeg = 500 }},
		{"copies -1", func(p *Plan) { p.Common.Copies = -1 }},
		{"tilt_thickens needs", func(p *Plan) { p.Common.TiltThickens = true; p.Common.TiltZeroDeg = 40 }},
		{`reindex "k,h"`, func(p *Plan) { p.Common.Reindex = "k,h" }},
		{`reindex "x,y,z"`, func(p *Plan) { p.Common.Reindex = "x,y,z" }},
	} {
		p := small()
		if err := p.Check(); err != nil {
			t.Fatal(err)
		}
		c.spoil(p)
		err := p.Check()
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("want %q, got %v", c.want, err)
		}
		if _, again := Invent(context.Background(), p); again == nil || again.Error() != err.Error() {
			t.Errorf("%s: Invent says %v", c.want, again)
		}
	}
}

func TestInventPanicsWithoutPlan(t *testing.T) {
	defer func() {
		if got := recover(); got != "simulate: Invent: nil plan" {
			t.Errorf("got %v", got)
		}
	}()
	_, _ = Invent(context.Background(), nil)
}

func TestDefaults(t *testing.T) {
	p := (&Plan{Common: Position{Counts: 50, Scatter: 0.1}, Crystals: []Crystal{{Wedge: &Wedge{ExchangeNM: 2000}}, {Positions: []Position{{Counts: 70}}}}}).filled()
	if p.EnergyKeV != 300 || p.SpaceGroup != "P 21 21 21" || p.DMin != 1 || p.Cell.Alpha != 90 || p.Structure.MinDistance != 1.2 {
		t.Errorf("got %+v", p)
	}
	if p.Crystals[0].Name != "L1" || p.Crystals[1].Name != "L2" || len(p.Crystals[0].Positions) != 3 {
		t.Errorf("got %+v", p.Crystals)
	}
	for i, want := range []float64{140, 225, 310} {
		q := p.Crystals[0].Positions[i]
		floatcmp.Check(t, "thickness", q.ThicknessNM, want, 0, 1e-12)
		floatcmp.Check(t, "exchange", q.Exchange, -math.Expm1(-want/2000), 0, 1e-12)
		if q.Order != i+1 || q.Counts != 50 || q.Scatter != 0.1 || q.Copies != 1 {
			t.Errorf("got %+v", q)
		}
	}
	if q := p.Crystals[1].Positions[0]; q.Counts != 70 || q.Name != "p1" || q.FrameDeg != 0.5 || q.Gain != 1 || q.SigmaFactor != 1 {
		t.Errorf("got %+v", q)
	}
}

func TestCurbFormText(t *testing.T) {
	for _, f := range []CurbForm{CurbIntensity, CurbStrength, CurbRate} {
		b, err := json.Marshal(f)
		if err != nil {
			t.Fatal(err)
		}
		var back CurbForm
		if err := json.Unmarshal(b, &back); err != nil || back != f {
			t.Errorf("%s came back as %v, %v", b, back, err)
		}
	}
	var f CurbForm
	if err := f.UnmarshalText([]byte("speed")); err == nil {
		t.Error("an unknown form passed")
	}
	if _, err := CurbForm(9).MarshalText(); err == nil || CurbForm(9).String() != "CurbForm(9)" {
		t.Error("an unknown form passed")
	}
}
