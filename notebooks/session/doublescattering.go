package session

import (
	"thinward/analysis"
	"thinward/analysis/figure"
)

// DoubleScattering shows what reflections gain where pairs that add up to them stood
// on the same frame, without a verdict.
func (s *Session) DoubleScattering() *View {
	s.upTo(stepScaling)
	list, err := s.study.DoubleScattering(Context())
	if err != nil {
		s.fail(&analysis.StepError{Step: stepScaling, Err: err})
	}
	return doubleFigure(list)
}

func doubleFigure(list []analysis.Predicted) *View {
	fv := &figureView{title: "Predictor of double scattering", pick: "Crystal", empty: "No position has frame numbers and equivalents.",
		caption: "An observation against its equivalents, by how much reflections g and h \u2212 g that add up to it stood on its frame, what the whole frame holds taken off. Scattering twice makes the line rise, the more the thicker; scale errors of frames can look the same, so that it is drawn without a verdict."}
	g := newGrid("Predictor of double scattering", "position", "observations", "z within equivalents", "gain in the highest bin", "s.e.", "remark").words(5)
	var order []string
	panels := map[string]*figure.Panels{}
	for k := range list {
		v := &list[k]
		if v.Why != "" || len(v.Bins) == 0 {
			g.add(v.Crystal+"/"+v.Position, "", "", "", "", v.Why)
			continue
		}
		p := panels[v.Crystal]
		if p == nil {
			p = &figure.Panels{Title: "Gain over equivalents against the predictor of double scattering, crystal " + v.Crystal, Desc: "Mean gain over equivalents in units of its noise in ten bins of the predictor, one panel a position, with 95 % intervals.",
				X: figure.Axis{Label: "predictor within equivalents (its root mean square is 1)"}, Y: figure.Axis{Label: "gain over equivalents (in noise)", Zero: true}}
			panels[v.Crystal] = p
			order = append(order, v.Crystal)
		}
		c := figure.Curve{Style: figure.Marks}
		n := 0
		for _, b := range v.Bins {
			c.X, c.Y = append(c.X, b.Predictor), append(c.Y, b.Gain)
			c.Lo, c.Hi = append(c.Lo, b.Gain-normal95*b.SE), append(c.Hi, b.Gain+normal95*b.SE)
			n += b.N
		}
		p.Panel = append(p.Panel, figure.Panel{Name: v.Position, Curves: []figure.Curve{c}})
		last := v.Bins[len(v.Bins)-1]
		g.add(v.Crystal+"/"+v.Position, count(n), number(v.Z, 1), number(last.Gain, 3), number(last.SE, 3), "")
	}
	for _, name := range order {
		fv.add(name, panels[name])
	}
	fv.summary = g
	return fv.view()
}
