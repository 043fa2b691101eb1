package analysis

import (
	"fmt"
	"math"
)

// bracketAnswer says what one crystal, or a pair of crystals, can say.
func bracketAnswer(a Answer, list []*ContrastResult) Answer {
	var parts []string
	known, up, down := 0, 0, 0
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, c := range list {
		b := c.Bracket
		parts = append(parts, fmt.Sprintf("%s: by the model with a curb, which can take deviations for one, m = %s from half of the thick position and %s from half of the thin; moment ratio %s",
			label(c), span(b.Thick.Value, b.Thick.Lo, b.Thick.Hi), span(b.Thin.Value, b.Thin.Lo, b.Thin.Hi), span(c.MomentRatio.M, c.MomentRatio.Lo, c.MomentRatio.Hi)))
		if !math.IsNaN(b.ThickSlope.Value) && !math.IsNaN(b.ThinSlope.Value) {
			lowers, raises := ", whose own deviations take it down", ", whose own take it up"
			if c.ThickCrystal != "" {
				lowers, raises = "", ""
			}
			parts = append(parts, fmt.Sprintf("%s: by one slope, which reads curb and offset as exchange, m = %s from half of the thick position%s, and %s from half of the thin%s", label(c),
				span(b.ThickSlope.Value, b.ThickSlope.Lo, b.ThickSlope.Hi), lowers, span(b.ThinSlope.Value, b.ThinSlope.Lo, b.ThinSlope.Hi), raises))
		}
		if math.IsNaN(b.Lo) || math.IsNaN(b.Hi) || math.IsNaN(b.Thick.Value) || math.IsNaN(b.Thin.Value) {
			continue
		}
		known++
		lo, hi = math.Min(lo, b.Lo), math.Max(hi, b.Hi)
		switch {
		case b.Lo > 0:
			up++
		case b.Hi < 0:
			down++
		}
	}
	a.Detail = parts
	apart := outside(list)
	const why = " Only a bracket can be given, since no other crystal of the series says how strong each reflection is."
	width := fmt.Sprintf("halves of either position give m from %s to %s, a bracket without a level of confidence", short(lo), short(hi))
	const unrelated = "This holds only if the deviations of the two positions are unrelated."
	switch {
	case known == 0:
		a.Verdict, a.Text = VerdictUnknown, "It cannot be said: strengths would have to come from halves of the same position, and too few symmetry equivalents are there to make them."
	case up == len(list):
		a.Verdict, a.Text = VerdictYes, "Yes, as far as a bracket tells: "+width+"."+why+" "+unrelated
	case down == len(list):
		a.Verdict, a.Text = VerdictNo, "No, as far as a bracket tells, rather the reverse: "+width+"."+why+" "+unrelated
	default:
		a.Verdict, a.Text = VerdictUnsure, "Undecided: "+width+"."+why+" "+unrelated
	}
	if apart != "" {
		a.Text += apart
		if a.Verdict != VerdictUnknown {
			a.Verdict = VerdictUnsure
		}
	}
	return a
}

// outside says where the moment ratio lies wholly outside the bracket; empty where it does
// nowhere.
func outside(list []*ContrastResult) string {
	text := ""
	for _, c := range list {
		if m, b := c.MomentRatio, c.Bracket; m.Lo > b.Hi || m.Hi < b.Lo {
			text += fmt.Sprintf(" The bracket of %s, %s to %s, and its moment ratio, %s, exclude each other: the ratio takes in a curb, an offset and the deviations of either position, so that m is not known better than both together.",
				label(c), short(b.Lo), short(b.Hi), span(m.M, m.Lo, m.Hi))
		}
	}
	return text
}

// asToThickness takes back a yes or no that two positions on two crystals cannot give.
func asToThickness(a Answer, list []*ContrastResult) Answer {
	if list[0].ThickCrystal == "" {
		return a
	}
	if a.Verdict == VerdictYes {
		a.Verdict = VerdictUnsure
		a.Text = "Undecided as to thickness. " + a.Text
	}
	a.Text += " The two positions lie on two crystals: nothing here attributes a difference to thickness."
	return a
}
