package analysis

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/resample"
	"thinward/analysis/size"
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
	return undecidedByLaue(r, append(list, answerElse(r)))
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
	for _, c := range list {
		if !c.Matched {
			merged++
		}
		if !math.IsNaN(c.Correlation.R) {
			known++
		}
	}
	f := asking(list, 2*known)
	worst := 0.0
	var parts []string
	for _, c := range list {
		r, m := c.Correlation, c.MomentRatio
		if math.IsNaN(r.R) {
			parts = append(parts, fmt.Sprintf("%s: not estimable (%s)", label(c), r.Why))
			continue
		}
		if side(r.R, r.Lo, r.Hi, 1, f) < 0 || side(m.M, m.Lo, m.Hi, 0, f) != 0 {
			n++
		}
		worst = math.Max(worst, (m.Hi-m.Lo)/2/zOf(0.95))
		parts = append(parts, fmt.Sprintf("%s r = %s; pairs differ by %s beyond noise", label(c), span(r.R, r.Lo, r.Hi), percentOf(c.PairNoise)))
	}
	const same = "(r = 1 would mean no difference; below it, how far pairs differ, root mean square of their intensity"
	switch {
	case known == 0:
		a.Verdict = VerdictUnknown
		a.Text = "It cannot be said: no position has enough symmetry equivalents to take the noise out of a correlation."
	case n == 0:
		a.Text = "Beyond counting noise no difference between thinnest and thickest position is seen " + same + fmt.Sprintf("; a moment ratio of %s would have been seen in each crystal with 80 %% power).", short(visible(worst, f)))
	default:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("Thinnest and thickest position differ beyond counting noise in %s %s). Bending, mosaicity, dose and errors of frames lower r as thickness does.", crystalsOf(n, list), same)
		if merged > 0 {
			a.Text += fmt.Sprintf(" In %s the observations could not be matched by angle, so that another geometry lowers r too.", crystalsOf(merged, list))
		}
	}
	a.Detail = parts
	return a
}

func answerWhere(list []*ContrastResult) Answer {
	a := Answer{Question: "Does it depend on strength?", Section: "strength", Verdict: VerdictNo}
	seen, weak, strong := 0, 0, 0
	known, err := jointly(list)
	for _, p := range known {
		if p < 0.05 {
			seen++
		}
	}
	for _, c := range list {
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
		a.Text = fmt.Sprintf("The curve against strength is not flat in %s (p < 0.05 with all windows and crystals allowed for): the weakest gain with thickness in %d, the strongest lose in %d (each class at 95 %%).%s", crystalsOf(seen, list), weak, strong, units)
		return a
	}
	if err != nil || len(known) == 0 {
		a.Verdict, a.Text = VerdictUnknown, "The curve against strength could not be tested."+units
		return a
	}
	a.Text = fmt.Sprintf("The curve against strength is flat within its noise in %s; the mean of the weakest class is known to within %s, that of the strongest to within %s (95 %%), in the crystal where they are known worst.%s",
		crystalsOf(len(known), list), leastClass(list, false), leastClass(list, true), units)
	return a
}

// leastClass is the half width of the interval of the weakest or strongest class in the
// crystal where it is known worst.
func leastClass(list []*ContrastResult, strongest bool) string {
	worst := math.NaN()
	for _, c := range list {
		k := c.Classes.Floor
		if strongest {
			k = c.Classes.Top
		}
		if half := (k.Hi - k.Lo) / 2; math.IsNaN(worst) || half > worst {
			worst = half
		}
	}
	return short(worst)
}

// jointly gives the p-values of the curves that were tested, the number of crystals
// allowed for (Holm 1979).
func jointly(list []*ContrastResult) ([]float64, error) {
	var p []float64
	for _, c := range list {
		if !math.IsNaN(c.Strength.PStrength) {
			p = append(p, c.Strength.PStrength)
		}
	}
	return resample.Holm(p)
}

func answerResolution(list []*ContrastResult) Answer {
	a := Answer{Question: "Does it depend on resolution?", Section: "resolution", Verdict: VerdictNo}
	both, one, known := 0, 0, 0
	for _, c := range list {
		if !math.IsNaN(c.Resolution.DeltaB) {
			known++
		}
	}
	f := asking(list, known)
	worst := 0.0
	for _, c := range list {
		r := c.Resolution
		worst = math.Max(worst, (r.DeltaBHi-r.DeltaBLo)/2/zOf(0.95))
		sums, scale := side(r.DeltaB, r.DeltaBLo, r.DeltaBHi, 0, f), fittedSide(&r, f)
		switch {
		case sums != 0 && (sums == scale || math.IsNaN(r.FittedBSE)):
			both++
		case sums != 0 || scale != 0:
			one++
		}
		said := span(r.DeltaB, r.DeltaBLo, r.DeltaBHi) + " \u00c5\u00b2"
		if r.Reconciled != "" {
			said = r.Reconciled
		}
		a.Detail = append(a.Detail, label(c)+" "+said)
	}
	const below = " Below, B of the thick position minus B of the thin in \u00c5\u00b2, twice: by sums of intensity in shells, which few strong reflections carry and in which curb and offset count, and by the fitted scale, which weighs every reflection by its error."
	const alike = " A B factor, radiation damage, redistribution by thickness, background and saturation of the detector look alike here; whether B goes with the dose stands in the ledger."
	switch {
	case known == 0:
		a.Verdict, a.Text = VerdictUnknown, "The growth of the ratio with resolution could not be estimated."
	case both > 0:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("The ratio of the positions falls or rises with resolution in %s.", crystalsOf(both, list)) + alike + below
	case one > 0:
		a.Verdict = VerdictUnsure
		a.Text = fmt.Sprintf("In %s one of two estimates of a trend with resolution is clear of 0 and the other is not, or says the opposite.", crystalsOf(one, list)) + alike + below
	default:
		a.Text = fmt.Sprintf("No trend with resolution is seen; a difference in B of %s \u00c5\u00b2 would have been seen in each crystal with 80 %% power.", short(visible(worst, f))) + below
	}
	return a
}

