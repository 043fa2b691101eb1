package simulate

import (
	"fmt"
	"math"
	"reflect"
)

// filled returns a copy of the plan in which every default stands.
func (p *Plan) filled() Plan {
	out := *p
	fill(&out.EnergyKeV, 300)
	fill(&out.DMin, 1)
	if out.SpaceGroup == "" {
		out.SpaceGroup = "P 21 21 21"
	}
	for _, angle := range []*float64{&out.Cell.Alpha, &out.Cell.Beta, &out.Cell.Gamma} {
		fill(angle, 90)
	}
	fill(&out.Structure.MinDistance, 1.2)
	out.Structure.Atoms = clone(p.Structure.Atoms)
	out.Structure.Given = clone(p.Structure.Given)
	out.Crystals = clone(p.Crystals)
	for i := range out.Crystals {
		c := &out.Crystals[i]
		if c.Name == "" {
			c.Name = fmt.Sprintf("L%d", i+1)
		}
		c.Euler = clone(c.Euler)
		c.Positions = clone(c.Positions)
		if len(c.Positions) == 0 && c.Wedge != nil {
			c.Positions = c.Wedge.positions()
		}
		for j := range c.Positions {
			c.Positions[j] = c.Positions[j].over(&p.Common)
			c.Positions[j].fillDefaults(j)
		}
	}
	return out
}

// clone copies a slice; an empty one becomes nil, so that a plan read from a file
// equals one written in Go.
func clone[T any](v []T) []T { return append([]T(nil), v...) }

func fill(v *float64, otherwise float64) {
	if *v == 0 {
		*v = otherwise
	}
}

// over returns the position with the common value in every zero field.
func (p Position) over(common *Position) Position {
	own, shared := reflect.ValueOf(&p).Elem(), reflect.ValueOf(common).Elem()
	for i := range own.NumField() {
		f := own.Field(i)
		if f.IsZero() || (f.Kind() == reflect.Slice && f.Len() == 0) {
			f.Set(shared.Field(i))
		}
	}
	p.TiltDeg, p.GapDeg = clone(p.TiltDeg), clone(p.GapDeg)
	p.Cos, p.Sin = clone(p.Cos), clone(p.Sin)
	if p.CutBelow != nil {
		cut := *p.CutBelow
		p.CutBelow = &cut
	}
	return p
}

func (p *Position) fillDefaults(number int) {
	if p.Name == "" {
		p.Name = fmt.Sprintf("p%d", number+1)
	}
	if len(p.TiltDeg) == 0 {
		p.TiltDeg = []float64{-60, 60}
	}
	if p.Order == 0 {
		p.Order = number + 1
	}
	if p.Copies == 0 {
		p.Copies = 1
	}
	fill(&p.FrameDeg, 0.5)
	fill(&p.Counts, 200)
	fill(&p.Gain, 1)
	fill(&p.BackgroundArea, 4)
	fill(&p.SigmaFactor, 1)
	fill(&p.OutlierFactor, 3)
}

func (w *Wedge) positions() []Position {
	o := *w
	fill(&o.ThinNM, 140)
	fill(&o.ThickNM, 310)
	if o.Steps == 0 {
		o.Steps = 3
	}
	var out []Position
	for i := range max(0, o.Steps) {
		p := Position{Name: fmt.Sprintf("t%d", i+1), ThicknessNM: o.ThinNM}
		if o.Steps > 1 {
			p.ThicknessNM += (o.ThickNM - o.ThinNM) * float64(i) / float64(o.Steps-1)
		}
		if o.ExchangeNM > 0 {
			p.Exchange = 1 - math.Exp(-p.ThicknessNM/o.ExchangeNM)
		}
		out = append(out, p)
	}
	return out
}
