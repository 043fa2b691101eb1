package analysis

import (
	"fmt"
	"math"
	"strings"

	"thinward/analysis/intensity"
)

// Verdicts of answers and of the ledger.
const (
	VerdictYes     = "yes"
	VerdictNo      = "not seen"
	VerdictUnsure  = "undecided"
	VerdictFine    = "fine"
	VerdictCaution = "caution"
	VerdictFails   = "fails"
	VerdictUnknown = "not known"
)

// answers writes the sentences of the report's first section from finished
// contrasts.
func answers(r *Result) []Answer {
	var primary []*ContrastResult
	for i := range r.Contrasts {
		if r.Contrasts[i].Primary {
			primary = append(primary, &r.Contrasts[i])
		}
	}
	if len(primary) == 0 {
		return nil
	}
	list := []Answer{
		answerDiffer(primary), answerExchange(r, primary), answerWhere(primary), answerResolution(primary), answerForbidden(r, primary),
	}
	if a := answerThickness(r); a != nil {
		list = append(list, *a)
	}
	return append(list, answerElse(r))
}

// label names a contrast by its crystal, or by both positions across two.
func label(c *ContrastResult) string {
	if c.ThickCrystal != "" {
		return c.Crystal + "/" + c.Thin + " - " + c.ThickCrystal + "/" + c.Thick
	}
	return c.Crystal
}

// crystalsOf counts in words, "2 of 3 crystals".
func crystalsOf(n int, list []*ContrastResult) string {
	what := "crystals"
	if len(list) == 1 {
		what = "crystal"
	}
	if list[0].ThickCrystal != "" {
		what = "pair of crystals"
	}
	return fmt.Sprintf("%d of %d %s", n, len(list), what)
}

func answerDiffer(list []*ContrastResult) Answer {
	a := Answer{Question: "Do the intensities differ at all?", Section: "strength", Verdict: VerdictNo}
	n, known, merged := 0, 0, 0
	var parts []string
	for _, c := range list {
		if !c.Matched {
			merged++
		}
		if math.IsNaN(c.Correlation.R) {
			parts = append(parts, fmt.Sprintf("%s: not estimable (%s)", label(c), c.Correlation.Why))
			continue
		}
		known++
		if c.Correlation.Hi < 1 || c.MomentRatio.Lo > 0 || c.MomentRatio.Hi < 0 {
			n++
		}
		parts = append(parts, fmt.Sprintf("%s r = %s, moment ratio %s", label(c), span(c.Correlation.R, c.Correlation.Lo, c.Correlation.Hi), span(c.MomentRatio.M, c.MomentRatio.Lo, c.MomentRatio.Hi)))
	}
	switch {
	case known == 0:
		a.Verdict = VerdictUnknown
		a.Text = "It cannot be said: no position has enough symmetry equivalents to take the noise out of a correlation."
	case n == 0:
		a.Text = "Beyond counting noise no difference between thinnest and thickest position is seen (identical positions have a true correlation r of 1 and a moment ratio of 0)."
	default:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("Thinnest and thickest position differ beyond counting noise in %s (identical positions have a true correlation r of 1 and a moment ratio of 0). Bending, mosaicity, dose and errors of frames lower r as thickness does.", crystalsOf(n, list))
		if merged > 0 {
			a.Text += fmt.Sprintf(" In %s the observations could not be matched by angle, so that another geometry lowers r too.", crystalsOf(merged, list))
		}
	}
	a.Detail = parts
	return a
}

