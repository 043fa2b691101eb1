package session

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"thinward/analysis"
	"thinward/analysis/figure"
	"thinward/analysis/intensity"
)

// ScaleCurves shows ln K against the rotation angle.
func (s *Session) ScaleCurves() *View { return scaleCurves(s.upTo(stepScaling)) }

func scaleCurves(r *analysis.Result) *View {
	fv := &figureView{title: "Scale curves", empty: "No scale was fitted in the angle.",
		caption: "The scale of each position against the rotation angle, relative to the thinnest; curves of one crystal should run nearly alike, since the path through the slab changes alike; at high tilt a thicker position may fall behind, as inelastic loss grows with the path. Any other curve of its own points to bending, drift or a shadow."}
	g := newGrid("Scale against angle", "position", "mean ln K", "lowest", "highest", "curve").words(4)
	p := &figure.Panels{Title: "ln K against rotation angle", Desc: "Scale curve of every position, one panel a crystal.",
		X: figure.Axis{Label: "rotation angle (\u00b0)"}, Y: figure.Axis{Label: "ln K"}}
	for _, name := range crystalsOf(r) {
		panel := figure.Panel{Name: name}
		for i := range r.Scaling {
			x := &r.Scaling[i]
			if x.Crystal != name {
				continue
			}
			lo, hi := math.NaN(), math.NaN()
			for k, v := range x.CurveLnK {
				if k == 0 || v < lo {
					lo = v
				}
				if k == 0 || v > hi {
					hi = v
				}
			}
			shape := "in angle"
			if x.Constant {
				shape = "constant"
			}
			g.add(x.Crystal+"/"+x.Position, number(x.LnK, 3), number(lo, 3), number(hi, 3), shape)
			if len(x.CurveDeg) > 0 && len(x.CurveDeg) == len(x.CurveLnK) {
				panel.Curves = append(panel.Curves, figure.Curve{Name: x.Position, X: x.CurveDeg, Y: x.CurveLnK})
			}
		}
		if len(panel.Curves) > 0 {
			p.Panel = append(p.Panel, panel)
		}
	}
	fv.summary = g
	fv.add("", p)
	return fv.view()
}

func crystalsOf(r *analysis.Result) []string {
	var out []string
	seen := map[string]bool{}
	for i := range r.Intake {
		if name := r.Intake[i].Crystal; !seen[name] {
			seen[name] = true
			out = append(out, name)
		}
	}
	return out
}

// SizesFigure shows the exchange of every contrast with its interval.
func (s *Session) SizesFigure() *View {
	r := s.upTo(stepCrystals)
	return sizesFigure(r, chosen(s.study.Series.Primary))
}

// chosen says how the primary contrasts came to be.
func chosen(p analysis.Primary) string {
	if p.Thin == "" && p.Thick == "" {
		return "by default, thinnest against thickest"
	}
	return "named in the manifest"
}

func sizesFigure(r *analysis.Result, chosen string) *View {
	fv := &figureView{title: "Exchange of every contrast", empty: "No exchange was estimated.",
		caption: "Each interval holds m, the share of intensity moved from strong to weak reflections; intervals that clear zero on the right show it. Squares are the primary contrasts (" + chosen + "); diamonds are all crystals together."}
	g := newGrid("Exchange of every contrast", "contrast", "m", "interval")
	f := &figure.Forest{Title: "Exchange m of every contrast", Desc: "Estimate and interval of m by crystal and contrast. ", X: figure.Axis{Label: "exchange m", Zero: true}}
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		group := "crystal " + c.Crystal
		if c.ThickCrystal != "" {
			group = "between crystals"
		}
		f.Rows = append(f.Rows, figure.Row{Group: group, Name: c.Thin + " \u2212 " + c.Thick, Value: c.Exchange.M, Lo: c.Exchange.Lo, Hi: c.Exchange.Hi, Lead: c.Primary, Note: c.Exchange.Why})
		g.add(contrastName(c), number(c.Exchange.M, 3), between(c.Exchange.Lo, c.Exchange.Hi, 3))
		if c.Primary {
			f.Desc += fmt.Sprintf("%s: %s (%s). ", contrastName(c), number(c.Exchange.M, 3), between(c.Exchange.Lo, c.Exchange.Hi, 3))
		}
	}
	if c := r.Crystals; c != nil {
		for _, row := range []struct {
			name string
			v    analysis.Interval
		}{{"in these crystals", c.InThese}, {"in crystals like these", c.LikeThese}} {
			f.Rows = append(f.Rows, figure.Row{Group: "primary contrasts together", Name: row.name, Value: row.v.Value, Lo: row.v.Lo, Hi: row.v.Hi, Summary: true, Note: row.v.Why})
			g.add(row.name, number(row.v.Value, 3), between(row.v.Lo, row.v.Hi, 3))
		}
	}
	fv.summary = g
	if len(f.Rows) > 0 {
		fv.add("", f)
	}
	return fv.view()
}

