package evidence

import (
	"fmt"
	"math"
)

// Rows compares rows with the observations that they are. Caution when there are
// more than a thousandth more rows: they were collapsed or summed, and the reader
// should know as what.
func Rows(rows, observations int, as string) Finding {
	f := Finding{Value: float64(rows) / float64(observations), Unit: "rows for each observation", Verdict: Fine, Why: "every row is an observation of its own"}
	if f.Value > 1.001 {
		f.Verdict = Caution
		f.Why = fmt.Sprintf("%d rows are %d observations: rows were taken as %s, and counted once", rows, observations, as)
	}
	return f
}

// Negatives looks for removed negatives. near counts observations with I/sigma from
// -0.5 to 0, 0 to 0.5 and 0.5 to 1. Noise makes the density of I/sigma smooth there
// whatever the intensities are: one reflection adds a normal density, whose counts
// in three equal steps h have a b^-2 c = exp(-h^2), so b^2/c exp(-1/4) is to be
// expected below zero (a mixture has more). observed and expected count below 0, 1, 2
// and 3 sigma, the latter by Wilson's law, which a filled floor breaks too, and are
// said beside it. Fewer than 20 from 0 to 0.5 decide nothing and matter little. Fails
// below three tenths of what is expected when that is beyond 2.5 standard errors
// (removing I < 0 alone makes m = -0.09), caution below seven tenths and beyond 3.
func Negatives(near [3]int, observed []int, expected []float64) Finding {
	below, above, next := float64(near[0]), float64(near[1]), float64(near[2])
	want := math.Min(above*above/math.Max(next, 1)*math.Exp(-0.25), 4*above)
	z := (want - below) / math.Sqrt(want+want*want*(4/math.Max(above, 1)+1/math.Max(next, 1)))
	f := Finding{Value: below / want, Unit: "density of I/sigma just below zero over that just above", Verdict: Fine}
	counts := ""
	for k := range observed {
		if k > 0 {
			counts += ", "
		}
		counts += fmt.Sprintf("%d (%.0f)", observed[k], expected[k])
	}
	if counts != "" {
		counts = "; below 0, 1, 2, 3 sigma there are (Wilson's law expects): " + counts
	}
	switch {
	case near[1] < 20:
		f.Why = fmt.Sprintf("%d observations just above zero: too few to tell, and too few to matter%s", near[1], counts)
		f.Value = math.NaN()
	case f.Value < 0.3 && z > 2.5:
		f.Verdict, f.Why = Fails, fmt.Sprintf("the density of I/sigma has a step at zero (%d just below, %.0f expected): weak intensities were cut off or set to zero, which alone makes an exchange%s", near[0], want, counts)
	case f.Value < 0.7 && z > 3:
		f.Verdict, f.Why = Caution, fmt.Sprintf("fewer observations lie just below zero than noise leads one to expect (%d, %.0f expected)%s", near[0], want, counts)
	default:
		f.Why = "the density of I/sigma is smooth at zero, as noise makes it" + counts
	}
	return f
}

// clearZ is the number of standard errors beyond which a check of many is believed. A ledger
// asks the same of up to two dozen positions or contrasts: with normal errors one is beyond
// by chance in 1 % of series.
const clearZ = 3.5

// beyond reports whether a value is beyond 3.5 standard errors of 0, by its 95 % interval.
func beyond(v, lo, hi float64) bool { return math.Abs(v) > clearZ/1.96*(hi-lo)/2 }

