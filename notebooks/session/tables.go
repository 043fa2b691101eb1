package session

import (
	"fmt"
	"math"
	"sort"
	"strings"

	"thinward/analysis"
)

// Series shows what the manifest describes. It needs no step.
func (s *Session) Series() *View {
	g := newGrid("Crystals and positions of "+s.Title, "crystal", "position", "thickness (nm)", "s.u. (nm)", "order", "dose (e/\u00c5\u00b2)", "rows", "files").words(1, 7).verbatim(7)
	for i := range s.study.Series.Crystals {
		c := &s.study.Series.Crystals[i]
		for j := range c.Positions {
			p := &c.Positions[j]
			var files []string
			for _, f := range p.Sources {
				files = append(files, f.Path)
			}
			g.add(c.Name, p.Name, number(p.ThicknessNM, 0), given(p.ThicknessSU, 0), given(float64(p.Order), 0), given(p.DosePerA2, 1), count(p.Rows.Len()), strings.Join(files, ", "))
		}
	}
	v := g.view("Series")
	cell, group := s.study.Series.Cell, s.study.Series.Group
	name := group.HM()
	if name == "" {
		name = fmt.Sprintf("%d operators", len(group.Operators()))
	}
	line := fmt.Sprintf("Space group %s, Laue class %s; cell %g %g %g \u00c5, %g %g %g\u00b0.", name, group.LaueClass(), cell.A, cell.B, cell.C, cell.Alpha, cell.Beta, cell.Gamma)
	v.HTML += "<p>" + line + "</p>"
	v.Plain += line + "\n"
	return v
}

// given writes a number that the manifest may leave out, 0 being "not given".
func given(v float64, decimals int) string {
	if v == 0 {
		return "\u2013"
	}
	return number(v, decimals)
}

func angles(lo, hi float64) string {
	if math.IsNaN(lo) {
		return "none"
	}
	return number(lo, 0) + " to " + number(hi, 0)
}

// Correlations shows whether positions differ at all.
func (s *Session) Correlations() *View {
	r := s.upTo(stepDifferences)
	g := newGrid("Do positions differ at all: true correlation and moment ratio", "contrast", "thickness (nm)", "pairs", "paired", "r", "interval", "moment ratio", "interval", "remark").words(3, 8)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		paired := "merged"
		if c.Matched {
			paired = "matched"
		}
		g.add(contrastName(c), number(c.ThicknessNM[0], 0)+", "+number(c.ThicknessNM[1], 0), count(c.Pairs), paired,
			number(c.Correlation.R, 3), between(c.Correlation.Lo, c.Correlation.Hi, 3), number(c.MomentRatio.M, 3), between(c.MomentRatio.Lo, c.MomentRatio.Hi, 3), c.Correlation.Why)
	}
	v := g.view("Correlation")
	v.note("The moment ratio is 1 \u2212 \u221a(variance thick/thin) of the strengths: 0 when nothing is compressed; curb and deviations move it too, so that it need not equal m.")
	return v
}

// Sizes shows exchange, curb and offset of every contrast.
func (s *Session) Sizes() *View {
	r := s.upTo(stepDifferences)
	g := newGrid("Exchange m, curb q and offset o", "contrast", "axis", "model", "m", "interval", "q", "interval", "o", "interval", "first-stage F", "p of the fit", "smallest m that would show").words(1, 2)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		g.add(contrastName(c), c.StrengthAxis, c.Exchange.Model, number(c.Exchange.M, 3), between(c.Exchange.Lo, c.Exchange.Hi, 3), number(c.Curb.Q, 3), between(c.Curb.Lo, c.Curb.Hi, 3),
			number(c.Offset.O, 4), between(c.Offset.Lo, c.Offset.Hi, 4), number(c.Exchange.F, 0), pvalue(c.OverIdent.P), number(c.MinimumM, 3))
	}
	return g.view("Sizes")
}

// Models shows the same contrasts under each model, and with the strongest
// reflections left out.
func (s *Session) Models() *View {
	r := s.upTo(stepDifferences)
	g := newGrid("The primary contrasts under each model; quote the one that leads, since the instrument and (m) read curb and offset as exchange", "contrast", "model", "m", "q", "o", "p of the fit").words(1)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		if !c.Primary {
			continue
		}
		for _, m := range c.Models {
			g.add(contrastName(c), m.Model, withInterval(m.M, 3), withInterval(m.Q, 3), withInterval(m.O, 4), pvalue(m.JP))
		}
		for _, v := range c.Giants {
			if !math.IsInf(v.Above, 1) {
				name := fmt.Sprintf("instrument, without the %d reflections above %g local means", v.N, v.Above)
				if v.N == 0 {
					name = fmt.Sprintf("instrument; no reflection is above %g local means", v.Above)
				}
				g.add(contrastName(c), name, withInterval(v.M, 3), "\u2013", "\u2013", "\u2013")
			}
		}
	}
	return g.view("Models")
}

