package analysis

import (
	"math"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
)

// ledgerContrasts judges the primary contrasts compared so far.
func (s *Study) ledgerContrasts(b *ledgerBook) {
	kinds := map[string][]placed{}
	put := func(check, where string, f evidence.Finding) { kinds[check] = append(kinds[check], placed{where, f}) }
	for _, c := range s.list {
		x := s.compared[c]
		if x == nil || !(c.Primary || c.Across()) {
			continue
		}
		s.judgeContrast(x, put)
	}
	for _, check := range []struct {
		name  string
		ideal float64
	}{
		{checkAxis, 1}, {checkDeviations, 1}, {checkOffset, 0}, {checkHighCounts, 0}, {checkModel, 1},
		{checkThird, 0}, {checkWeighted, 0}, {checkGhost, 1}, {checkBlocks, 1},
	} {
		b.fold(check.name, "contrasts", check.ideal, kinds[check.name])
	}
}

func (s *Study) judgeContrast(x *Compared, put func(check, where string, f evidence.Finding)) {
	r, where := &x.Result, s.Name(x.Contrast)
	independent := x.Leading == leadCrystals
	put(checkAxis, where, evidence.AxisOf(r.AxisAgreement, x.Leading, independent))
	put(checkDeviations, where, evidence.Deviations(r.Correlation.R, r.Correlation.Lo, r.Correlation.Hi, r.PairNoise, r.Bracket.ThinSlope.Value, r.Bracket.ThickSlope.Value, independent))
	if x.Leading != leadBracket {
		put(checkOffset, where, evidence.OffsetOf(r.Offset.O, r.Offset.Lo, r.Offset.Hi))
		put(checkModel, where, evidence.Describes(r.OverIdent.P, r.OverIdent.DF))
	}
	if independent {
		var forms []evidence.CurbForm
		for _, f := range r.CurbForms {
			forms = append(forms, evidence.CurbForm{Name: f.Form, Q: f.Q.Value, Lo: f.Q.Lo, Hi: f.Q.Hi, J: f.J, Refused: f.Refused})
		}
		put(checkHighCounts, where, evidence.HighCounts(forms))
	}
	for _, a := range r.Axes {
		if math.IsNaN(a.Delta.Value) {
			continue
		}
		switch a.Axis {
		case difference.AxisThird.String():
			put(checkThird, where, evidence.AgainstLeading(a.Delta.Value, a.Delta.Lo, a.Delta.Hi, s.movedByAxis(r.Crystal, a.Axis), "deviations that neighbouring positions of this crystal share"))
		case difference.AxisInverseVariance.String():
			put(checkWeighted, where, evidence.AgainstLeading(a.Delta.Value, a.Delta.Lo, a.Delta.Hi, s.movedByAxis(r.Crystal, a.Axis), "position-specific deviations, or a wrong ratio of sigmas"))
		}
	}
	worst := 0.0
	for _, name := range naiveNames(r) {
		worst = math.Max(worst, r.Naive[name].GhostScore)
	}
	put(checkGhost, where, evidence.GhostOf(worst, independent))
	if b := r.AngleBlocks; b != nil {
		put(checkBlocks, where, evidence.BlocksOf(b.Width, b.WidthSE, b.Deg, b.Why))
	}
}

// movedByAxis is m of the leading model on another axis minus that on the leading one, from
// the specification table; NaN where it has none.
func (s *Study) movedByAxis(crystal, axis string) float64 {
	lead, other := math.NaN(), math.NaN()
	for i := range s.spec {
		row := &s.spec[i]
		switch {
		case row.Crystal != crystal:
		case row.Leading:
			lead = row.M.Value
		case row.Choice == choiceAxis && row.Level == axis:
			other = row.M.Value
		}
	}
	return other - lead
}

// ledgerChoices judges how far m moves under other choices, from the
// specification table.
func (s *Study) ledgerChoices(b *ledgerBook) {
	if len(s.spec) == 0 {
		return
	}
	for _, kind := range []struct{ choice, check, what string }{
		{choiceScale, checkScale, "scale model"}, {choiceAnchor, checkAnchors, "anchor of the scale"},
		{choiceLeave, checkExclusions, "reflections to leave out"}, {choiceFriedel, checkFriedel, "treatment of Friedel mates"},
	} {
		var list []placed
		for _, x := range s.primaries() {
			if x == nil {
				continue
			}
			turn := evidence.Turn{Lo: math.Inf(1), Hi: math.Inf(-1)}
			lead, se, level := math.NaN(), math.NaN(), ""
			for _, row := range s.spec {
				if row.Crystal == x.Result.Crystal && row.Leading {
					lead, se = row.M.Value, (row.M.Hi-row.M.Lo)/2/zOf(s.settings.Level)
				}
				if row.Crystal == x.Result.Crystal && row.Choice == kind.choice && !math.IsNaN(row.M.Value) {
					turn.Lo, turn.Hi, turn.N = math.Min(turn.Lo, row.M.Value), math.Max(turn.Hi, row.M.Value), turn.N+1
					level = row.Level
				}
			}
			if turn.N == 1 {
				turn.Only, turn.Leading = onlyChoice(kind.choice, level)
			}
			if turn.N > 0 {
				list = append(list, placed{x.Result.Crystal, evidence.ChoiceOf(kind.what, lead, se, turn)})
			}
		}
		b.fold(kind.check, "crystals", 0, list)
	}
}

// onlyChoice names the level of a choice that is the only other one, and what leads.
func onlyChoice(choice, level string) (only, leading string) {
	if choice != choiceFriedel {
		return level, "in the leading analysis"
	}
	leading = friedelTogether
	if level == friedelTogether {
		leading = friedelApart
	}
	return "mates " + level, leading
}
