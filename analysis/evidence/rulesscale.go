package evidence

import (
	"fmt"
	"math"
)

// ScaleRatio compares the ratio of scales with that of thicknesses, thick over
// thin. Kinematic intensity grows in proportion, inelastic loss and illuminated
// volume lower it; caution beyond 1.5 times the thickness ratio or below a quarter
// of it (common practice, no source).
func ScaleRatio(k, t float64) Finding {
	f := Finding{Value: k / t, Unit: "scale ratio over thickness ratio", Verdict: Fine,
		Why: fmt.Sprintf("scale ratio %.2f, thickness ratio %.2f: what illuminated volume allows, with inelastic loss from none to strong", k, t)}
	if !(k/t <= 1.5 && k/t >= 0.25) {
		f.Verdict = Caution
		f.Why = fmt.Sprintf("scale ratio %.2f does not go with the thickness ratio %.2f: another exposure or illuminated volume, strong inelastic loss, or a wrong thickness", k, t)
	}
	return f
}

// Scatter compares b of two positions, the share by which equivalents scatter beyond
// counting, with their intervals. Caution when they differ by more than their
// intervals and 0.05: the positions differ in mosaicity, bending or excitation, or
// by dynamical scattering itself.
func Scatter(thin, thinLo, thinHi, thick, thickLo, thickHi float64) Finding {
	f := Finding{Value: thick - thin, Unit: "b thick minus thin", Verdict: Fine,
		Why: fmt.Sprintf("equivalents scatter by b = %.3f in the thin and %.3f in the thick position beyond counting", thin, thick)}
	if (thickLo > thinHi || thinLo > thickHi) && math.Abs(thick-thin) > 0.05 {
		f.Verdict = Caution
		f.Why += ": the positions differ in mosaicity, bending or excitation, or by dynamical scattering itself"
	}
	return f
}

// JitterOf judges the scatter of whole frames about their scale. 5 % is harmless
// (tried in simulation), so caution beyond that when it is clear of chance (Q more than
// five standard deviations over its degrees of freedom).
func JitterOf(j *Jitter, err error) Finding {
	if err != nil {
		return unknown("%s", err.Error())
	}
	f := Finding{Value: j.Tau, Unit: "relative scatter of frames", Verdict: Fine, Why: "whole frames keep to their scale"}
	if j.Tau > 0.05 && (j.Q-float64(j.DF))/math.Sqrt(2*float64(j.DF)) > 5 {
		f.Verdict = Caution
		f.Why = "whole frames stand off their scale by more than the curve of the scale can follow: beam or specimen moved, or frames differ in exposure"
	}
	return f
}

// Sigmas judges the factor a on reported sigmas with its interval. Caution beyond
// 1.25 or below 1/1.25 with the whole interval; weights use the corrected ones.
func Sigmas(a, lo, hi float64) Finding {
	f := Finding{Value: a, Unit: "times the reported sigma", Verdict: Fine, Why: "reported sigmas fit the scatter of equivalents"}
	if math.IsNaN(a) {
		return unknown("equivalents are too few to check the reported sigmas")
	}
	if lo > 1.25 || hi < 0.8 {
		f.Verdict = Caution
		f.Why = "reported sigmas do not fit the scatter of equivalents; weights use the corrected ones, and no axis of the report leans on their ratio except the inverse-variance mean"
	}
	return f
}

// TippingOf judges the inverse-variance axis: p of the curve on it, the nearest
// factor on sigma_thin/sigma_thick at which that is no longer significant, and the
// range lo to hi of the factor that the noise model allows. Caution when the
// tipping ratio lies within the range: not separable from sigma.
func TippingOf(p, up, down, lo, hi float64) Finding {
	nearest := up
	if math.Abs(math.Log(down)) < math.Abs(math.Log(up)) {
		nearest = down
	}
	f := Finding{Value: nearest, Unit: "factor on the ratio of sigmas", Verdict: Fine}
	allowed := fmt.Sprintf("the noise model allows %.2f to %.2f", lo, hi)
	switch {
	case !(p < 0.05):
		f.Value = 1
		f.Why = fmt.Sprintf("the curve on the inverse-variance axis is not significant (p = %.2g), so no ratio of sigmas has to hold", p)
	case math.IsInf(hi, 1) && lo == 0:
		f.Verdict = Caution
		f.Why = "the noise model is not estimable in one of the positions, so that any ratio of sigmas is allowed: the curve on the inverse-variance axis is not separable from sigma"
	case up <= hi || down >= lo:
		f.Verdict = Caution
		f.Why = fmt.Sprintf("a factor of %.2f on sigma_thin/sigma_thick would take the curve on the inverse-variance axis away, and %s: on that axis it is not separable from sigma", nearest, allowed)
	case math.IsInf(up, 1) && down == 0:
		f.Value = math.Inf(1)
		f.Why = "no factor between 1/3 and 3 on the ratio of sigmas takes the curve on the inverse-variance axis away; " + allowed
	default:
		f.Why = fmt.Sprintf("it would take a factor of %.2f on sigma_thin/sigma_thick to take the curve on the inverse-variance axis away; %s", nearest, allowed)
	}
	return f
}

