package session

import (
	"fmt"
	"math"
	"sort"

	"thinward/analysis"
	"thinward/analysis/figure"
)

// ByStrength shows thin minus thick against strength: the primary contrast of
// every crystal first, the other contrasts to choose.
func (s *Session) ByStrength() *View { return byStrength(s.upTo(stepDifferences)) }

// differenceLabel stands on axes with a signed root, which show the small
// differences of weak reflections beside the large ones of strong reflections.
func differenceLabel(contrast string) string { return contrast + ", in local means (root scale)" }

func byStrength(r *analysis.Result) *View {
	fv := &figureView{
		title: "Differences against strength", pick: "Contrast",
		caption: "Look where the band leaves the line of no difference: below it at the weak end and above it at the strong end, the thicker position has gained in weak reflections and lost in strong ones. " +
			"The dark band holds at each strength alone, the pale one with dotted edges over the whole curve, both for the averaged curve on this axis. " +
			"Bands by angle blocks draw 2.5 degrees of the rotation as one: a width ratio well above 1 says that neighbouring frames share an error, and the wider band is then the honest one.",
	}
	g := newGrid("Differences against strength, thin minus thick in local means", "contrast", "axis", "pairs", "p along strength", "p along resolution", "p by angle blocks", "width by angle blocks", "weakest: strength", "difference", "interval", "strongest: strength", "difference", "interval").words(1)
	for _, set := range pairings(r) {
		p := &figure.Panels{
			Title: "Difference against strength, " + set.name, Desc: strengthDesc(set),
			X: figure.Axis{Label: "strength (" + set.list[0].StrengthAxis + ")", Scale: figure.Root},
			Y: figure.Axis{Label: differenceLabel(set.difference()), Zero: true, Scale: figure.Root},
		}
		for _, c := range set.list {
			x := &c.Strength
			p.Panel = append(p.Panel, figure.Panel{Name: c.Crystal, Note: pNote(x.PStrength), Curves: []figure.Curve{{X: x.Grid, Y: x.Mean, Lo: x.Lo, Hi: x.Hi, LoSim: x.LoSim, HiSim: x.HiSim}}})
			row := []string{contrastName(c), c.StrengthAxis, count(c.Pairs), pvalue(x.PStrength), pvalue(x.PResolution)}
			row = append(row, blocksOf(c)...)
			for _, i := range []int{0, len(x.Grid) - 1} {
				if len(x.Grid) == 0 {
					row = append(row, "\u2013", "\u2013", "\u2013")
					continue
				}
				row = append(row, number(x.Grid[i], 2), number(x.Mean[i], 3), between(x.Lo[i], x.Hi[i], 3))
			}
			g.add(row...)
		}
		fv.add(set.name, p)
	}
	fv.summary = g
	return fv.view()
}

// blocksOf gives p and the width of the band over that by reflections when blocks of the
// rotation are drawn as one.
func blocksOf(c *analysis.ContrastResult) []string {
	b := c.AngleBlocks
	if b == nil || math.IsNaN(b.Width) {
		return []string{"\u2013", "\u2013"}
	}
	return []string{pvalue(b.P), number(b.Width, 2) + " \u00b1 " + number(b.WidthSE, 2)}
}

func strengthDesc(set pairing) string {
	text := ""
	for _, c := range set.list {
		x := &c.Strength
		if len(x.Mean) == 0 {
			text += c.Crystal + ": no curve; " + x.Why + ". "
			continue
		}
		n := len(x.Mean) - 1
		text += fmt.Sprintf("%s: from %s at strength %s to %s at strength %s, p %s. ", c.Crystal, number(x.Mean[0], 3), number(x.Grid[0], 2), number(x.Mean[n], 3), number(x.Grid[n], 2), pvalue(x.PStrength))
	}
	return "Moving mean of the difference of both positions with its bands, one panel a crystal. " + text
}

func pNote(p float64) string {
	if math.IsNaN(p) {
		return ""
	}
	if p < 0.001 {
		return "p < 0.001"
	}
	return "p = " + pvalue(p)
}

// Naive shows the same differences against the measured intensities, each with
// the ghost that noise alone draws there.
func (s *Session) Naive() *View { return naive(s.upTo(stepDifferences)) }

