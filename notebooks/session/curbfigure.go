package session

import (
	"fmt"
	"math"

	"thinward/analysis"
	"thinward/analysis/electron"
	"thinward/analysis/figure"
)

// CurbFigure draws what the fitted curb takes from strong reflections beside what two
// beams could take at the thicknesses of each crystal.
func (s *Session) CurbFigure() *View { return curbFigure(s.upTo(stepExpectation)) }

// curbReach is the strength up to which the curves are drawn: few reflections lie above.
const curbReach = 10

func curbFigure(r *analysis.Result) *View {
	fv := &figureView{title: "Loss of the strong beside two beams", empty: "No curb was fitted, or the energy of the electrons is not known.",
		caption: "Solid: the thick over the thin position as the curb alone has it, with its interval; exchange and offset are taken out. Dashed: two beams integrated over rotation (Blackman 1939) at the two thicknesses, for a perfect crystal of random light atoms without a B factor, the most that two beams could take. Many beams, bending and mosaicity blunt it, and a detector that saturates bends the solid line too: the distance between the two has no meaning of its own."}
	e := r.Expectation
	if e == nil || !(e.TwoBeam.ExtinctionNM > 0) {
		return fv.view()
	}
	p := &figure.Panels{Title: "Thick over thin against strength: fitted curb and two beams", Desc: "One panel a crystal. ",
		X: figure.Axis{Label: "J over its mean in the lowest third of s\u00b2", Scale: figure.Root}, Y: figure.Axis{Label: "thick over thin position"}}
	g := newGrid("Loss of the strong beside two beams", "contrast", "q", "interval", "fitted at strength 1", "two beams at 1", "fitted at 4", "two beams at 4")
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		if !c.Primary || math.IsNaN(c.Curb.Q) || math.IsInf(c.Curb.Hi-c.Curb.Lo, 0) {
			continue
		}
		fitted, two := figure.Curve{Name: "fitted"}, figure.Curve{Name: "two beams", Style: figure.Ghost}
		for _, x := range e.TwoBeam.Strength {
			if x > curbReach {
				break
			}
			fitted.X, fitted.Y = append(fitted.X, x), append(fitted.Y, curbed(c.Curb.Q, x))
			fitted.Lo, fitted.Hi = append(fitted.Lo, curbed(c.Curb.Hi, x)), append(fitted.Hi, curbed(c.Curb.Lo, x))
			two.X, two.Y = append(two.X, x), append(two.Y, twoBeamRatio(c, e, x))
		}
		p.Panel = append(p.Panel, figure.Panel{Name: c.Crystal, Note: "q = " + number(c.Curb.Q, 3), Curves: []figure.Curve{fitted, two}})
		p.Desc += fmt.Sprintf("%s: at strength 4 the fitted curb leaves %s, two beams %s. ", c.Crystal, number(curbed(c.Curb.Q, 4), 2), number(twoBeamRatio(c, e, 4), 2))
		g.add(contrastName(c), number(c.Curb.Q, 3), between(c.Curb.Lo, c.Curb.Hi, 3), number(curbed(c.Curb.Q, 1), 3), number(twoBeamRatio(c, e, 1), 3), number(curbed(c.Curb.Q, 4), 3), number(twoBeamRatio(c, e, 4), 3))
	}
	fv.summary = g
	fv.add("", p)
	return fv.view()
}

// curbed is the intensity that a curb q leaves of strength x, 1 - q x, not below 0.
func curbed(q, x float64) float64 { return math.Max(0, 1-q*x) }

// twoBeamRatio is Blackman's ratio of the thick over the thin position at strength x.
func twoBeamRatio(c *analysis.ContrastResult, e *analysis.Expectation, x float64) float64 {
	a := math.Pi * math.Sqrt(x) / e.TwoBeam.ExtinctionNM
	return electron.BlackmanRatio(a*c.ThicknessNM[1]) / electron.BlackmanRatio(a*c.ThicknessNM[0])
}