// Turn is the spread of an estimate over other choices of one kind.
type Turn struct {
	Lo, Hi float64 // least and largest of the estimates, the leading one included
	N      int     // choices that gave one
	// Only names the choice when there is a single one, and Leading what leads instead.
	Only, Leading string
}

// ChoiceOf judges how far other choices of one kind move m. se is that of the
// leading estimate. Variants share their data, so they should differ by much less
// than its error; caution when one lies more than one standard error and 0.01
// away from the leading m, or when the sign of a finding depends on it.
func ChoiceOf(what string, lead, se float64, t Turn) Finding {
	if math.IsNaN(lead) || t.N == 0 {
		return unknown("m is not estimable under other choices of the %s", what)
	}
	far := math.Max(t.Hi-lead, lead-t.Lo)
	f := Finding{Value: far, Unit: "largest change of m", Verdict: Fine,
		Why: fmt.Sprintf("m lies between %s and %s under %d other choices of the %s", num(t.Lo), num(t.Hi), t.N, what)}
	if t.N == 1 {
		other := t.Lo
		if t.Hi-lead > lead-t.Lo {
			other = t.Hi
		}
		f.Unit = "change of m"
		f.Why = fmt.Sprintf("m is %s with another %s", num(other), what)
		if t.Only != "" {
			f.Why = fmt.Sprintf("m is %s with %s", num(other), t.Only)
		}
		f.Why += fmt.Sprintf(" (%s%s)", num(lead), spaced(t.Leading))
	}
	if far > math.Max(se, 0.01) {
		f.Verdict = Caution
		f.Why += ", more than its standard error from the leading one"
	}
	return f
}

// spaced puts a space before words, if there are any.
func spaced(words string) string {
	if words == "" {
		return ""
	}
	return " " + words
}

// Indexing judges the margin of the chosen way to index.
func Indexing(z float64, ambiguous, changed bool, text string) Finding {
	f := Finding{Value: z, Unit: "z of the best way over the second", Verdict: Fine, Why: text}
	switch {
	case ambiguous:
		f.Verdict = Fails
	case changed:
		f.Verdict = Caution
	}
	return f
}

// Common is how far the reflections that both positions have stand for all that
// either has.
type Common struct {
	Share        float64 // of the reflections measured in either
	Lost         int     // measured in one only
	Strength     float64 // mean strength of the lost less that of the common
	StrengthSE   float64
	LostD, CommD float64 // median d of the lost and of the common, angstrom
}

// Coverage judges representativeness. Caution below 0.7 common, fails below 0.2;
// caution too when more than 2 % are lost and differ in mean strength by more than 0.2
// and three standard errors.
func Coverage(c Common) Finding {
	f := Finding{Value: c.Share, Unit: "of the reflections of either position are in both", Verdict: Fine}
	f.Why = "all reflections are common"
	switch {
	case c.Lost == 1:
		f.Why = "one reflection is lost"
	case c.Lost > 1:
		f.Why = fmt.Sprintf("%d are lost, of mean strength %+.2f +- %.2f against the common ones, median d %.2f A against %.2f A", c.Lost, c.Strength, c.StrengthSE, c.LostD, c.CommD)
	}
	switch {
	case c.Share < 0.2:
		f.Verdict = Fails
		f.Why += ": what is compared is a small part"
	case c.Share < 0.7:
		f.Verdict = Caution
		f.Why += ": the common ones may not represent the rest"
	case c.Share < 0.98 && math.Abs(c.Strength) > 0.2 && math.Abs(c.Strength) > 3*c.StrengthSE:
		f.Verdict = Caution
		f.Why += ": the lost are stronger or weaker than the rest"
	}
	return f
}

// IceOf judges the rings: the one with the largest |z|. Caution beyond 4 (eight
// rings in several crystals) and 0.05 of the local mean, fails beyond 0.5.
func IceOf(rings []Ring) Finding {
	if len(rings) == 0 {
		return unknown("no reflections lie in the rings of ice")
	}
	worst := rings[0]
	for _, r := range rings {
		if math.Abs(r.Z) > math.Abs(worst.Z) {
			worst = r
		}
	}
	f := Finding{Value: worst.Excess, Unit: "of the local mean, thin minus thick", Verdict: Fine,
		Why: fmt.Sprintf("no ring of ice differs between the positions by more than 4 errors and 5 %% (most at %.2f A, z = %.1f)", worst.D, worst.Z)}
	if math.Abs(worst.Z) > 4 && math.Abs(worst.Excess) > 0.05 {
		f.Verdict = Caution
		which := "thick"
		if worst.Excess > 0 {
			which = "thin"
		}
		f.Why = fmt.Sprintf("the ring of ice at %.2f A is stronger in the %s position (z = %.1f): leave ice rings out (exclude)", worst.D, which, worst.Z)
		if math.Abs(worst.Excess) > 0.5 {
			f.Verdict = Fails
		}
	}
	return f
}

