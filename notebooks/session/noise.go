package session

import (
	"fmt"
	"math"
	"sort"

	"thinward/analysis"
	"thinward/analysis/figure"
	"thinward/analysis/scaling"
)

// scaled gives the fit of every crystal.
func (s *Session) scaled() []*analysis.ScaledCrystal {
	s.upTo(stepScaling)
	list, err := s.study.Scale(Context())
	if err != nil {
		s.fail(&analysis.StepError{Step: stepScaling, Err: err})
	}
	return list
}

func (s *Session) positionName(crystal int, sc *analysis.ScaledCrystal, p int) string {
	return s.study.Series.Crystals[crystal].Positions[sc.Order[p]].Name
}

// both gives the normalised residuals before and after the noise model.
func both(sc *analysis.ScaledCrystal, from scaling.Reference) (before, after []float64) {
	return scaling.Residuals(sc.Input, sc.Fit, nil, from), scaling.Residuals(sc.Input, sc.Fit, sc.Noise, from)
}

// NormalPlots shows residuals of equivalents against the quantiles of the
// normal law, with the sigmas as reported and with the noise model.
func (s *Session) NormalPlots() *View {
	fv := &figureView{title: "Normal probability plots", pick: "Crystal", empty: "No reflection was measured at two equivalent indices.",
		caption: "Scatter of symmetry equivalents over its sigma, in order of size: true sigmas and a normal law draw the dashed diagonal. A steeper line says that sigmas are too small, an S at the ends that outliers are more than the normal law allows."}
	g := newGrid("Normal probability plots: slope (1 when sigmas are true) and residuals beyond 3", "position", "residuals", "slope, as reported", "with the noise model", "beyond 3, as reported", "with the noise model")
	for i, sc := range s.scaled() {
		name := s.study.Series.Crystals[i].Name
		before, after := both(sc, scaling.FromPosition)
		b, a := scaling.NormalPlots(sc.Input, before), scaling.NormalPlots(sc.Input, after)
		p := &figure.Panels{Title: "Normal probability plot, crystal " + name, Desc: "Ordered residuals of symmetry equivalents against normal quantiles, one panel a position.",
			X: figure.Axis{Label: "normal quantile", Lo: -4, Hi: 4}, Y: figure.Axis{Label: "residual over its sigma", Lo: -6, Hi: 6}}
		for k := range b {
			if b[k].N == 0 {
				continue
			}
			place := s.positionName(i, sc, b[k].Position)
			p.Panel = append(p.Panel, figure.Panel{Name: place, Curves: []figure.Curve{
				{Name: "as reported", X: b[k].Expected, Y: b[k].Observed}, {Name: "with the noise model", X: a[k].Expected, Y: a[k].Observed},
				{Name: "normal law", X: []float64{-4, 4}, Y: []float64{-4, 4}, Style: figure.Ghost}}})
			g.add(name+"/"+place, count(b[k].N), number(b[k].Slope, 2), number(a[k].Slope, 2), percent(b[k].Beyond3, 1), percent(a[k].Beyond3, 1))
		}
		fv.add(name, p)
	}
	fv.summary = g
	return fv.view()
}

// ChiByStrength shows the mean squared residual against strength.
func (s *Session) ChiByStrength() *View {
	return s.chi(scaling.ByStrength, "strength", figure.Axis{Label: "strength (joint J over local mean)", Scale: figure.Root}, func(v float64) float64 { return v })
}

// ChiByAngle shows the mean squared residual against rotation angle.
func (s *Session) ChiByAngle() *View {
	return s.chi(scaling.ByAngle, "rotation angle", figure.Axis{Label: "rotation angle (\u00b0)"}, func(v float64) float64 { return v })
}

// ChiByResolution shows the mean squared residual against resolution.
func (s *Session) ChiByResolution() *View {
	return s.chi(scaling.ByResolution, "resolution", figure.Axis{Label: "d (\u00c5), even in 1/d\u00b2", Column: "1/d\u00b2 (\u00c5\u207b\u00b2)"}, func(s2 float64) float64 { return 4 * s2 })
}

// chiBins is the number of equal-count bins a position.
const chiBins = 10