// ThicknessFigure shows mu against thickness, a line a crystal.
func (s *Session) ThicknessFigure() *View { return thicknessFigure(s.upTo(stepCrystals)) }

func thicknessFigure(r *analysis.Result) *View {
	fv := &figureView{title: "Growth with thickness", empty: "The series does not allow a line over thickness.",
		caption: "Lines that rise from the thinnest position of each crystal, where \u03bc is zero by definition, say that the exchange grows with thickness; lines that lie on each other say that the crystals agree. Where the points of a crystal fall somewhere, a dashed line is the nearest one that never falls."}
	g := newGrid("Growth with thickness", "crystal", "thickness (nm)", "\u03bc", "95 % interval", "nearest that never falls")
	if r.Thickness == nil {
		return fv.view()
	}
	p := &figure.Panels{Title: "\u03bc = \u2212ln(1 \u2212 m) against thickness", Desc: "One line a crystal, with 95 % intervals. ",
		X: figure.Axis{Label: "thickness (nm)"}, Y: figure.Axis{Label: "\u03bc = \u2212ln(1 \u2212 m), against the thinnest", Zero: true}}
	panel := figure.Panel{}
	for i := range r.Thickness.Lines {
		l := &r.Thickness.Lines[i]
		n := min(len(l.T), len(l.Mu), len(l.MuSE))
		order := make([]int, n)
		for k := range order {
			order[k] = k
		}
		sort.SliceStable(order, func(a, b int) bool { return l.T[order[a]] < l.T[order[b]] })
		c, rising := figure.Curve{Name: l.Crystal, Style: figure.Joined}, figure.Curve{Name: l.Crystal + ", nearest that never falls", Style: figure.Ghost}
		falls := false
		for _, k := range order {
			level := math.NaN()
			if k < len(l.Rising) {
				level = l.Rising[k]
				falls = falls || level != l.Mu[k]
			}
			rising.X, rising.Y = append(rising.X, l.T[k]), append(rising.Y, level)
			c.X, c.Y = append(c.X, l.T[k]), append(c.Y, l.Mu[k])
			c.Lo, c.Hi = append(c.Lo, l.Mu[k]-normal95*l.MuSE[k]), append(c.Hi, l.Mu[k]+normal95*l.MuSE[k])
			g.add(l.Crystal, number(l.T[k], 0), number(l.Mu[k], 3), between(l.Mu[k]-normal95*l.MuSE[k], l.Mu[k]+normal95*l.MuSE[k], 3), number(level, 3))
		}
		if n > 0 {
			panel.Curves = append(panel.Curves, c)
		}
		if falls {
			panel.Curves = append(panel.Curves, rising)
		}
	}
	if len(panel.Curves) > 0 {
		p.Panel = []figure.Panel{panel}
	}
	fv.summary = g
	fv.add("", p)
	return fv.view()
}

// normal95 is the 97.5 % point of the standard normal distribution.
const normal95 = 1.959963984540054

// SpecificationFigure shows m under every other choice, one column a crystal.
func (s *Session) SpecificationFigure() *View { return specificationFigure(s.upTo(stepSpecification)) }

// columnsShown bounds the crystals that stand beside one another.
const columnsShown = 4