// OffsetOf judges an additive constant o, in units of the mean intensity of the
// lowest third in s^2, with its 95 % interval. Caution beyond 3.5 standard errors;
// fails beyond 0.05 too, where shell means of weak shells are mostly offset.
func OffsetOf(o, lo, hi float64) Finding {
	f := Finding{Value: o, Unit: "of the mean of the strong third", Verdict: Fine, Why: "no additive offset between the positions is beyond 3.5 errors, as so many are asked; the fitted m allows for one"}
	switch {
	case math.IsNaN(o):
		return unknown("an offset is not part of the model that leads")
	case beyond(o, lo, hi) && math.Abs(o) > 0.05:
		f.Verdict, f.Why = Fails, "a large additive offset is seen (background, readout): shell means of the weak shells are not of reflections alone"
	case beyond(o, lo, hi):
		f.Verdict, f.Why = Caution, "an additive offset is seen (background, readout, or true double scattering, which also falls off more slowly than the intensities); the fitted m allows for it, a model without it would not"
	}
	return f
}

// Deviations judges the reproducible differences of single reflections: r with its
// interval, the deviation b_D of pairs beyond their noise, and m by one slope from
// halves of either position, which what a position does not share takes up (thin) and
// down (thick). Caution when r lies below 0.98 with its whole
// interval: then axes that share a position with the difference are biased,
// however well it is counted. independent says that the leading axis is of other
// crystals.
func Deviations(r, lo, hi, extra, thinHalf, thickHalf float64, independent bool) Finding {
	if math.IsNaN(r) {
		return unknown("the true correlation between the positions is not estimable")
	}
	f := Finding{Value: r, Unit: "true correlation r", Verdict: Fine}
	f.Why = fmt.Sprintf("r = %s (%s to %s); pairs differ by %s of their intensity beyond their noise; m by one slope from halves of the thin position %.2g, of the thick %.2g",
		num(r), num(lo), num(hi), num(math.Max(extra, 0)), thinHalf, thickHalf)
	if hi < 0.98 {
		f.Verdict = Caution
		f.Why += "; the positions deviate from each other reproducibly"
		if independent {
			f.Why += ", which the axis of the other crystals does not share; axes from the same crystal do"
		} else {
			f.Why += ", and the leading axis shares that with the difference"
		}
	}
	return f
}

// CurbForm is what the ledger knows of one form of the curb.
type CurbForm struct {
	Name      string
	Q, Lo, Hi float64
	J         float64
	Refused   bool
}

// CountRate is the form of a loss in the detector.
const CountRate = "count rate"

// HighCounts asks whether a loss of the strongest could be the detector's. Fine when
// the form that fits best finds no q beyond 3.5 standard errors, or the data refuse the
// count rate, by a J more than 3.84 behind the best (size.CompareCurbs: it errs less than
// 5 %). Caution when q is found and the count rate is not refused; whether it is then told
// from the other forms by the same difference is said.
func HighCounts(forms []CurbForm) Finding {
	if len(forms) == 0 {
		return unknown("the forms of the curb could not be compared")
	}
	best, rate := 0, -1
	for k, f := range forms {
		if f.J < forms[best].J {
			best = k
		}
		if f.Name == CountRate {
			rate = k
		}
	}
	told := true
	for k, f := range forms {
		told = told && (k == best || f.Refused)
	}
	lead := forms[best]
	out := Finding{Value: lead.Q, Unit: "q where forms of the curb are compared, best by " + lead.Name, Verdict: Fine}
	switch {
	case !(lead.Q > 0 && beyond(lead.Q, lead.Lo, lead.Hi)):
		out.Why = "beyond the exchange no loss of the strongest reflections is beyond 3.5 errors, as so many are asked"
	case rate < 0:
		out.Verdict, out.Why = Caution, "a loss of the strongest is seen; whether it goes with the count rate of the detector is not known"
	case forms[rate].Refused:
		out.Why = "a loss of the strongest is seen, and the data refuse that it goes with the count rate: it is not the detector's"
	case rate == best && told:
		out.Verdict, out.Why = Caution, "a loss of the strongest is seen, it goes with the count rate, and the data refuse the other forms: dead time or saturation of the detector"
	default:
		out.Verdict, out.Why = Caution, "a loss of the strongest is seen, and the data cannot tell whether it goes with the intensity (scattering) or with the count rate (detector); only another exposure can"
	}
	return out
}

