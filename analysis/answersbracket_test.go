package analysis

import (
	"strings"
	"testing"
)

// A bracket and a moment ratio that exclude each other leave m open, whichever of them is
// clear of 0.
func TestBracketBesideItsMomentRatio(t *testing.T) {
	for _, c := range []struct {
		name    string
		ratio   MomentRatio
		verdict string
		apart   bool
	}{
		{"ratio above", MomentRatio{M: 0.29, Lo: 0.136, Hi: 0.416}, VerdictUnsure, true},
		{"ratio below", MomentRatio{M: -0.1, Lo: -0.2, Hi: 0.01}, VerdictUnsure, true},
		{"ratio overlaps", MomentRatio{M: 0.1, Lo: 0.05, Hi: 0.2}, VerdictYes, false},
	} {
		x := &ContrastResult{Crystal: "L1", StrengthAxis: leadBracket, MomentRatio: c.ratio,
			Bracket: Bracket{Thick: interval(0.03, 0.02, 0.05, ""), Thin: interval(0.07, 0.04, 0.09, ""), Lo: 0.02, Hi: 0.09}}
		a := bracketAnswer(Answer{}, []*ContrastResult{x})
		if a.Verdict != c.verdict || strings.Contains(a.Text, "exclude each other") != c.apart {
			t.Errorf("%s: %q: %s", c.name, a.Verdict, a.Text)
		}
		if ratio := span(c.ratio.M, c.ratio.Lo, c.ratio.Hi); c.apart && !strings.Contains(a.Text, "0.020 to 0.090, and its moment ratio, "+ratio) {
			t.Errorf("%s: not both figures: %s", c.name, a.Text)
		}
	}
}

// Two positions on two crystals differ or not; that it is by thickness nothing shows, and
// which way halves err between them is not known.
func TestExchangeOfTwoCrystalsIsUndecidedAsToThickness(t *testing.T) {
	clear := Interval{Value: 0.1, Lo: 0.08, Hi: 0.12}
	pair := answered(clear, clear, 100, 0.4)
	pair.ThickCrystal, pair.Thin, pair.Thick = "L2", "a", "b"
	bracket := &ContrastResult{Crystal: "L1", ThickCrystal: "L2", Thin: "a", Thick: "b", StrengthAxis: leadBracket, MomentRatio: MomentRatio{M: 0.05, Lo: 0.02, Hi: 0.09},
		Bracket: Bracket{Thick: interval(0.03, 0.02, 0.05, ""), Thin: interval(0.07, 0.04, 0.09, ""), ThickSlope: clear, ThinSlope: clear, Lo: 0.02, Hi: 0.12}}
	for _, c := range []*ContrastResult{pair, bracket} {
		a := answerExchange(&Result{}, []*ContrastResult{c})
		text := a.Text + strings.Join(a.Detail, " ")
		if a.Verdict != VerdictUnsure || !strings.HasPrefix(a.Text, "Undecided as to thickness. Yes, ") || strings.Count(text, "lie on two crystals") != 1 {
			t.Errorf("%s: %q: %s", c.StrengthAxis, a.Verdict, a.Text)
		}
		if strings.Contains(text, "take it up") || strings.Contains(text, "take it down") {
			t.Errorf("a direction: %s", text)
		}
	}
}