func specificationFigure(r *analysis.Result) *View {
	fv := &figureView{title: "m under other choices", pick: "Crystals", empty: "No other choices were tried.",
		caption: "Every row is the same data under one choice changed; the square is the leading analysis, and the pale band behind it its interval. A row that leaves the band shows a choice that matters; rows of axes that share noise or deviations with the difference are known to err and stand here to be compared."}
	g := newGrid("m under other choices", "crystal", "choice", "level", "m", "interval").words(1, 2)
	var columns []figure.ForestColumn
	for _, name := range crystalsOf(r) {
		c := figure.ForestColumn{Name: name}
		for _, x := range r.Specification {
			if x.Crystal != name {
				continue
			}
			level := x.Level
			if x.Leading {
				level = "the leading analysis"
			}
			c.Rows = append(c.Rows, figure.Row{Group: x.Choice, Name: level, Value: x.M.Value, Lo: x.M.Lo, Hi: x.M.Hi, Lead: x.Leading, Note: x.M.Why})
			g.add(name, x.Choice, x.Level, number(x.M.Value, 3), between(x.M.Lo, x.M.Hi, 3))
		}
		if len(c.Rows) > 0 {
			columns = append(columns, c)
		}
	}
	for len(columns) > 0 {
		some := columns[:min(len(columns), columnsShown)]
		columns = columns[len(some):]
		var names []string
		for _, c := range some {
			names = append(names, c.Name)
		}
		list := strings.Join(names, ", ")
		fv.add(list, &figure.ForestColumns{Title: "m under other choices, " + list, Desc: "Estimate and interval of m with one choice of the analysis changed at a time, one column a crystal.", X: figure.Axis{Label: "exchange m", Zero: true}, Columns: some})
	}
	fv.summary = g
	return fv.view()
}

// ControlsFigure shows what each control found beside what it should.
func (s *Session) ControlsFigure() *View { return controlsFigure(s.upTo(stepControls)) }

func controlsFigure(r *analysis.Result) *View {
	fv := &figureView{title: "Controls", empty: "No control was run.",
		caption: "The dashed tick is the m that the control must find; an interval that misses it by more than chance allows says that this pipeline errs on these data; the table gives the verdicts and says what each control can and cannot see."}
	g := newGrid("Controls", "control", "crystal", "expected m", "found m").words(1)
	f := &figure.Forest{Title: "Controls: m found and expected", Desc: "Estimate and interval of m in each control, with the expected value.", X: figure.Axis{Label: "exchange m", Zero: true}}
	for _, c := range byControl(r.Controls) {
		m := bounded(c.M)
		f.Rows = append(f.Rows, figure.Row{Group: c.Control, Name: allCrystals(c.Crystal), Value: m.Value, Lo: m.Lo, Hi: m.Hi, Target: c.Expected, HasTarget: !math.IsNaN(c.Expected), Note: c.Why})
		g.add(c.Control, allCrystals(c.Crystal), number(c.Expected, 3), withInterval(m, 3))
	}
	fv.summary = g
	if len(f.Rows) > 0 {
		fv.add("", f)
	}
	return fv.view()
}

// byControl brings the controls of one kind together, each kind where its first one
// stands.
func byControl(list []analysis.ControlResult) []analysis.ControlResult {
	first := map[string]int{}
	for i := range list {
		if _, ok := first[list[i].Control]; !ok {
			first[list[i].Control] = i
		}
	}
	out := append([]analysis.ControlResult(nil), list...)
	sort.SliceStable(out, func(i, j int) bool { return first[out[i].Control] < first[out[j].Control] })
	return out
}

// allCrystals names the crystal of a number, which of a number of all has no name.
func allCrystals(name string) string {
	if name == "" {
		return "all crystals"
	}
	return name
}

// ForbiddenFigure shows the forbidden reflections against thickness.
func (s *Session) ForbiddenFigure() *View { return forbiddenFigure(s.upTo(stepForbidden)) }

