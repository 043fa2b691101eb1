package simulate

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/electron"
)

// Slate returns the plan of the second demonstration, "Slate, many beams": three
// crystals of a small invented structure in P 21 21 21 at 200 kV, turned from -36 to 36
// degrees, with positions of 30, 60 and 100 nm. It has no exchange of its own: hand it to
// ManyBeam for intensities in which thickness acts as physics has it, or to Invent for the
// kinematic twin, in which it does nothing.
func Slate() *Plan {
	p := &Plan{
		Title: "Slate, many beams", EnergyKeV: 200, SpaceGroup: "P 21 21 21", Seed: 3, DMin: 1,
		ThicknessScaleSU: 0.1,
		Cell:             Cell{A: 9, B: 11, C: 13, Alpha: 90, Beta: 90, Gamma: 90},
		Structure:        Structure{B: 2},
		Common:           Position{FrameDeg: 0.5, TiltDeg: []float64{-36, 36}, Background: 20, Readout: 2, Scatter: 0.03},
	}
	order := [3][3]int{{1, 2, 3}, {3, 1, 2}, {2, 3, 1}}
	for i, name := range []string{"S1", "S2", "S3"} {
		c := Crystal{Name: name}
		for j, place := range []string{"thin", "mid", "thick"} {
			t := []float64{30, 60, 100}[j]
			c.Positions = append(c.Positions, Position{
				Name: place, ThicknessNM: t, ThicknessSUNM: 0.08 * t, Order: order[i][j],
				Counts: 20 * t, Cos: []float64{0.1, 0.04 * float64(j)}, Sin: []float64{-0.15},
			})
		}
		p.Crystals = append(p.Crystals, c)
	}
	return p
}

// Shale returns a plan like Slate of a centrosymmetric crystal, "Shale, many beams": P 1 21/c
// 1, whose structure factors are real.
func Shale() *Plan {
	p := Slate()
	p.Title, p.SpaceGroup, p.Seed = "Shale, many beams", "P 1 21/c 1", 5
	p.Cell = Cell{A: 9, B: 10, C: 12, Alpha: 90, Beta: 98, Gamma: 90}
	return p
}

// ManyBeam returns a copy of a plan whose Law is a many-beam calculation: every
// crystal is turned through the widest range of its positions by electron.Rotate, and
// each position takes the intensities of its thickness, on the scale of Truth.J, to
// which they tend as the thickness goes to 0. Reflections that do not pass the sphere
// wholly, or too near the axis, are not recorded. The atoms are drawn first and
// stand in Structure.Given, so that Kinematic of the copy has the same structure and
// orientations. Exchange, curb and deviations of the plan do nothing. set may be nil; its DMin
// is that of the plan when 0.
//
// It returns an error for Wilson intensities, which have no phases, for positions of one
// crystal with different TiltZeroDeg or with MisorientedDeg, and whatever Invent and Rotate return.
func ManyBeam(ctx context.Context, plan *Plan, set *electron.BeamSettings) (*Plan, error) {
	if plan == nil {
		panic("simulate: ManyBeam: nil plan")
	}
	if plan.Structure.Wilson {
		return nil, fmt.Errorf("simulate: many beams need atoms; Wilson intensities have no phases")
	}
	out := plan.filled()
	out.Law = nil
	twin, err := Invent(ctx, &out)
	if err != nil {
		return nil, err
	}
	out.Structure.Given = clone(twin.Truth.Atoms)
	out.Structure.Atoms = nil
	var o electron.BeamSettings
	if set != nil {
		o = *set
	}
	fill(&o.DMin, out.DMin)
	cell := crystal.Cell(out.Cell)
	st := &electron.Structure{Cell: cell, Group: twin.Group, Atoms: electronAtoms(out.Structure.Given), B: out.Structure.B}
	tables := make([]map[crystal.HKL][]float64, len(out.Crystals))
	for i := range out.Crystals {
		sweep, err := out.Crystals[i].sweep(out.EnergyKeV, cell, twin.Specimens[i].Orientation)
		if err != nil {
			return nil, err
		}
		r, err := electron.Rotate(ctx, st, sweep, &o)
		if err != nil {
			return nil, fmt.Errorf("simulate: crystal %s: %w", out.Crystals[i].Name, err)
		}
		tables[i] = onScale(r, twin)
	}
	out.Law = func(c, position int, h crystal.HKL) (float64, bool) {
		j, ok := tables[c][h]
		if !ok {
			return 0, false
		}
		return j[position], true
	}
	return &out, nil
}

// sweep covers all positions of a crystal.
func (c *Crystal) sweep(keV float64, cell crystal.Cell, orientation [3][3]float64) (*electron.Sweep, error) {
	s := &electron.Sweep{EnergyKeV: keV, Reciprocal: reciprocalBasis(cell), Orientation: orientation, TiltZeroDeg: c.Positions[0].TiltZeroDeg}
	for i := range c.Positions {
		p := &c.Positions[i]
		if p.TiltZeroDeg != s.TiltZeroDeg || p.MisorientedDeg != 0 {
			return nil, fmt.Errorf("simulate: crystal %s: many beams need one tilt_zero_deg and no misoriented_deg for all positions", c.Name)
		}
		if i == 0 {
			s.TiltDeg = [2]float64{p.TiltDeg[0], p.TiltDeg[1]}
		}
		s.TiltDeg[0], s.TiltDeg[1] = math.Min(s.TiltDeg[0], p.TiltDeg[0]), math.Max(s.TiltDeg[1], p.TiltDeg[1])
		s.ThicknessNM = append(s.ThicknessNM, p.ThicknessNM)
	}
	return s, nil
}

// onScale brings rotated intensities to the scale of the truth of the twin.
func onScale(r *electron.Rotated, twin *Series) map[crystal.HKL][]float64 {
	truth := map[crystal.HKL]float64{}
	for u, h := range twin.Truth.HKL {
		truth[h] = twin.Truth.J[u]
	}
	var j, f float64
	for i, h := range r.HKL {
		j += truth[twin.Group.Canonical(h)]
		f += r.Kinematic[i]
	}
	table := make(map[crystal.HKL][]float64, len(r.HKL))
	for i, h := range r.HKL {
		row := make([]float64, len(r.Dynamical))
		for t := range row {
			row[t] = r.Dynamical[t][i] * j / f
		}
		table[h] = row
	}
	return table
}
