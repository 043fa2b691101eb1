package analysis

import (
	"fmt"
	"math"

	"thinward/analysis/size"
)

func answerExchange(r *Result, list []*ContrastResult) Answer {
	a := Answer{Question: "Has intensity moved from strong to weak reflections?", Section: "sizes"}
	var seen readings
	worst := 0.0
	for _, c := range list {
		if !math.IsNaN(c.Exchange.M) {
			seen.estimable++
		}
	}
	f := asking(list, seen.estimable)
	for _, c := range list {
		e := c.Exchange
		if math.IsNaN(e.M) {
			a.Detail = append(a.Detail, fmt.Sprintf("%s: not estimable (%s)", label(c), e.Why))
			continue
		}
		worst = math.Max(worst, c.MinimumM)
		lo, hi, note := widened(c)
		seen.weak = seen.weak || e.F < firmF
		seen.count(side(e.M, lo, hi, 0, 1), side(e.M, lo, hi, 0, f))
		a.Detail = append(a.Detail, fmt.Sprintf("%s m = %s%s", label(c), span(e.M, e.Lo, e.Hi), note))
	}
	if list[0].StrengthAxis == leadBracket {
		return asToThickness(bracketAnswer(a, list), list)
	}
	together := ""
	limit := fmt.Sprintf(" An exchange of m = %s would have been seen in each crystal with 80 %% power", short(worst*visible(1, f)/visible(1, 1)))
	if p := r.Crystals; p != nil && p.N > 1 && !math.IsNaN(p.InThese.Value) {
		together = fmt.Sprintf(" In these crystals together m = %s; in crystals like these m = %s.", span(p.InThese.Value, p.InThese.Lo, p.InThese.Hi), span(p.LikeThese.Value, p.LikeThese.Lo, p.LikeThese.Hi))
		limit += fmt.Sprintf(", and of %s in the crystals together", short(size.MinimumVisible((p.InThese.Hi-p.InThese.Lo)/2/zOf(0.95), 0.95, 0.8)))
		// Where an axis is weak the standard errors that pool are too short.
		if !seen.weak {
			seen.pooled = side(p.InThese.Value, p.InThese.Lo, p.InThese.Hi, 0, 1)
		}
	}
	a.Verdict, a.Text = seen.answer(list)
	a.Text += together
	if a.Verdict == VerdictNo && seen.negative == 0 && seen.pooled == 0 {
		a.Text += limit + "."
	}
	if seen.estimable > 0 {
		curb := besides(list)
		a.Text += curb + qualified(r, list)
		for i, c := range list {
			if m := slopeOf(c); curb != "" && !math.IsNaN(m) && !math.IsNaN(c.Exchange.M) {
				a.Detail[i] += "; by one slope " + short(m)
			}
		}
	}
	if a.Verdict == VerdictYes && 2*misfits(list) > len(list) {
		a.Verdict = VerdictUnsure
	}
	return asToThickness(a, list)
}

// misfits counts the contrasts whose curve the leading model does not describe.
func misfits(list []*ContrastResult) int {
	n := 0
	for _, c := range list {
		if c.OverIdent.P < 0.001 {
			n++
		}
	}
	return n
}

// readings count the crystals whose m is clear of 0: each by its own interval, and
// firmly, with the number of crystals asked allowed for. pooled is the side of the
// crystals together.
type readings struct {
	estimable, positive, negative, up, down, pooled int
	weak                                            bool
}

func (s *readings) count(own, firm int) {
	switch own {
	case 1:
		s.positive++
	case -1:
		s.negative++
	}
	switch firm {
	case 1:
		s.up++
	case -1:
		s.down++
	}
}

// answer takes the crystals together, or one of them firmly, as reason for a yes:
// one of three that is clear of 0 by its own interval alone comes in one of seven
// series in which there is nothing.
func (s *readings) answer(list []*ContrastResult) (verdict, text string) {
	up, down := s.up > 0 || s.pooled > 0, s.down > 0 || s.pooled < 0
	switch {
	case s.estimable == 0:
		return VerdictUnknown, "The exchange cannot be estimated."
	case up && down || s.up > 0 && s.negative > 0:
		return VerdictUnsure, fmt.Sprintf("The crystals disagree: %d up, %d down.", s.positive, s.negative)
	case up && s.positive == 0:
		return VerdictYes, "Yes, in the crystals together, though in none of them alone."
	case up:
		return VerdictYes, fmt.Sprintf("Yes, in %s.", crystalsOf(s.positive, list))
	case down:
		return VerdictNo, fmt.Sprintf("No, the other way: m lies below 0 in %s, which no exchange makes; look for removed negatives, an offset or a wrong order of positions.", crystalsOf(s.negative, list))
	case s.positive+s.negative > 0:
		return VerdictUnsure, fmt.Sprintf("Undecided: by its own interval m is clear of 0 in %s (%d up, %d down), but not with %d crystals asked allowed for, and not in the crystals together.",
			crystalsOf(s.positive+s.negative, list), s.positive, s.negative, s.estimable)
	}
	return VerdictNo, "No exchange is seen."
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

// besides says that a curb was found beside m: what thickness does to the strongest lies
// partly there. The instrument is one slope that takes both together.
func besides(list []*ContrastResult) string {
	known, seen := 0, 0
	for _, c := range list {
		if !math.IsNaN(c.Curb.Q) {
			known++
		}
	}
	f := asking(list, known)
	for _, c := range list {
		if side(c.Curb.Q, c.Curb.Lo, c.Curb.Hi, 0, f) > 0 {
			seen++
		}
	}
	if seen == 0 {
		return ""
	}
	return fmt.Sprintf(" A curb q, a loss that grows with strength, is seen beside it in %s and is no part of this m: dynamical scattering makes both, a detector that saturates makes a curb. One slope takes both together.", crystalsOf(seen, list))
}

// slopeOf is m by the instrument, one slope; NaN where it was not fitted.
func slopeOf(c *ContrastResult) float64 {
	for _, m := range c.Models {
		if m.Model == "instrument" {
			return m.M.Value
		}
	}
	return math.NaN()
}

// qualified says what keeps m from being taken at its word: a curve of another shape
// than the model's, or a loss in the detector.
func qualified(r *Result, list []*ContrastResult) string {
	text := ""
	if misfit := misfits(list); misfit > 0 {
		text += fmt.Sprintf(" The model does not describe the curve in %s, so that this m is a number for another shape: look at the curve.", crystalsOf(misfit, list))
	}
	for _, e := range r.Ledger {
		if e.Check == "high counts" && e.Verdict != VerdictFine && e.Verdict != VerdictUnknown {
			return text + " The detector could have made a loss of the strongest: see high counts in the ledger."
		}
	}
	return text
}