// Axes shows m on every axis that can be built.
func (s *Session) Axes() *View {
	r := s.upTo(stepDifferences)
	g := newGrid("Exchange on every strength axis, by one slope: for comparing axes, not for quoting, since it reads curb and offset as exchange", "contrast", "axis", "pairs", "m", "difference from the leading axis", "remark").words(1, 5)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		if !c.Primary {
			continue
		}
		for _, a := range c.Axes {
			g.add(contrastName(c), a.Axis, count(a.N), withInterval(a.M, 3), withInterval(a.Delta, 3), a.Remark)
		}
	}
	return g.view("Axes")
}

// Classes shows the three classes of strength.
func (s *Session) Classes() *View {
	r := s.upTo(stepDifferences)
	g := newGrid("Classes of strength: contrast in local means, thin minus thick", "contrast", "class", "pairs", "mean strength", "contrast", "interval", "m of the class", "interval").words(1)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		for _, k := range []struct {
			name  string
			class analysis.Class
		}{{"floor (below 0.2)", c.Classes.Floor}, {"middle (0.5 to 1.5)", c.Classes.Middle}, {"top (above 3)", c.Classes.Top}} {
			g.add(contrastName(c), k.name, count(k.class.N), number(k.class.Strength, 2), number(k.class.Eps, 3), between(k.class.Lo, k.class.Hi, 3), number(k.class.M, 3), between(k.class.MLo, k.class.MHi, 3))
		}
	}
	return g.view("Classes")
}

// Brackets shows m from halves of either position, by the leading model and by one slope.
func (s *Session) Brackets() *View {
	r := s.upTo(stepDifferences)
	g := newGrid("Bracket of m: strength from half of a position, whose own deviations lower m when it is the thick one and raise it when it is the thin one", "contrast", "strength from half of", "m with curb", "m by one slope", "bracket: hull of the four", "moment ratio", "remark").words(1, 6)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		g.add(contrastName(c), "thick", withInterval(c.Bracket.Thick, 3), withInterval(c.Bracket.ThickSlope, 3), between(c.Bracket.Lo, c.Bracket.Hi, 3), number(c.MomentRatio.M, 3), c.Bracket.Why)
		g.add(contrastName(c), "thin", withInterval(c.Bracket.Thin, 3), withInterval(c.Bracket.ThinSlope, 3), "", "", "")
	}
	return g.view("Bracket")
}

// Forbidden shows the forbidden reflections by position and symmetry element, with
// the growth per 100 nm of thickness in the row of the thickest position. The row "all" is of
// screw axes and glide planes; that of a centring is a null for background.
func (s *Session) Forbidden() *View { return forbiddenTable(s.upTo(stepForbidden)) }

func forbiddenTable(r *analysis.Result) *View {
	thick, thickest := map[string]float64{}, map[string]string{}
	for i := range r.Intake {
		x := &r.Intake[i]
		thick[x.Crystal+"/"+x.Position] = x.ThicknessNM
		if best, ok := thickest[x.Crystal]; !ok || x.ThicknessNM > thick[x.Crystal+"/"+best] {
			thickest[x.Crystal] = x.Position
		}
	}
	growth := map[string]analysis.ForbiddenTrend{}
	for _, t := range analysis.ForbiddenTrends(r.Forbidden, thick) {
		growth[t.Crystal+"/"+thickest[t.Crystal]+"/"+t.Element] = t
	}
	g := newGrid("Forbidden reflections over the local mean of the allowed ones", "position", "element", "reflections", "ratio", "s.u.", "z", "mean J/\u03c3", "growth per 100 nm", "s.u. of it", "remark").words(1, 9)
	for _, f := range r.Forbidden {
		slope, su := "", ""
		if t, ok := growth[f.Crystal+"/"+f.Position+"/"+f.Element]; ok && !math.IsNaN(t.Slope) {
			slope, su = number(t.Slope, 4), number(t.SU, 4)
		}
		g.add(f.Crystal+"/"+f.Position, f.Element, count(f.N), number(f.Ratio, 4), number(f.SU, 4), number(f.Z, 1), number(f.MeanIS, 1), slope, su, forbiddenRemark(f))
	}
	return g.view("Forbidden reflections")
}

// forbiddenRemark says what a row is short of, or what it is good for.
func forbiddenRemark(f analysis.Forbidden) string {
	if f.Centring && f.Why == "" {
		return "no lattice point: a null for background, not in all"
	}
	return f.Why
}