func answerExchange(r *Result, list []*ContrastResult) Answer {
	a := Answer{Question: "Has intensity moved from strong to weak reflections?", Section: "sizes"}
	positive, negative, estimable, worst := 0, 0, 0, 0.0
	var parts []string
	for _, c := range list {
		e := c.Exchange
		if math.IsNaN(e.M) {
			parts = append(parts, fmt.Sprintf("%s: not estimable (%s)", label(c), e.Why))
			continue
		}
		estimable++
		worst = math.Max(worst, c.MinimumM)
		lo, hi, note := widened(c)
		switch {
		case lo > 0:
			positive++
		case hi < 0:
			negative++
		}
		parts = append(parts, fmt.Sprintf("%s m = %s%s", label(c), span(e.M, e.Lo, e.Hi), note))
	}
	if list[0].StrengthAxis == leadBracket {
		return bracketAnswer(a, list)
	}
	a.Detail = parts
	pooled := ""
	if r.Crystals != nil && r.Crystals.N > 1 && !math.IsNaN(r.Crystals.InThese.Value) {
		p := r.Crystals
		pooled = fmt.Sprintf(" In these crystals together m = %s; in crystals like these m = %s.", span(p.InThese.Value, p.InThese.Lo, p.InThese.Hi), span(p.LikeThese.Value, p.LikeThese.Lo, p.LikeThese.Hi))
	}
	switch {
	case estimable == 0:
		a.Verdict, a.Text = VerdictUnknown, "The exchange cannot be estimated."
	case positive > 0 && negative == 0:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("Yes, in %s.%s", crystalsOf(positive, list), pooled)
	case positive == 0 && negative == 0:
		a.Verdict = VerdictNo
		a.Text = fmt.Sprintf("No exchange is seen.%s An exchange of m = %s would have been seen in each crystal with 80 %% power.", pooled, short(worst))
	default:
		a.Verdict = VerdictUnsure
		a.Text = fmt.Sprintf("The crystals disagree: %d up, %d down.%s", positive, negative, pooled)
	}
	if estimable > 0 {
		a.Text += qualified(r, list)
	}
	return a
}

// firmF is the first-stage F below which the interval of a fit is too short.
const firmF = 50

// widened is the interval by which a contrast counts: that of its fit, and on a weak
// axis wide enough to hold the Anderson-Rubin interval of the instrument too, which
// holds its level there.
func widened(c *ContrastResult) (lo, hi float64, note string) {
	lo, hi = c.Exchange.Lo, c.Exchange.Hi
	if !(c.Exchange.F < firmF) {
		return lo, hi, ""
	}
	note = ", too short because the axis is weak"
	for _, m := range c.Models {
		if m.Model == "instrument" && m.M.Lo <= m.M.Hi {
			lo, hi = math.Min(lo, m.M.Lo), math.Max(hi, m.M.Hi)
			note += fmt.Sprintf(" (Anderson-Rubin interval %s to %s)", short(m.M.Lo), short(m.M.Hi))
		}
	}
	return lo, hi, note
}

// qualified says what keeps m from being taken at its word: a curve of another shape
// than the model's, or a loss in the detector.
func qualified(r *Result, list []*ContrastResult) string {
	misfit := 0
	for _, c := range list {
		if c.OverIdent.P < 0.001 {
			misfit++
		}
	}
	text := ""
	if misfit > 0 {
		text += fmt.Sprintf(" The model does not describe the curve in %s, so that this m is a number for another shape: look at the curve.", crystalsOf(misfit, list))
	}
	for _, e := range r.Ledger {
		if e.Check == "high counts" && e.Verdict != VerdictFine && e.Verdict != VerdictUnknown {
			return text + " A loss of the strongest is seen as well, which the detector could have made; it raises m too."
		}
	}
	return text
}

// bracketAnswer says what one crystal, or a pair of crystals, can say.
func bracketAnswer(a Answer, list []*ContrastResult) Answer {
	var parts []string
	open := 0
	for _, c := range list {
		b := c.Bracket
		parts = append(parts, fmt.Sprintf("%s: m between %s (half of the thick position, errs downward) and %s (half of the thin, errs upward); moment ratio %s",
			label(c), span(b.Thick.Value, b.Thick.Lo, b.Thick.Hi), span(b.Thin.Value, b.Thin.Lo, b.Thin.Hi), span(c.MomentRatio.M, c.MomentRatio.Lo, c.MomentRatio.Hi)))
		if !(b.Lo > 0 || b.Hi < 0) {
			open++
		}
	}
	a.Detail = parts
	text := "Only a bracket can be given, since no other crystal of the series says how strong each reflection is."
	if open > 0 {
		a.Verdict = VerdictUnsure
		a.Text = text + " The bracket holds 0."
	} else {
		a.Verdict = VerdictYes
		a.Text = text + " The bracket excludes 0, which holds only if the deviations of the two positions are unrelated."
	}
	if list[0].ThickCrystal != "" {
		a.Text += " The two positions lie on two crystals: nothing here attributes a difference to thickness."
	}
	return a
}