// DoseOrder judges the order of measurement. together counts crystals in which
// dose, or order, rises with thickness throughout, of known ones that say anything.
// growth and its error are the growth of B with dose, pooled over crystals (NaN when
// not estimable).
func DoseOrder(together, known int, growth, growthSE float64) Finding {
	if known == 0 {
		return unknown("neither order nor dose is given in the manifest: thickness may go with dose")
	}
	f := Finding{Value: float64(together), Unit: fmt.Sprintf("of %d crystals with dose in step with thickness", known), Verdict: Fine, Why: "dose does not rise with thickness"}
	damage := growth > 3*growthSE
	switch {
	case together == known && damage:
		f.Verdict = Fails
		f.Why = fmt.Sprintf("the thicker, the later, in every crystal, and B grows with both, by %s +- %s A^2 for each e/A^2 of dose: damage or thickness, and no analysis can tell them apart", num(growth), num(growthSE))
	case together == known:
		f.Verdict = Caution
		f.Why = "the thicker, the later, in every crystal: dose goes with thickness, and no analysis can tell them apart; no growth of B is seen, but thickness changes B too and can hide it"
	case together > 0:
		f.Why = fmt.Sprintf("dose goes with thickness in %d of %d crystals, not in the others: compare them", together, known)
	}
	if math.IsNaN(growth) && f.Verdict == Caution {
		f.Why = "the thicker, the later, in every crystal: dose goes with thickness, and no analysis can tell them apart"
	}
	return f
}

// DoseGrowth judges the growth of B with dose alone. Caution beyond three standard
// errors: damage is seen.
func DoseGrowth(growth, se float64) Finding {
	if math.IsNaN(growth) || !(se > 0) {
		return unknown("doses or B factors are missing")
	}
	f := Finding{Value: growth, Unit: "A^2 of B for each e/A^2 of dose", Verdict: Fine, Why: fmt.Sprintf("B does not grow with dose beyond three times its error (%s +- %s)", num(growth), num(se))}
	if growth > 3*se {
		f.Verdict, f.Why = Caution, fmt.Sprintf("B grows with dose (%s +- %s): damage is seen; it changes strengths as well as B", num(growth), num(se))
	}
	return f
}

// Crystals judges how many there are. Below five the spread between crystals is not
// estimable; k that agree in sign reach p = 2/2^k at the smallest.
func Crystals(k int) Finding {
	f := Finding{Value: float64(k), Unit: "crystals", Verdict: Fine, Why: "enough to estimate the spread between crystals"}
	switch {
	case k == 0:
		return unknown("no crystal has two positions")
	case k == 1:
		f.Verdict, f.Why = Caution, "one crystal says nothing of others, however well it is measured"
	case k < 5:
		f.Verdict = Caution
		f.Why = fmt.Sprintf("%d crystals that agree in sign reach p = %s at the smallest; the spread between crystals is not estimable", k, num(2*math.Pow(0.5, float64(k))))
	}
	return f
}

// TwoSpecimens judges a contrast whose positions lie on two crystals: caution, whatever
// is found.
func TwoSpecimens() Finding {
	return Finding{Value: 2, Unit: "specimens", Verdict: Caution, Why: "two specimens: the thin and the thick position lie on two crystals, which differ in orientation, order, damage and background as well as in thickness, so that no difference between them is shown to come from thickness"}
}

// ReplicateOf judges the replicate positions: how many there are and how many of
// their contrasts read an effect where there is none.
func ReplicateOf(measured, failed int) Finding {
	if measured == 0 {
		return unknown("no replicate was measured; differences between places of equal thickness are not known")
	}
	f := Finding{Value: float64(failed), Unit: fmt.Sprintf("of %d replicate contrasts with a difference", measured), Verdict: Fine, Why: "places of equal thickness agree"}
	if failed > 0 {
		f.Verdict = Caution
		f.Why = "places of equal thickness differ: what differs between positions need not be thickness"
		if failed == measured && measured > 1 {
			f.Verdict = Fails
		}
	}
	return f
}