// Scaling shows scale and noise model by position.
func (s *Session) Scaling() *View {
	r := s.upTo(stepScaling)
	g := newGrid("Scale and noise by position, against the thinnest", "position", "mean ln K", "B (\u00c5\u00b2)", "s.u.", "a", "interval", "b", "interval", "\u03c7\u00b2 about the joint J", "with the noise model", "down-weighted", "curve").words(11)
	for _, x := range r.Scaling {
		shape := "in angle"
		if x.Constant {
			shape = "constant"
		}
		g.add(x.Crystal+"/"+x.Position, number(x.LnK, 3), number(x.B, 3), number(x.BSE, 3), number(x.A, 2), between(x.ALo, x.AHi, 2), number(x.BNoise, 3), between(x.BNoiseLo, x.BNoiseHi, 3),
			number(x.ChiBefore, 2), number(x.ChiAfter, 2), count(x.Rejected), shape)
	}
	return g.view("Scaling")
}

// Matters shows what the fitted exchange would do to amplitudes.
func (s *Session) Matters() *View {
	r := s.upTo(stepCrystals)
	g := newGrid("Does it matter: what m, the thickest position against the thinnest, does to amplitudes under Wilson's law; what the thinnest has exchanged itself is not in it", "crystal", "m", "agreement factor on |F| from the exchange alone", "mean |F| of reflections of strength below 0.2")
	for _, m := range r.Matters {
		g.add(m.Crystal, number(m.M, 3), percent(m.AgreementShift, 1), signed(m.WeakShift))
	}
	return g.view("Does it matter")
}

func signed(share float64) string {
	if share > 0 {
		return "+" + percent(share, 0)
	}
	return percent(share, 0)
}

// Specification shows m under other choices.
func (s *Session) Specification() *View {
	r := s.upTo(stepSpecification)
	g := newGrid("m under other choices; everything but the leading row is secondary", "crystal", "choice", "level", "m", "q").words(1, 2)
	for _, x := range r.Specification {
		level := x.Level
		if x.Leading {
			level += " (leading)"
		}
		g.add(x.Crystal, x.Choice, level, withInterval(x.M, 3), withInterval(x.Q, 3))
	}
	v := g.view("Specification")
	v.HTML = `<details class="numbers"><summary>m and q under every choice as a table</summary>` + v.HTML + "</details>"
	return v
}

// Controls shows what each control found, and what it can and cannot see.
func (s *Session) Controls() *View { return controls(s.upTo(stepControls)) }

func controls(r *analysis.Result) *View {
	g := newGrid("Controls: the same pipeline on data where the answer is known", "control", "crystal", "expected m", "found m", "p of the curve", "verdict", "what was done").words(1, 5, 6)
	g.verdict = 5
	reach := newGrid("What each control can and cannot see", "control", "can see", "cannot see").words(1, 2)
	said := map[string]bool{}
	for _, c := range byControl(r.Controls) {
		p := c.P
		if c.Crystal == "" {
			p = math.NaN() // of another test, which the words name
		}
		g.add(c.Control, allCrystals(c.Crystal), number(c.Expected, 3), withInterval(bounded(c.M), 3), pvalue(p), c.Verdict, c.Why)
		if key := c.Control + c.Can + c.Cannot; !said[key] {
			said[key] = true
			reach.add(c.Control, c.Can, c.Cannot)
		}
	}
	v := g.view("Controls")
	v.note("p of the curve is of the test that the control's curve is flat, not of the m beside it. All controls together have a chance of 5 % to fail in sound data, so that a single interval may miss narrowly and the control be fine.")
	return Together(v, reach.view("Controls"))
}

// Crystals shows what the crystals say together.
func (s *Session) Crystals() *View {
	r := s.upTo(stepCrystals)
	g := newGrid("The crystals together", "what", "value", "remark").words(2)
	if c := r.Crystals; c != nil {
		g.add("m in these crystals (fixed effect)", withInterval(c.InThese, 3), fmt.Sprintf("%d crystals", c.N))
		g.add("m in crystals like these (Hartung and Knapp)", withInterval(c.LikeThese, 3), likeThese(c))
		g.add("standard error that the crystals share", number(c.SharedSE, 4), "of the chance of the shell means of the same reflections, and of noise that serves both as strength and as difference")
		g.add("heterogeneity Q", number(c.Q, 2), "p = "+pvalue(c.QP))
		g.add("tau\u00b2, I\u00b2", auto(c.Tau2)+", "+percent(c.I2, 0), c.Why)
		g.add("crystals of one sign", fmt.Sprintf("%d of %d", c.SameSign, c.N), fmt.Sprintf("p = %s, at the smallest %s", pvalue(c.SignP), pvalue(c.SmallestP)))
		if !math.IsNaN(c.PageL) {
			g.add("Page's trend over positions", number(c.PageL, 1), fmt.Sprintf("one-sided p = %s, at the smallest %s; Page compares positions within crystals and takes their order as exchangeable", pvalue(c.PageP), pvalue(c.PageBest)))
		}
		g.add("mean correlation with the other crystals", number(c.MeanAgree, 3), "")
		for _, l := range c.LeaveOut {
			g.add("m without "+l.Without, withInterval(l.M, 3), "")
		}
	}
	return g.view("Crystals")
}