func answerWhere(list []*ContrastResult) Answer {
	a := Answer{Question: "In weak or in strong reflections?", Section: "strength", Verdict: VerdictNo}
	seen, weak, strong := 0, 0, 0
	for _, c := range list {
		if c.Strength.P < 0.05 {
			seen++
		}
		a.Detail = append(a.Detail, fmt.Sprintf("%s %s; %s", label(c), span(c.Classes.Floor.Eps, c.Classes.Floor.Lo, c.Classes.Floor.Hi), span(c.Classes.Top.Eps, c.Classes.Top.Lo, c.Classes.Top.Hi)))
		if c.Classes.Floor.Hi < 0 {
			weak++
		}
		if c.Classes.Top.Lo > 0 {
			strong++
		}
	}
	const units = " Below, thin minus thick over the local mean: the weakest class; the strongest."
	if list[0].StrengthAxis == leadBracket {
		a.Verdict = VerdictUnsure
		a.Text = "No strength is known here that is independent of the difference. The classes below are on the inverse-variance mean, which holds only if the ratio of the two sigmas is right." + units
		return a
	}
	if seen > 0 {
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("The curve against strength is not flat in %s (joint test, p < 0.05): the weakest gain with thickness in %d, the strongest lose in %d.%s", crystalsOf(seen, list), weak, strong, units)
		return a
	}
	a.Text = fmt.Sprintf("The curve against strength is flat within its noise in %s.%s", crystalsOf(len(list), list), units)
	return a
}

func answerResolution(list []*ContrastResult) Answer {
	a := Answer{Question: "At low or at high resolution?", Section: "resolution", Verdict: VerdictNo}
	seen := 0
	for _, c := range list {
		r := c.Resolution
		if r.DeltaBLo > 0 || r.DeltaBHi < 0 {
			seen++
		}
		a.Detail = append(a.Detail, fmt.Sprintf("%s %s \u00c5\u00b2", label(c), span(r.DeltaB, r.DeltaBLo, r.DeltaBHi)))
	}
	if seen > 0 {
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("The ratio of the positions falls or rises with resolution in %s. A B factor, radiation damage, redistribution by thickness, background and saturation of the detector look alike here. Below, B of the thick position minus B of the thin.", crystalsOf(seen, list))
	} else {
		a.Text = "No trend with resolution is seen. Below, B of the thick position minus B of the thin."
	}
	return a
}

func answerForbidden(r *Result, list []*ContrastResult) Answer {
	a := Answer{Question: "Are forbidden reflections filled?", Section: "forbidden", Verdict: VerdictUnknown}
	up, known := 0, 0
	none := len(r.Forbidden) > 0
	for i := range r.Forbidden {
		none = none && r.Forbidden[i].Why == intensity.NoneForbidden
	}
	for _, c := range list {
		thin, thick := forbiddenOf(r, c.Crystal, c.Thin), forbiddenOf(r, c.Crystal, c.Thick)
		if c.ThickCrystal != "" {
			thick = forbiddenOf(r, c.ThickCrystal, c.Thick)
		}
		if thin == nil || thick == nil || thin.N == 0 || thick.N == 0 {
			continue
		}
		known++
		rise, su := thick.Ratio-thin.Ratio, math.Hypot(thick.SU, thin.SU)
		if rise > 2*su {
			up++
		}
		a.Detail = append(a.Detail, fmt.Sprintf("%s %s to %s", label(c), pm(thin.Ratio, thin.SU), pm(thick.Ratio, thick.SU)))
	}
	switch {
	case none:
		a.Text = "The space group forbids no reflection, so there is nothing to look at."
	case known == 0:
		a.Text = "Not recorded: the lists hold no forbidden reflection in both positions, so nothing can be said, and not that they are absent."
	case up > 0:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("They rise with thickness in %d of %d crystals that recorded them in both positions. No scale can do this, but background left in the intensities and spots that run into each other can; a wrong space group fills them at every thickness. Below, their mean over the local mean, thin to thick.", up, known)
	default:
		a.Verdict = VerdictNo
		a.Text = "They do not rise with thickness."
	}
	return a
}

func forbiddenOf(r *Result, crystal, position string) *Forbidden {
	for i := range r.Forbidden {
		f := &r.Forbidden[i]
		if f.Crystal == crystal && f.Position == position && f.Element == "all" {
			return f
		}
	}
	return nil
}