func (s *Session) chi(by scaling.By, words string, x figure.Axis, place func(float64) float64) *View {
	fv := &figureView{title: "\u03c7\u00b2 by " + words, pick: "Crystal", empty: "No position has what these bins are made of.",
		caption: "Mean squared residual of equivalents over the variance, 1 (dashed) when variances are true everywhere. A line that stays flat after the noise model says that one pair a, b serves all reflections; a slope says that it does not."}
	g := newGrid("\u03c7\u00b2 by "+words+": lowest and highest of "+count(chiBins)+" bins", "position", "as reported: lowest", "highest", "with the noise model: lowest", "highest")
	for i, sc := range s.scaled() {
		name := s.study.Series.Crystals[i].Name
		before, after := both(sc, scaling.FromPosition)
		lists := [2][]scaling.ChiBin{scaling.ChiSquare(sc.Input, sc.Fit, before, by, chiBins), scaling.ChiSquare(sc.Input, sc.Fit, after, by, chiBins)}
		p := &figure.Panels{Title: "\u03c7\u00b2 by " + words + ", crystal " + name, Desc: "Mean squared residual in bins of equal count, one panel a position.", X: x, Y: figure.Axis{Label: "\u03c7\u00b2 of equivalents", Zero: true}}
		var all []float64
		for q := range sc.Order {
			panel := figure.Panel{Name: s.positionName(i, sc, q)}
			row := []string{name + "/" + panel.Name}
			for k, list := range lists {
				c := figure.Curve{Name: []string{"as reported", "with the noise model"}[k], Style: figure.Joined}
				lo, hi := math.Inf(1), math.Inf(-1)
				for _, b := range list {
					if b.Position != q || b.N == 0 {
						continue
					}
					c.X, c.Y = append(c.X, place((b.Lo+b.Hi)/2)), append(c.Y, b.ChiSquare)
					lo, hi = min(lo, b.ChiSquare), max(hi, b.ChiSquare)
				}
				if len(c.X) == 0 {
					continue
				}
				all = append(all, c.X...)
				panel.Curves = append(panel.Curves, c)
				row = append(row, number(lo, 2), number(hi, 2))
			}
			if len(panel.Curves) == 0 {
				continue
			}
			x0 := panel.Curves[0].X
			panel.Curves = append(panel.Curves, figure.Curve{Name: "true variances", X: []float64{x0[0], x0[len(x0)-1]}, Y: []float64{1, 1}, Style: figure.Ghost})
			p.Panel = append(p.Panel, panel)
			g.add(row...)
		}
		if by == scaling.ByResolution {
			p.X.Marks = spacings(all)
		}
		fv.add(name, p)
	}
	fv.summary = g
	return fv.view()
}

// residualStep is the width in degrees of the steps of AngleResiduals.
const residualStep = 4

// AngleResiduals shows what the scale curve leaves over in the angle.
func (s *Session) AngleResiduals() *View {
	fv := &figureView{title: "Residuals of ln K by angle", pick: "Crystal", empty: "No position has rotation angles.",
		caption: fmt.Sprintf("Mean of what the scale leaves over, in steps of %d degrees with 95 %% intervals: a run of steps off zero says that the knots are too far apart or that frames differ in a way no smooth curve follows.", residualStep)}
	g := newGrid("Residuals of ln K by angle", "position", "steps", "root mean square", "largest", "at (\u00b0)", "steps beyond 3 s.u.")
	for i, sc := range s.scaled() {
		name := s.study.Series.Crystals[i].Name
		bins, err := scaling.AngleResiduals(sc.Input, sc.Fit, sc.Noise, residualStep)
		if err != nil {
			s.fail(&analysis.StepError{Step: stepScaling, Err: err})
		}
		p := &figure.Panels{Title: "Residuals of ln K against rotation angle, crystal " + name, Desc: "Mean residual of ln K in steps of angle, one panel a position.",
			X: figure.Axis{Label: "rotation angle (\u00b0)"}, Y: figure.Axis{Label: "ln (observed / scale model)", Zero: true}}
		for q := range sc.Order {
			c := figure.Curve{Style: figure.Marks}
			place := s.positionName(i, sc, q)
			sum, most, at, far := 0.0, 0.0, math.NaN(), 0
			for _, b := range bins {
				if b.Position != q || math.IsNaN(b.LnK) {
					continue
				}
				c.X, c.Y = append(c.X, (b.Lo+b.Hi)/2), append(c.Y, b.LnK)
				c.Lo, c.Hi = append(c.Lo, b.LnK-normal95*b.SE), append(c.Hi, b.LnK+normal95*b.SE)
				sum += b.LnK * b.LnK
				if math.Abs(b.LnK) > math.Abs(most) {
					most, at = b.LnK, (b.Lo+b.Hi)/2
				}
				if math.Abs(b.LnK) > 3*b.SE {
					far++
				}
			}
			if len(c.X) == 0 {
				continue
			}
			p.Panel = append(p.Panel, figure.Panel{Name: place, Curves: []figure.Curve{c}})
			g.add(name+"/"+place, count(len(c.X)), number(math.Sqrt(sum/float64(len(c.X))), 3), number(most, 3), number(at, 0), count(far))
		}
		fv.add(name, p)
	}
	fv.summary = g
	return fv.view()
}

// outliersShown bounds the list of one series.
const outliersShown = 15

// Outliers lists the observations that the scale fit weighted down, the
// farthest first. None is removed.
func (s *Session) Outliers() *View {
	in, err := s.study.Intake(Context())
	if err != nil {
		s.fail(&analysis.StepError{Step: stepIntake, Err: err})
	}
	type one struct {
		scaling.Outlier
		where string
	}
	var list []one
	total := 0
	for i, sc := range s.scaled() {
		total += sc.Input.Len()
		for _, o := range sc.Fit.Outliers {
			list = append(list, one{o, s.study.Series.Crystals[i].Name + "/" + s.positionName(i, sc, int(o.Position))})
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return math.Abs(list[a].Z) > math.Abs(list[b].Z) })
	g := newGrid(fmt.Sprintf("Observations weighted down below a tenth: %d of %d", len(list), total), "position", "h k l", "d (\u00c5)", "angle (\u00b0)", "I", "expected", "\u03c3", "z", "weight").words(1)
	for _, o := range list[:min(len(list), outliersShown)] {
		h := in.Catalogue.RawHKL(o.Raw)
		g.add(o.where, fmt.Sprint(h.H, " ", h.K, " ", h.L), number(1/(2*math.Sqrt(o.S2)), 2), number(o.Phi, 1), auto(o.I), auto(o.Expected), auto(o.Sigma), number(o.Z, 1), number(o.Weight, 3))
	}
	return g.view("Outliers")
}