// BleedOf judges the share of lattice neighbours' signal that leaks in. Caution
// beyond 3.5 standard errors and 0.2 %, fails when that share is 5 % or more.
func BleedOf(s *Slope, err error) Finding {
	if err != nil {
		return unknown("%s", err.Error())
	}
	f := Finding{Value: s.Value, Unit: "of the neighbours' signal", Verdict: Fine,
		Why: fmt.Sprintf("reflections do not gain beside strong lattice neighbours on the same frame (%s +- %s, z = %.1f within equivalents)", num(s.Value), num(s.SE), s.Z)}
	if s.Z > clearZ && s.Value > 0.002 {
		f.Verdict = Caution
		f.Why = fmt.Sprintf("reflections gain beside strong lattice neighbours on the same frame (%s +- %s, z = %.1f within equivalents): spots overlap or background runs, which fills weak reflections like an exchange", num(s.Value), num(s.SE), s.Z)
		if s.Value >= 0.05 {
			f.Verdict = Fails
		}
	}
	return f
}

// BlocksOf judges whether neighbours on the rotation share errors: width is the error of the
// curve against strength when blocks of deg degrees are drawn as one, over that by
// single reflections, and se what chance makes of a width of 1. why says that there
// is none. Caution beyond 3.5 standard errors and 1.1: intervals and p by reflections
// then claim too much, those of m as well as those of the curve.
func BlocksOf(width, se, deg float64, why string) Finding {
	if math.IsNaN(width) || math.IsNaN(se) {
		if why == "" {
			why = "no error by blocks is known"
		}
		return unknown("%s", why)
	}
	f := Finding{Value: width, Unit: "times the error by reflections", Verdict: Fine,
		Why: fmt.Sprintf("drawn by blocks of %g degrees the curve has %.2f times the error that it has by reflections, where 1 +- %.2f is chance: neighbours on the rotation share no error that shows", deg, width, se)}
	if width-1 > clearZ*se && width > 1.1 {
		f.Verdict = Caution
		f.Why = fmt.Sprintf("drawn by blocks of %g degrees the curve has %.2f times the error that it has by reflections, where 1 +- %.2f is chance: neighbours on the rotation share errors (scale, bending, drift), so that bands, intervals and p by reflections claim too much; take bands and p by blocks", deg, width, se)
	}
	return f
}

// DoubleOf gives the double-scattering predictor without a verdict.
func DoubleOf(s *Slope, err error) Finding {
	if err != nil {
		return unknown("%s", err.Error())
	}
	return Finding{Value: s.Z, Unit: "z within equivalents", Verdict: NotKnown,
		Why: "gain where pairs of reflections that add up to it stood on the same frame; not judged: scale errors of frames can look the same"}
}

// TiltOf judges the exchange between equivalents at low and at high tilt within
// one position. Caution beyond 3.5 standard errors: thickness along the beam
// differs within the position, and its m is an average; it also is a second,
// independent sign of growth with thickness.
func TiltOf(m, se float64, pairs int) Finding {
	if math.IsNaN(m) {
		return unknown("m between equivalents at low and high tilt is not estimable")
	}
	f := Finding{Value: m, Unit: "m, low against high tilt", Verdict: Fine, Why: fmt.Sprintf("equivalents at high tilt (a longer way through the slab) are like those at low tilt: m = %s +- %s of %d reflections", num(m), num(se), pairs)}
	switch {
	case m > clearZ*se:
		f.Verdict = Caution
		f.Why = fmt.Sprintf("intensity moves from strong to weak with tilt within one position, m = %s +- %s, as a way of 1/cos through the slab makes it: a second sign of thickness, and one position is a mixture of thicknesses", num(m), num(se))
	case m < -clearZ*se:
		f.Verdict = Caution
		f.Why = fmt.Sprintf("intensity moves from weak to strong with tilt, m = %s +- %s, the wrong way for thickness: absorption, background, or another angle at which the slab faces the beam", num(m), num(se))
	}
	return f
}