func answerThickness(r *Result) *Answer {
	if r.Thickness == nil || len(r.Thickness.Lines) == 0 {
		return nil
	}
	a := &Answer{Question: "Does it grow with thickness?", Section: "thickness", Verdict: VerdictNo}
	t := r.Thickness
	if math.IsNaN(t.Slope.Value) {
		a.Verdict, a.Text = VerdictUnknown, "The growth with thickness cannot be estimated: "+t.Why+"."
		return a
	}
	positions := 0
	for _, l := range t.Lines {
		positions = max(positions, len(l.T))
	}
	slope := span(t.Slope.Value, t.Slope.Lo, t.Slope.Hi)
	for _, l := range t.Lines {
		if l.Why == "" {
			a.Detail = append(a.Detail, fmt.Sprintf("%s %s", l.Crystal, span(l.Slope.Value, l.Slope.Lo, l.Slope.Hi)))
		} else {
			a.Detail = append(a.Detail, l.Crystal+": "+l.Why)
		}
	}
	switch {
	case positions < 3:
		a.Verdict = VerdictUnsure
		a.Text = fmt.Sprintf("With two thicknesses a crystal there is a difference but no trend; per 100 nm it would be %s.", slope)
	case t.Slope.Lo > 0:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("\u03bc = \u2212ln(1\u2212m) grows by %s per 100 nm over %d crystals.", slope, len(t.Lines))
	default:
		a.Text = fmt.Sprintf("No growth is seen: \u03bc = \u2212ln(1\u2212m) changes by %s per 100 nm over %d crystals.", slope, len(t.Lines))
	}
	return a
}

func answerElse(r *Result) Answer {
	a := Answer{Question: "Could something else have done it?", Section: "cautions", Verdict: VerdictFine}
	var cautions, fails, controls []string
	seen := map[string]bool{}
	for _, c := range r.Controls {
		if c.Verdict == VerdictFails && !seen[c.Control] {
			seen[c.Control] = true
			controls = append(controls, c.Control)
		}
	}
	for _, e := range r.Ledger {
		if seen[e.Check+e.Verdict] {
			continue
		}
		seen[e.Check+e.Verdict] = true
		switch e.Verdict {
		case VerdictCaution:
			cautions = append(cautions, e.Check)
		case VerdictFails:
			fails = append(fails, e.Check)
		}
	}
	switch {
	case len(fails) > 0:
		a.Verdict = VerdictFails
		a.Text = "Checks of the ledger fail."
		if len(controls) > 0 {
			a.Text = "Checks of the ledger and controls fail."
		}
		a.Detail = append(a.Detail, "fails: "+strings.Join(fails, ", "))
		if len(cautions) > 0 {
			a.Detail = append(a.Detail, "caution: "+strings.Join(cautions, ", "))
		}
	case len(controls) > 0:
		a.Verdict = VerdictCaution
		a.Text = fmt.Sprintf("No check of the ledger fails and %d give a caution, but controls fail: read there by how much the pipeline errs on these data.", len(cautions))
		if len(cautions) > 0 {
			a.Detail = append(a.Detail, "caution: "+strings.Join(cautions, ", "))
		}
	case len(cautions) > 0:
		a.Verdict = VerdictCaution
		a.Text = fmt.Sprintf("No check fails; %d give a caution.", len(cautions))
		a.Detail = append(a.Detail, "caution: "+strings.Join(cautions, ", "))
	default:
		a.Text = "No check of the ledger gives a caution. That does not exclude what no check can see."
	}
	if len(controls) > 0 {
		a.Detail = append(a.Detail, "controls that fail: "+strings.Join(controls, ", "))
	}
	a.Text += " What the numbers mean for a structure needs a practitioner's judgement."
	return a
}

// span writes a value with its interval, "0.081 (0.052 to 0.110)".
func span(v, lo, hi float64) string {
	if math.IsNaN(v) {
		return "not estimable"
	}
	return fmt.Sprintf("%s (%s to %s)", short(v), short(lo), short(hi))
}

// pm writes a value with its standard uncertainty.
func pm(v, su float64) string { return short(v) + " \u00b1 " + short(su) }

// short writes a number with three decimals, or three digits when it is large.
func short(v float64) string {
	size := math.Abs(v)
	text := ""
	switch {
	case math.IsNaN(v):
		return "\u2013"
	case math.IsInf(v, 0):
		text = "\u221e"
	case size >= 100:
		text = fmt.Sprintf("%.0f", size)
	case size >= 10:
		text = fmt.Sprintf("%.1f", size)
	case size >= 1:
		text = fmt.Sprintf("%.2f", size)
	default:
		text = fmt.Sprintf("%.3f", size)
	}
	if v < 0 && text != "0.000" {
		return "\u2212" + text
	}
	return text
}