func naive(r *analysis.Result) *View {
	fv := &figureView{
		title: "Naive axes with their ghosts", pick: "Crystal",
		caption: "The dashed ghost is what counting noise alone draws when the difference is set against an intensity that shares its noise; " +
			"what follows the ghost is not real. What a full line shows beyond its ghost need not be thickness either: what each position has of its own shares its crystal with these axes and draws a ghost too. These plots are here to be compared, never to be believed alone.",
	}
	g := newGrid("Naive axes: mean square of the z-scores of 20 bins, 1 when flat", "contrast", "axis", "measured", "from noise alone", "correlation of both", "share of the ghost")
	g.words(1)
	for i := range r.Contrasts {
		c := &r.Contrasts[i]
		if !c.Primary {
			continue
		}
		one := pairing{list: []*analysis.ContrastResult{c}}
		thin, thick := one.sides()
		p := &figure.Panels{
			Title: "Difference against measured intensity, " + contrastName(c), Desc: "Moving mean of the difference, and the ghost that noise alone draws, against three measured intensities. ",
			X: figure.Axis{Label: "intensity over local mean", Scale: figure.Root}, Y: figure.Axis{Label: differenceLabel(one.difference()), Zero: true, Scale: figure.Root},
		}
		for _, axis := range []string{"thin", "thick", "mean"} {
			n, ok := c.Naive[axis]
			if !ok {
				continue
			}
			name := map[string]string{"thin": "against position " + thin, "thick": "against position " + thick, "mean": "against the mean of both"}[axis]
			p.Panel = append(p.Panel, figure.Panel{Name: name, Curves: []figure.Curve{
				{Name: "measured", X: n.Grid, Y: n.Mean}, {Name: "ghost of noise", X: n.Grid, Y: n.Ghost, Style: figure.Ghost}}})
			p.Desc += fmt.Sprintf("%s: score %s, of which noise alone %s. ", name, number(n.Score, 1), number(n.GhostScore, 1))
			g.add(contrastName(c), axis, number(n.Score, 1), number(n.GhostScore, 1), number(n.Correlation, 2), percent(n.Explained, 0))
		}
		fv.add(contrastName(c), p)
	}
	fv.summary = g
	return fv.view()
}

// ByResolution shows the logarithm of the ratio of both positions by resolution.
func (s *Session) ByResolution() *View { return byResolution(s.upTo(stepDifferences)) }

func byResolution(r *analysis.Result) *View {
	fv := &figureView{
		title: "Differences against resolution", pick: "Contrast",
		caption: "A slope means that the ratio of the thicker to the thinner position changes with resolution; the dashed line is the part that a difference of B takes up, and what stands off it B cannot explain. " +
			"A B factor, radiation damage, redistribution by thickness, background and saturation of the detector look alike here. The line is drawn through sums of intensity, which few strong reflections carry and in which curb and offset count; the B of the scale, which weighs every reflection by its error, stands beside it.",
	}
	g := newGrid("Ratio of the positions by resolution", "contrast", "shells", "difference of B (\u00c5\u00b2)", "interval", "share that B explains", "B of the scale (\u00c5\u00b2)")
	for _, set := range pairings(r) {
		thin, thick := set.sides()
		p := &figure.Panels{
			Title: "Logarithm of the ratio of both positions against resolution, " + set.name, Desc: "Mean logarithm of the ratio by shell with intervals, and the line that a difference of B means, one panel a crystal. ",
			X: figure.Axis{Label: "d (\u00c5), even in 1/d\u00b2", Column: "1/d\u00b2 (\u00c5\u207b\u00b2)"}, Y: figure.Axis{Label: "ln(\u27e8I " + thick + "\u27e9 / \u27e8I " + thin + "\u27e9)", Zero: true},
		}
		var all []float64
		for _, c := range set.list {
			x := &c.Resolution
			at := make([]float64, len(x.D))
			line := make([]float64, 0, len(x.D))
			for i, d := range x.D {
				at[i] = 1 / (d * d)
				if i < len(x.Remainder) {
					line = append(line, x.LogRatio[i]-x.Remainder[i])
				}
			}
			all = append(all, at...)
			curves := []figure.Curve{{Name: "measured", X: at, Y: x.LogRatio, Lo: x.Lo, Hi: x.Hi, Style: figure.Joined}}
			if len(line) == len(at) {
				curves = append(curves, figure.Curve{Name: "difference of B", X: at, Y: line, Style: figure.Ghost})
			}
			p.Panel = append(p.Panel, figure.Panel{Name: c.Crystal, Note: "\u0394B " + number(x.DeltaB, 2) + " \u00c5\u00b2", Curves: curves})
			p.Desc += fmt.Sprintf("%s: difference of B %s (%s) square angstrom. ", c.Crystal, number(x.DeltaB, 2), between(x.DeltaBLo, x.DeltaBHi, 2))
			g.add(contrastName(c), count(len(x.D)), number(x.DeltaB, 3), between(x.DeltaBLo, x.DeltaBHi, 3), percent(x.Share, 0), number(x.FittedB, 3)+" \u00b1 "+number(x.FittedBSE, 3))
		}
		p.X.Marks = spacings(all)
		fv.add(set.name, p)
	}
	fv.summary = g
	return fv.view()
}

// spacings labels an axis of 1/d^2 by d at round numbers that keep their
// distance; nil when there is nothing to label.
func spacings(at []float64) []figure.Mark {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range at {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			lo, hi = min(lo, v), max(hi, v)
		}
	}
	if lo >= hi {
		return nil
	}
	var out []figure.Mark
	for _, d := range []float64{2, 1, 1.2, 1.5, 3, 0.8, 5, 1.1, 1.3, 1.7, 0.9, 2.5, 0.7, 0.6, 0.5, 10, 4, 20} {
		v := 1 / (d * d)
		free := v >= lo-0.04*(hi-lo) && v <= hi+0.04*(hi-lo)
		for _, m := range out {
			free = free && math.Abs(m.At-v) > 0.16*(hi-lo)
		}
		if free {
			out = append(out, figure.Mark{At: v, Label: fmt.Sprintf("%g", d)})
		}
	}
	sort.Slice(out, func(i, j int) bool { return out[i].At < out[j].At })
	if len(out) < 2 {
		return nil
	}
	return out
}
