package session

import (
	"fmt"

	"thinward/analysis"
	"thinward/analysis/figure"
)

// Indexing shows how every position was brought to one indexing.
func (s *Session) Indexing() *View {
	r := s.upTo(stepIntake)
	g := newGrid("Ways to index that the lattice allows", "position", "way", "correlation with the reference", "margin z", "what was done").words(1, 4).verbatim(1)
	for _, x := range r.Indexing {
		for k, way := range x.Options {
			agree := "\u2013"
			if k < len(x.Agreement) {
				agree = number(x.Agreement[k], 3)
			}
			margin, text := "", ""
			if k == 0 {
				margin, text = number(x.Z, 1), x.Text
			}
			g.add(x.Where, way, agree, margin, text)
		}
	}
	if len(g.rows) == 0 {
		g.add("every position", "h,k,l", "\u2013", "\u2013", "the lattice allows one way to index only")
	}
	return g.view("Indexing")
}

// Remarks shows what reading and intake had to say about the data.
func (s *Session) Remarks() *View {
	r := s.upTo(stepIntake)
	g := newGrid("Remarks on what came in", "where", "what").words(1)
	for _, x := range r.Intake {
		if x.Why != "" {
			g.add(x.Crystal+"/"+x.Position, x.Why)
		}
	}
	for _, w := range r.Warnings {
		g.add(w.Where, w.Text)
	}
	if len(g.rows) == 0 {
		g.add("everywhere", "nothing to remark")
	}
	return g.view("Remarks")
}

// Quality shows the precision of every position on the common scale.
func (s *Session) Quality() *View {
	return qualityTable(s.upTo(stepQuality), "Precision on the common scale, all resolution", func(q *analysis.Quality) bool { return q.Shell == 0 })
}

// Shells shows the precision of every position by resolution shell.
func (s *Session) Shells() *View {
	v := qualityTable(s.upTo(stepQuality), "Precision on the common scale, by shell", func(q *analysis.Quality) bool { return q.Shell > 0 })
	v.HTML = `<details class="numbers"><summary>Precision by position and shell as a table</summary>` + v.HTML + "</details>"
	return v
}

func qualityTable(r *analysis.Result, caption string, wanted func(*analysis.Quality) bool) *View {
	g := newGrid(caption, "position", "d (\u00c5)", "complete", "multiplicity", "observations", "unique", "possible", "mean merged I/\u03c3", "R_merge", "R_meas", "R_pim", "CC1/2", "CC1/2 (\u03c3-\u03c4)", "CC*")
	for i := range r.Quality {
		q := &r.Quality[i]
		if !wanted(q) {
			continue
		}
		g.add(q.Crystal+"/"+q.Position, number(q.DLong, 2)+"\u2013"+number(q.DShort, 2), percent(q.Completeness, 0), number(q.Multiplicity, 1),
			count(q.Observations), count(q.Unique), count(q.Possible), number(q.IOverSigma, 1), number(q.RMerge, 3), number(q.RMeas, 3), number(q.RPim, 3), number(q.CCHalf, 3), number(q.CCHalfTau, 3), number(q.CCStar, 3))
	}
	return g.view("Precision")
}

// Distributions shows the moments of strength beside Wilson's.
func (s *Session) Distributions() *View {
	r := s.upTo(stepQuality)
	g := newGrid("Moments of strength from products of halves, beside Wilson's laws", "position", "kind", "reflections", "second moment", "s.u.", "theory", "third moment", "s.u.", "theory", "remark").words(1, 9)
	for _, d := range r.Distributions {
		g.add(d.Crystal+"/"+d.Position, d.Kind, count(d.N), number(d.Second, 2), number(d.SecondSE, 2), number(d.SecondTheory, 0), number(d.Third, 1), number(d.ThirdSE, 1), number(d.ThirdTheory, 0), d.Why)
	}
	return g.view("Distributions")
}

// FriedelMates shows how unequal Friedel mates are in each position.
func (s *Session) FriedelMates() *View {
	r := s.upTo(stepQuality)
	g := newGrid("Friedel mates: how unequal they are, root mean square over the mean beyond the scatter of each; the centric ones, whose mates are equivalents, are a null", "position", "kind", "pairs", "unequal by", "interval", "z", "remark").words(1, 6)
	for _, f := range r.FriedelMates {
		g.add(f.Crystal+"/"+f.Position, f.Kind, count(f.N), number(f.Share, 3), between(f.Lo, f.Hi, 3), number(f.Z, 1), f.Why)
	}
	v := g.view("Friedel mates")
	v.note("One scattering makes mates equal. Scattering more than once makes acentric ones unequal, the more the thicker the crystal; no scale, sigma or strength axis has part in it, but equivalents that were measured at other angles have, so the null should be near 0. Where equivalents scatter much by their orientation, as in a crystal of many beams, unequal mates drown in that and nothing is seen. A negative number is a negative square.")
	return v
}

// DistributionsFigure shows the share of reflections below each strength, N(z),
// centric and acentric apart, beside Wilson's laws.
func (s *Session) DistributionsFigure() *View { return distributionsFigure(s.upTo(stepQuality)) }

func distributionsFigure(r *analysis.Result) *View {
	fv := &figureView{title: "Distribution of strengths", pick: "Crystal", empty: "No distribution could be drawn.",
		caption: "Multiple scattering fills the gap of weak reflections, so that a curve lies below its dashed law at small strength, and more so in the thicker position; the lower plots show how far. The laws are Wilson's, broadened with the noise of each position, and the grey band is where 95 % of shares fall by chance. An additive background and the removal of negatives lower a curve like scattering."}
	for _, name := range crystalsOf(r) {
		c := &figure.Cumulative{Title: "Share of reflections below a strength, crystal " + name, Desc: "Cumulative distribution of strengths of each position beside Wilson's law with its noise, acentric and centric apart, and the difference of both below.",
			X: figure.Axis{Label: "strength z", Lo: 0, Hi: 1}, Law: "Wilson's law with the noise of each"}
		for _, kind := range []string{"acentric", "centric"} {
			k := figure.DistributionKind{Name: kind}
			for i := range r.Distributions {
				d := &r.Distributions[i]
				if d.Crystal == name && d.Kind == kind && len(d.Below) > 0 {
					k.Curves = append(k.Curves, figure.Distribution{Name: d.Position, Z: d.Z, Below: d.Below, Law: d.BelowTheory, N: d.N})
				}
			}
			if len(k.Curves) > 0 {
				c.Kinds = append(c.Kinds, k)
			}
		}
		if len(c.Kinds) > 0 {
			fv.add(name, c)
		}
	}
	g := newGrid("Share of reflections below a strength: measured, and by Wilson's law with the noise of the position", "position", "kind", "reflections", "at z = 0.1", "at z = 0.5").words(1)
	for i := range r.Distributions {
		d := &r.Distributions[i]
		g.add(d.Crystal+"/"+d.Position, d.Kind, count(d.N), shareAt(d, 0.1), shareAt(d, 0.5))
	}
	fv.summary = g
	return fv.view()
}

func shareAt(d *analysis.Distribution, z float64) string {
	for i := range d.Z {
		if d.Z[i] >= z-1e-9 && i < len(d.Below) && i < len(d.BelowTheory) {
			return fmt.Sprintf("%s, %s", number(d.Below[i], 3), number(d.BelowTheory[i], 3))
		}
	}
	return "\u2013"
}