func forbiddenFigure(r *analysis.Result) *View {
	fv := &figureView{title: "Forbidden reflections against thickness", empty: "No forbidden reflection was recorded.",
		caption: "Scattering more than once fills what screw axes and glide planes forbid, the more the thicker the crystal, and no scale can imitate that; background left in the intensities and strong neighbours that run over can (see offset and bleed in the ledger). Where a centring forbids there is no lattice point to be filled: such reflections are left out here and stand in the table apart, as a null for background. A level that stays at every thickness points to a wrong space group instead. Axial reflections fill in some orientations and not in others, so that a few of them say little."}
	for i := range r.Forbidden {
		if w := r.Forbidden[i].Why; w == intensity.OnlyCentring || w == intensity.NoneForbidden {
			fv.empty = "Nothing to draw: " + w + "."
		}
	}
	thick := map[string]float64{}
	for i := range r.Intake {
		thick[r.Intake[i].Crystal+"/"+r.Intake[i].Position] = r.Intake[i].ThicknessNM
	}
	g := newGrid("Forbidden reflections against thickness", "crystal", "thickness (nm)", "reflections", "ratio", "s.u.")
	p := &figure.Panels{Title: "Forbidden over allowed intensity against thickness", Desc: "Mean intensity of the forbidden reflections over the local mean of the allowed ones, one line a crystal, with 95 % intervals.",
		X: figure.Axis{Label: "thickness (nm)"}, Y: figure.Axis{Label: "mean intensity over local mean of the allowed", Zero: true}}
	panel := figure.Panel{}
	for _, name := range crystalsOf(r) {
		var list []analysis.Forbidden
		for _, f := range r.Forbidden {
			if f.Crystal == name && f.Element == "all" && f.N > 0 && !math.IsNaN(f.Ratio) {
				list = append(list, f)
			}
		}
		at := func(f analysis.Forbidden) float64 { return thick[f.Crystal+"/"+f.Position] }
		sort.SliceStable(list, func(i, j int) bool { return at(list[i]) < at(list[j]) })
		c := figure.Curve{Name: name, Style: figure.Joined}
		for _, f := range list {
			c.X, c.Y = append(c.X, at(f)), append(c.Y, f.Ratio)
			c.Lo, c.Hi = append(c.Lo, f.Ratio-normal95*f.SU), append(c.Hi, f.Ratio+normal95*f.SU)
			g.add(name, number(at(f), 0), count(f.N), number(f.Ratio, 4), number(f.SU, 4))
		}
		if len(list) > 0 {
			panel.Curves = append(panel.Curves, c)
		}
	}
	if len(panel.Curves) > 0 {
		p.Panel = []figure.Panel{panel}
	}
	fv.summary = g
	fv.add("", p)
	return fv.view()
}

// BudgetFigure shows what becomes of the electrons at each thickness.
func (s *Session) BudgetFigure() *View { return budgetFigure(s.upTo(stepExpectation)) }

func budgetFigure(r *analysis.Result) *View {
	fv := &figureView{title: "Scattering budget", empty: "No mean free paths are known: neither given nor to be had from a composition.",
		caption: "How many electrons were scattered once, several times or inelastically at each thickness, by mean free paths: an aid to interpretation, not a prediction of m. Inelastic electrons count as lost, as behind a zero-loss filter; without one most of them stay in their spots."}
	e := r.Expectation
	if e == nil || len(e.Budget) == 0 {
		return fv.view()
	}
	if e.Uncertainty > 0 {
		fv.caption += " Those that were estimated are uncertain by " + percent(e.Uncertainty, 0) + "; the ranges in the table are what that leaves open."
	}
	f := &figure.Shares{Title: "Fate of the electrons against thickness", Desc: "Shares that are unscattered, scattered once elastically, several times elastically, and inelastically.",
		X: figure.Axis{Label: "thickness (nm)"}, Y: figure.Axis{Label: "share of the electrons"}}
	list := append([]analysis.Budget(nil), e.Budget...)
	sort.SliceStable(list, func(i, j int) bool { return list[i].ThicknessNM < list[j].ThicknessNM })
	parts := [4]figure.Part{{Name: "unscattered"}, {Name: "once, elastic"}, {Name: "several times, elastic"}, {Name: "inelastic"}}
	g := newGrid("Scattering budget", "thickness (nm)", "unscattered", "once, elastic", "several times, elastic", "inelastic")
	for _, b := range list {
		f.At = append(f.At, b.ThicknessNM)
		for i, v := range []float64{b.Unscattered, b.Kinematic, b.Multiple, b.Inelastic} {
			parts[i].Share = append(parts[i].Share, v)
		}
		g.add(number(b.ThicknessNM, 0), percent(b.Unscattered, 0), shareOf(b.Kinematic, b.KinematicRange), shareOf(b.Multiple, b.MultipleRange), shareOf(b.Inelastic, b.InelasticRange))
	}
	f.Parts = parts[:]
	fv.summary = g
	fv.add("", f)
	return fv.view()
}

// shareOf writes a share of the electrons with what its mean free paths leave open.
func shareOf(v float64, span []float64) string {
	if len(span) != 2 {
		return percent(v, 0)
	}
	return percent(v, 0) + " (" + number(100*span[0], 0) + " to " + number(100*span[1], 0) + ")"
}