// Thickness shows the growth of mu = -ln(1-m) with thickness.
func (s *Session) Thickness() *View {
	r := s.upTo(stepCrystals)
	g := newGrid("Growth of \u03bc = \u2212ln(1\u2212m) with thickness", "crystal", "thickness (nm)", "\u03bc", "slope per 100 nm", "\u03c7\u00b2 (degrees of freedom)", "remark").words(5)
	if t := r.Thickness; t != nil {
		for _, l := range t.Lines {
			var mu, nm []string
			for _, i := range rising(l.T) {
				nm = append(nm, number(l.T[i], 0))
				if i < len(l.Mu) {
					mu = append(mu, number(l.Mu[i], 3)+" \u00b1 "+number(l.MuSE[i], 3))
				}
			}
			g.add(l.Crystal, strings.Join(nm, ", "), strings.Join(mu, ", "), withInterval(l.Slope, 3), fmt.Sprintf("%s (%d)", number(l.Chi2, 2), l.DF), l.Why)
		}
		g.add("together", "", "", withInterval(t.Slope, 3), "", t.Why)
		if x := t.Across; x != nil {
			g.add("between crystals", "", "", withInterval(x.Slope, 3), "", x.Why)
		}
	}
	return Together(g.view("Thickness"), withinPosition(r.Thickness).view("Tilt"))
}

// withinPosition lists what the tilt of one position says of the growth.
func withinPosition(t *analysis.ThicknessResult) *grid {
	g := newGrid("Growth within one position, whose slab the beam crosses on a longer way at high tilt, beside that between positions; both per 100 nm of path",
		"crystal", "position", "pairs", "longer by (nm)", "m, low against high tilt", "by tilt", "between positions", "remark").words(1, 7)
	if t == nil {
		return g
	}
	for i := range t.Tilt {
		x := &t.Tilt[i]
		g.add(x.Crystal, x.Position, count(x.Pairs), number(x.ExtraNM, 0), withInterval(x.M, 3), withInterval(x.Slope, 3), withInterval(x.Between, 3), x.Why)
	}
	return g
}

// Provenance shows inputs, seed, versions and times.
func (s *Session) Provenance() *View {
	r := s.Result()
	g := newGrid("Inputs", "file", "position", "rows", "observations", "set aside", "SHA-256").words(1, 4, 5).verbatim(0, 5)
	for _, in := range r.Inputs {
		var aside []string
		for reason, n := range in.SetAside {
			aside = append(aside, fmt.Sprintf("%d %s", n, reason))
		}
		sort.Strings(aside)
		g.add(in.Path, in.Crystal+"/"+in.Position, count(in.Rows), count(in.Observations), strings.Join(aside, "; "), in.SHA256)
	}
	v := g.view("Provenance")
	e := r.Environment
	line := fmt.Sprintf("Seed %d; Thinward %s; %s.", r.Seed, e.Thinward, e.Go)
	v.HTML += "<p>" + line + "</p>"
	v.Plain += line + "\n"
	return v
}

// AngleInfluence shows what each range of the rotation angle does to the
// agreement of equivalents.
func (s *Session) AngleInfluence() *View {
	list, err := s.study.AngleInfluences(Context())
	if err != nil {
		panic(&Error{Step: "scaling", Err: err, Inside: FaultOf(err) == FaultInside})
	}
	g := newGrid("Influence of ranges of the rotation angle on the agreement; reported, not acted on", "position", "angles (\u00b0)", "observations", "R_meas", "without the range", "CC1/2", "without the range")
	for _, x := range list {
		g.add(x.Crystal+"/"+x.Position, number(x.LoDeg, 0)+" to "+number(x.HiDeg, 0), count(x.Observations), number(x.RMeas, 4), number(x.RMeasWithout, 4), number(x.CCHalf, 4), number(x.CCWithout, 4))
	}
	if len(list) == 0 {
		g.add("all", "none", "\u2013", "\u2013", "\u2013", "\u2013", "\u2013")
	}
	return g.view("Influence of angles")
}

// rising gives the order of v from small to large.
func rising(v []float64) []int {
	order := make([]int, len(v))
	for i := range order {
		order[i] = i
	}
	sort.SliceStable(order, func(a, b int) bool { return v[order[a]] < v[order[b]] })
	return order
}

// likeThese says how far the interval for other crystals is to be trusted.
func likeThese(c *analysis.CrystalsResult) string {
	if c.LikeThese.Why != "" || c.N < 2 {
		return c.LikeThese.Why
	}
	return fmt.Sprintf("Student's t with %d degrees of freedom; no narrower than the crystals' own errors allow", c.N-1)
}