// fittedSide is on which side of 0 the B of the scale lies.
func fittedSide(r *Resolution, f float64) int {
	half := zOf(0.95) * r.FittedBSE
	return side(r.FittedB, r.FittedB-half, r.FittedB+half, 0, f)
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
	positions, used := 0, 0
	slope := span(t.Slope.Value, t.Slope.Lo, t.Slope.Hi)
	for _, l := range t.Lines {
		if l.Why == "" {
			used++
			positions = max(positions, len(l.T))
			a.Detail = append(a.Detail, fmt.Sprintf("%s %s", l.Crystal, span(l.Slope.Value, l.Slope.Lo, l.Slope.Hi)))
		} else {
			a.Detail = append(a.Detail, l.Crystal+": "+l.Why)
		}
	}
	if x := t.Across; x != nil && x.Why == "" {
		a.Detail = append(a.Detail, fmt.Sprintf("between %s, by the step in thickness of each: %s, with %s where the step is 0", plural(len(x.Crystals), "crystal"),
			span(x.Slope.Value, x.Slope.Lo, x.Slope.Hi), span(x.Intercept.Value, x.Intercept.Lo, x.Intercept.Hi)))
	}
	tilts := withinTilt(t.Tilt)
	a.Detail = append(a.Detail, tilts...)
	switch {
	case positions < 3:
		a.Verdict = VerdictUnsure
		a.Text = fmt.Sprintf("With two thicknesses a crystal there is a difference but no trend; per 100 nm it would be %s.", slope)
	case t.Slope.Lo > 0:
		a.Verdict = VerdictYes
		a.Text = fmt.Sprintf("\u03bc = \u2212ln(1\u2212m) grows by %s per 100 nm over %s.", slope, plural(used, "crystal"))
		if p := straight(t.Lines); p < 0.05 {
			a.Verdict = VerdictUnsure
			a.Text = fmt.Sprintf("\u03bc = \u2212ln(1\u2212m) is above 0 in the thicker positions, by %s per 100 nm over %s, but does not grow in proportion to thickness (p = %s): look at the points.", slope, plural(used, "crystal"), short(p))
		} else if !math.IsNaN(p) {
			a.Text += fmt.Sprintf(" The positions between lie on a line through the thinnest within their errors (p = %s); that the thickest differs is what m says already.", short(p))
		}
	default:
		a.Text = fmt.Sprintf("No growth is seen: \u03bc = \u2212ln(1\u2212m) changes by %s per 100 nm over %s; %s per 100 nm would have been seen with 80 %% power.", slope, plural(used, "crystal"),
			short(size.MinimumVisible((t.Slope.Hi-t.Slope.Lo)/2/zOf(0.95), 0.95, 0.8)))
	}
	if len(tilts) > 0 {
		a.Text += tiltNote
	}
	return a
}

// plural writes a number of things.
func plural(n int, thing string) string {
	if n == 1 {
		return "1 " + thing
	}
	return fmt.Sprintf("%d %ss", n, thing)
}

// straight is the p-value of the points of all crystals against their lines through the
// thinnest position; NaN with two positions a crystal.
func straight(lines []ThicknessLine) float64 {
	chi2, df := 0.0, 0
	for _, l := range lines {
		if l.Why == "" && l.DF > 0 {
			chi2, df = chi2+l.Chi2, df+l.DF
		}
	}
	if df == 0 {
		return math.NaN()
	}
	return distuv.ChiSquared{K: float64(df)}.Survival(chi2)
}

// span writes a value with its interval, "0.081 (0.052 to 0.110)".
func span(v, lo, hi float64) string {
	if math.IsNaN(v) {
		return "not estimable"
	}
	return fmt.Sprintf("%s (%s to %s)", short(v), short(lo), short(hi))
}

// percentOf writes a share; a dash where there is none.
func percentOf(share float64) string {
	if math.IsNaN(share) {
		return "\u2013"
	}
	return fmt.Sprintf("%.0f %%", 100*math.Max(share, 0))
}

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
