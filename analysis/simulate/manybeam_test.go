package simulate

import (
	"context"
	"math"
	"strings"
	"testing"

	"thinward/analysis/electron"
	"thinward/analysis/internal/floatcmp"
)

func tinySlate() *Plan {
	p := Slate()
	p.Cell = Cell{A: 6, B: 7, C: 8}
	p.DMin = 1.5
	p.Common.Noiseless, p.Common.Scatter, p.Common.TiltDeg = true, 0, []float64{-20, 25}
	p.Crystals = p.Crystals[:2]
	for i := range p.Crystals {
		p.Crystals[i].Positions[0].ThicknessNM = 0.05
	}
	return p
}

func TestManyBeamLaw(t *testing.T) {
	plan := tinySlate()
	law, err := ManyBeam(context.Background(), plan, &electron.BeamSettings{StepDeg: 0.5})
	if err != nil {
		t.Fatal(err)
	}
	if plan.Law != nil || plan.Structure.Given != nil {
		t.Error("the plan was changed")
	}
	s := invent(t, law)
	twin := invent(t, law.Kinematic())
	again := invent(t, plan)
	for u := range twin.Truth.J {
		floatcmp.Check(t, "truth of the twin", twin.Truth.J[u], s.Truth.J[u], 0, 0)
		floatcmp.Check(t, "truth of the plan", again.Truth.J[u], s.Truth.J[u], 0, 0)
	}
	for i := range s.Specimens {
		if s.Specimens[i].Orientation != twin.Specimens[i].Orientation {
			t.Errorf("crystal %d: the twin is turned otherwise", i)
		}
		for j := range s.Specimens[i].Positions {
			m := &s.Specimens[i].Positions[j]
			worst := 0.0
			for r, u := range m.Unique {
				phi := m.Rows.Phi[r]
				unit := m.Plan.Counts * math.Exp(m.Plan.lnK(phi))
				worst = math.Max(worst, math.Abs(m.Expected[r]/unit-s.Truth.J[u]))
			}
			t.Logf("crystal %d position %d: %d rows, farthest from kinematic %.3g", i, j, len(m.Unique), worst)
			if len(m.Unique) < 40 {
				t.Errorf("crystal %d position %d: %d rows", i, j, len(m.Unique))
			}
			// At 0.05 nm the law is kinematic, on the scale of Truth.J, beyond it is not.
			if j == 0 {
				floatcmp.Check(t, "thin limit", worst, 0, 0.02, 0)
			} else if !(worst > 0.1) {
				t.Errorf("crystal %d position %d: no dynamical change", i, j)
			}
		}
	}
}

func TestManyBeamRefuses(t *testing.T) {
	for _, c := range []struct {
		change func(*Plan)
		want   string
	}{
		{func(p *Plan) { p.Structure.Wilson = true }, "no phases"},
		{func(p *Plan) { p.Common.MisorientedDeg = 0.1 }, "no misoriented_deg"},
		{func(p *Plan) { p.Crystals[1].Positions[2].TiltZeroDeg = 3 }, "crystal S2: many beams need one tilt_zero_deg"},
		{func(p *Plan) { p.DMin = -1 }, "d_min"},
		{func(p *Plan) { p.Common.TiltDeg = []float64{-88, 20} }, "85 degrees"},
	} {
		p := tinySlate()
		c.change(p)
		if _, err := ManyBeam(context.Background(), p, &electron.BeamSettings{StepDeg: 1}); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, want %q", err, c.want)
		}
	}
}