// Recorded judges whether the lists hold reflections that screw axes or glide planes forbid;
// n is how many were measured, over all positions.
func Recorded(n int) Finding {
	if n == 0 {
		return unknown("not recorded: the lists hold no reflection that a screw axis or glide plane forbids, so nothing can be said of them, and not that they are absent")
	}
	return Finding{Value: float64(n), Unit: "forbidden reflections measured", Verdict: Fine, Why: "forbidden reflections stand in the lists, so their filling can be measured"}
}

// AxisOf judges the agreement of the other crystals' strengths with the pair's.
func AxisOf(correlation float64, leading string, independent bool) Finding {
	if independent {
		f := Finding{Value: correlation, Unit: "correlation with the other crystals", Verdict: Fine, Why: "strength comes from the other crystals, which share no noise with the difference, and no geometry unless they lay alike"}
		if correlation < 0.7 {
			f.Verdict, f.Why = Caution, "strength comes from the other crystals, but they agree poorly with this one"
		}
		return f
	}
	return Finding{Value: correlation, Unit: "correlation with the other crystals", Verdict: Caution, Why: "no independent strength: the axis is " + leading + ", which shares its crystal, or its noise, with the difference"}
}

// alikeDeg is the angle between rotation axes below which two crystals meet mostly the
// same orientations: many-beam intensities change over a degree or less, but
// both axes are known to that only, and crystals of one habit scatter by a few.
const alikeDeg = 5

// LyingOf judges the least angle in degrees between the rotation axis of a crystal and
// that of another whose strengths it uses, both in the frame of the crystal. NaN is not
// known. Caution below 5.
func LyingOf(deg float64, other string) Finding {
	if math.IsNaN(deg) {
		return unknown("angles are missing or do not tell how the crystals lay")
	}
	f := Finding{Value: deg, Unit: "degrees between rotation axes in the crystal", Verdict: Fine,
		Why: fmt.Sprintf("the nearest, %s, was turned about another axis of its own (%.0f degrees away)", other, deg)}
	if deg < alikeDeg {
		f.Verdict = Caution
		f.Why = fmt.Sprintf("%s was turned about nearly the same axis of its own (%.1f degrees away): reflections meet the same orientations in both, so that strengths from there can share their dynamical deviations and m then errs like one from the same crystal", other, deg)
	}
	return f
}

// AgainstLeading judges m on another axis against the leading one, both by one slope (the
// instrument), in which deviations that an axis shares with the difference show first:
// caution when the interval of the difference excludes 0 and it is more than 0.01; cause is
// said. model is the same difference by the leading model, whose m is the one to quote, and
// is said beside it; NaN where it was not fitted.
func AgainstLeading(d, lo, hi, model float64, cause string) Finding {
	if math.IsNaN(d) {
		return unknown("the difference from the leading axis is not estimable")
	}
	beside := ""
	switch {
	case math.IsNaN(model):
	case math.Abs(model) <= 0.01:
		beside = fmt.Sprintf("; by the leading model, whose m is the one to quote, the axis moves m by %s only", num(model))
	default:
		beside = fmt.Sprintf("; by the leading model, whose m is the one to quote, the axis moves m by %s too", num(model))
	}
	f := Finding{Value: d, Unit: "difference of m by one slope", Verdict: Fine, Why: "agrees with the leading axis" + beside}
	if (lo > 0 || hi < 0) && math.Abs(d) > 0.01 {
		f.Verdict, f.Why = Caution, "by one slope m differs from that on the leading axis, most likely by "+cause+": take no m from this axis"+beside
	}
	return f
}

// Describes judges the over-identification of the fitted model: caution below p =
// 0.001, as several contrasts are asked.
func Describes(p float64, df int) Finding {
	if df == 0 || math.IsNaN(p) {
		return unknown("the model cannot be tested against the curve")
	}
	f := Finding{Value: p, Unit: "p of the over-identification", Verdict: Fine, Why: "the fitted numbers describe the curve"}
	if p < 0.001 {
		f.Verdict, f.Why = Caution, "the fitted numbers do not describe the curve: look at it"
	}
	return f
}

// GhostOf judges what noise alone would draw on naive axes: the largest score of
// the ghosts, 1 when flat. Caution beyond 2 when the leading axis is not
// independent; else it says nothing against the result.
func GhostOf(score float64, independent bool) Finding {
	f := Finding{Value: score, Unit: "score of the ghost on naive axes", Verdict: Fine, Why: "noise draws little on naive axes here"}
	if score > 2 {
		f.Why = "a plot against either intensity or their mean would show a pattern from noise alone; such plots stand in the report only beside their ghost, and the leading axis shares no noise"
		if !independent {
			f.Verdict, f.Why = Caution, "a plot against either intensity or their mean would show a pattern from noise alone, and the leading axis is not independent of the difference"
		}
	}
	return f
}
