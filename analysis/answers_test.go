package analysis

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func answered(fit, instrument Interval, f, p float64) *ContrastResult {
	return &ContrastResult{Crystal: "L1", Primary: true, StrengthAxis: "crystals",
		Exchange: Exchange{M: fit.Value, Lo: fit.Lo, Hi: fit.Hi, F: f}, OverIdent: OverIdent{P: p, DF: 1},
		Models: []Model{{Model: "instrument", M: instrument}}}
}

func TestAnswerExchangeSaysWhatWeakensIt(t *testing.T) {
	clear, open := Interval{Value: 0.1, Lo: 0.04, Hi: 0.16}, Interval{Value: 0.1, Lo: -0.05, Hi: 0.3}
	loss := LedgerEntry{Check: "high counts", Verdict: VerdictCaution}
	for _, c := range []struct {
		name    string
		x       *ContrastResult
		ledger  []LedgerEntry
		verdict string
		says    []string
		silent  []string
	}{
		{"firm axis", answered(clear, open, 80, 0.4), nil, VerdictYes, []string{"Yes, in 1 of 1 crystal."}, []string{"weak", "shape", "detector"}},
		{"weak axis, the wider interval holds 0", answered(clear, open, 20, 0.4), nil, VerdictNo, []string{"weak"}, nil},
		{"weak axis, both clear", answered(clear, clear, 20, 0.4), nil, VerdictYes, []string{"weak", "Anderson-Rubin"}, nil},
		{"curve of another shape", answered(clear, clear, 80, 1e-8), nil, VerdictUnsure, []string{"does not describe the curve in 1 of 1 crystal"}, []string{"detector"}},
		{"loss of the strongest", answered(clear, clear, 80, 0.4), []LedgerEntry{loss}, VerdictYes, []string{"detector"}, []string{"shape"}},
	} {
		got := answerExchange(&Result{Ledger: c.ledger}, []*ContrastResult{c.x})
		text := got.Text + strings.Join(got.Detail, " ")
		if got.Verdict != c.verdict {
			t.Errorf("%s: verdict %q, want %q", c.name, got.Verdict, c.verdict)
		}
		for _, s := range c.says {
			if !strings.Contains(text, s) {
				t.Errorf("%s: %q does not say %q", c.name, text, s)
			}
		}
		for _, s := range c.silent {
			if strings.Contains(text, s) {
				t.Errorf("%s: %q says %q", c.name, text, s)
			}
		}
	}
}

func TestAnswerElseNamesFailedControls(t *testing.T) {
	r := &Result{Ledger: []LedgerEntry{{Check: "giants", Verdict: VerdictCaution}}, Controls: []ControlResult{{Control: "swapped positions", Verdict: VerdictFails}, {Control: "halves", Verdict: VerdictFine}}}
	a := answerElse(r)
	if all := a.Text + strings.Join(a.Detail, " "); a.Verdict != VerdictFails || !strings.Contains(all, "controls that fail: swapped positions") || strings.Contains(all, "halves") {
		t.Errorf("%q: %s", a.Verdict, all)
	}
	r.Ledger, r.Controls = nil, nil
	if a = answerElse(r); a.Verdict != VerdictFine {
		t.Errorf("nothing wrong: %q: %s", a.Verdict, a.Text)
	}
}

// With the primary contrast first the positions come thin, thick, mid. Three crystals
// that rise throughout have L = 3 (1 + 4 + 9) = 42 and p = (1/3!)^3 (Page 1963).
func TestPageTrendRunsAlongThickness(t *testing.T) {
	j := &joined{crystals: &CrystalsResult{}, thickness: &ThicknessResult{}}
	for _, name := range []string{"L1", "L2", "L3"} {
		l := ThicknessLine{Crystal: name, T: []float64{140, 310, 220}, Mu: []float64{0, 0.08, 0.04}, MuSE: []float64{0, 0.02, 0.01}}
		l.ascend()
		if l.T[1] != 220 || l.Mu[1] != 0.04 || l.MuSE[2] != 0.02 {
			t.Fatalf("not in the order of thickness: %v %v %v", l.T, l.Mu, l.MuSE)
		}
		j.thickness.Lines = append(j.thickness.Lines, l)
	}
	new(Study).pageTrend(j)
	if j.crystals.PageL != 42 || !floatcmp.Equal(j.crystals.PageP, 1.0/216, 1e-12, 0) {
		t.Errorf("L = %g, p = %g", j.crystals.PageL, j.crystals.PageP)
	}
	j.thickness.Lines[1].T[1], j.crystals.PageL = 140, -1
	if new(Study).pageTrend(j); j.crystals.PageL != -1 {
		t.Error("positions of equal thickness have no order, but a trend was tested")
	}
}

// crystalsWith are contrasts whose m has a standard error of 0.01.
func crystalsWith(m ...float64) ([]*ContrastResult, *CrystalsResult) {
	var list []*ContrastResult
	sum := 0.0
	for _, v := range m {
		i := Interval{Value: v, Lo: v - 0.0196, Hi: v + 0.0196}
		list = append(list, answered(i, i, 100, 0.4))
		sum += v / float64(len(m))
	}
	half := 0.0196 / math.Sqrt(float64(len(m)))
	return list, &CrystalsResult{N: len(m), InThese: Interval{Value: sum, Lo: sum - half, Hi: sum + half}}
}

// Of three crystals in which there is nothing, one interval of 95 % misses 0 in one
// series of seven: alone it is no yes. All below 0 is not a disagreement.
func TestAnswerExchangeAllowsForCrystals(t *testing.T) {
	for _, c := range []struct {
		name    string
		m       []float64
		verdict string
		says    string
	}{
		{"one alone, not firmly", []float64{0.022, -0.005, -0.006}, VerdictUnsure, "1 up, 0 down"},
		{"one firmly", []float64{0.03, -0.015, -0.015}, VerdictYes, "Yes, in 1 of 3 crystals"},
		{"none alone, together", []float64{0.018, 0.017, 0.016}, VerdictYes, "though in none of them alone"},
		{"nothing", []float64{0.005, -0.008, 0.002}, VerdictNo, "of 0.016 in the crystals together"},
		{"all below", []float64{-0.05, -0.06, -0.04}, VerdictNo, "the other way: m lies below 0 in 3 of 3"},
		{"both ways", []float64{0.05, -0.05, 0.05}, VerdictUnsure, "disagree: 2 up, 1 down"},
	} {
		list, together := crystalsWith(c.m...)
		a := answerExchange(&Result{Crystals: together}, list)
		if a.Verdict != c.verdict || !strings.Contains(a.Text, c.says) {
			t.Errorf("%s: %q: %s", c.name, a.Verdict, a.Text)
		}
	}
}

// Smallest p of three at 0.02: Holm's is 0.06.
func TestAnswersAllowForCrystals(t *testing.T) {
	curve := func(p ...float64) (list []*ContrastResult) {
		for _, v := range p {
			list = append(list, &ContrastResult{StrengthAxis: "crystals", Strength: Curve{PStrength: v}})
		}
		return list
	}
	for _, c := range []struct {
		list    []*ContrastResult
		verdict string
	}{{curve(0.02, 0.5, 0.6), VerdictNo}, {curve(0.02), VerdictYes}, {curve(0.01, 0.5, 0.6), VerdictYes}, {curve(0.02, math.NaN()), VerdictYes}, {curve(math.NaN()), VerdictUnknown}} {
		if a := answerWhere(c.list); a.Verdict != c.verdict {
			t.Errorf("curves: %q: %s", a.Verdict, a.Text)
		}
	}
	b := func(z ...float64) (list []*ContrastResult) {
		for _, v := range z {
			list = append(list, &ContrastResult{Resolution: Resolution{DeltaB: v, DeltaBLo: v - 1.96, DeltaBHi: v + 1.96, FittedB: v, FittedBSE: 1},
				Correlation: Correlation{R: 1, Lo: 0.9, Hi: 1.1}, MomentRatio: MomentRatio{M: v, Lo: v - 1.96, Hi: v + 1.96}})
		}
		return list
	}
	for _, c := range []struct {
		z                []float64
		differ, resolved string
	}{
		{[]float64{2.3}, VerdictYes, VerdictYes}, {[]float64{2.1}, VerdictNo, VerdictYes}, {[]float64{2.3, 0, 0}, VerdictNo, VerdictNo}, {[]float64{0, 2.5, 0}, VerdictNo, VerdictYes},
		{[]float64{0, -2.7, 0}, VerdictYes, VerdictYes}, {[]float64{math.NaN()}, VerdictNo, VerdictUnknown},
	} {
		if a := answerDiffer(b(c.z...)); a.Verdict != c.differ {
			t.Errorf("differ, z %v: %q: %s", c.z, a.Verdict, a.Text)
		}
		if a := answerResolution(b(c.z...)); a.Verdict != c.resolved {
			t.Errorf("resolution, z %v: %q: %s", c.z, a.Verdict, a.Text)
		}
	}
	// Sums by shell and the fitted scale must say the same.
	for _, c := range []struct {
		fitted, se float64
		verdict    string
	}{{2.3, 1, VerdictYes}, {1, 1, VerdictUnsure}, {-2.3, 1, VerdictUnsure}, {0, math.NaN(), VerdictYes}} {
		list := b(2.3)
		list[0].Resolution.FittedB, list[0].Resolution.FittedBSE = c.fitted, c.se
		if a := answerResolution(list); a.Verdict != c.verdict {
			t.Errorf("sums at 2.3, scale at %g +- %g: %q: %s", c.fitted, c.se, a.Verdict, a.Text)
		}
	}
}

func TestBracketAnswerBySign(t *testing.T) {
	at := func(lo, hi float64) *ContrastResult {
		return &ContrastResult{Crystal: "L1", StrengthAxis: leadBracket, Bracket: Bracket{Thick: interval(lo, lo, lo, ""), Thin: interval(hi, hi, hi, ""), Lo: lo, Hi: hi},
			MomentRatio: MomentRatio{M: lo, Lo: lo, Hi: hi}}
	}
	nan := math.NaN()
	for _, c := range []struct {
		name    string
		list    []*ContrastResult
		verdict string
		says    string
	}{
		{"above 0", []*ContrastResult{at(0.02, 0.08)}, VerdictYes, "from 0.020 to 0.080"},
		{"below 0", []*ContrastResult{at(-0.08, -0.02)}, VerdictNo, "the reverse"},
		{"holds 0", []*ContrastResult{at(-0.02, 0.08)}, VerdictUnsure, "Undecided"},
		{"one of two holds 0", []*ContrastResult{at(0.01, 0.08), at(-0.02, 0.04)}, VerdictUnsure, "0.080"},
		{"not estimable", []*ContrastResult{at(nan, nan)}, VerdictUnknown, "too few symmetry equivalents"},
	} {
		a := bracketAnswer(Answer{}, c.list)
		if a.Verdict != c.verdict || !strings.Contains(a.Text, c.says) {
			t.Errorf("%s: %q: %s", c.name, a.Verdict, a.Text)
		}
	}
}

// A line through the thinnest position rises as soon as the thicker ones lie above it;
// that it grows needs the points to lie on it. Chi-squared of 3.84 with one degree of
// freedom has p = 0.05.
func TestAnswerThicknessAsksForALine(t *testing.T) {
	for _, c := range []struct {
		chi2    float64
		verdict string
	}{{3.7, VerdictYes}, {4, VerdictUnsure}} {
		line := ThicknessLine{Crystal: "L1", T: []float64{140, 220, 310}, Mu: []float64{0, 0.08, 0.08}, Slope: Interval{Value: 0.06, Lo: 0.04, Hi: 0.08}, Chi2: c.chi2, DF: 1}
		a := answerThickness(&Result{Thickness: &ThicknessResult{Slope: line.Slope, Lines: []ThicknessLine{line, {Crystal: "L2", Why: "m is not estimable"}}}})
		if a.Verdict != c.verdict || !strings.Contains(a.Text, "over 1 crystal") {
			t.Errorf("chi2 %g: %q: %s", c.chi2, a.Verdict, a.Text)
		}
	}
	// No growth: a half width of 0.0196 is a standard error of 0.01, of which 2.80 are seen with
	// 80 % power (1.960 + 0.842).
	flat := ThicknessLine{Crystal: "L1", T: []float64{140, 220, 310}, Mu: []float64{0, 0, 0}, Slope: Interval{Value: 0, Lo: -0.0196, Hi: 0.0196}}
	line := &AcrossLine{Crystals: []string{"L1", "L2", "L3"}, Slope: Interval{Value: 0.011, Lo: -0.1, Hi: 0.1}, Intercept: Interval{Value: 0.002, Lo: -0.1, Hi: 0.1}}
	a := answerThickness(&Result{Thickness: &ThicknessResult{Slope: flat.Slope, Lines: []ThicknessLine{flat, flat}, Across: line}})
	if a.Verdict != VerdictNo || !strings.Contains(a.Text, "over 2 crystals; 0.028 per 100 nm would have been seen with 80 % power") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
	if last := a.Detail[len(a.Detail)-1]; !strings.Contains(last, "between 3 crystals") || !strings.Contains(last, "0.011") || !strings.Contains(last, "0.002") {
		t.Errorf("%q", a.Detail)
	}
	line.Why = "too few"
	tilt := []TiltSlope{{Crystal: "L1", Slope: Interval{Value: 0.061, Lo: 0.05, Hi: 0.07}, Between: Interval{Value: 0.072, Lo: 0.06, Hi: 0.08}}, {Crystal: "L2", Slope: none(), Why: "no rotation angles"}}
	tilted := answerThickness(&Result{Thickness: &ThicknessResult{Slope: flat.Slope, Lines: []ThicknessLine{flat}, Tilt: tilt}})
	if last := tilted.Detail[len(tilted.Detail)-1]; len(tilted.Detail) != 2 || !strings.Contains(last, "L1 by tilt 0.061 (0.050 to 0.070); from thin to thick 0.072") || strings.Contains(last, "L2") {
		t.Errorf("%q", tilted.Detail)
	}
	if lines := withinTilt(tilt[1:]); lines != nil {
		t.Error(lines)
	}
	if lines := withinTilt([]TiltSlope{tilt[0], tilt[0]}); len(lines) != 2 {
		t.Errorf("not a line a crystal: %q", lines)
	}
	// Standard errors of 0.0051 each: 0.0216 is three of the difference.
	for between, less := range map[float64]bool{0.080: false, 0.085: true} {
		tilt[0].Between = Interval{Value: between, Lo: between - 0.01, Hi: between + 0.01}
		if text := strings.Join(withinTilt(tilt[:1]), ""); strings.Contains(text, "The longer way does less") != less {
			t.Errorf("%g: %s", between, text)
		}
	}
	if a := answerThickness(&Result{Thickness: &ThicknessResult{Slope: flat.Slope, Lines: []ThicknessLine{flat}, Across: line}}); len(a.Detail) != 1 {
		t.Errorf("%q", a.Detail)
	}
}

// A curb beside m is said, with the one slope that takes both; it must be clear of 0 with all
// crystals allowed for.
func TestAnswerExchangeSaysWhatACurbTakes(t *testing.T) {
	clear, slope := Interval{Value: 0.03, Lo: 0.01, Hi: 0.05}, Interval{Value: 0.11, Lo: 0.08, Hi: 0.14}
	with := func(q, lo, hi float64) *ContrastResult {
		c := answered(clear, slope, 80, 0.4)
		c.Curb = Curb{Q: q, Lo: lo, Hi: hi}
		return c
	}
	nan := math.NaN()
	for _, c := range []struct {
		name string
		list []*ContrastResult
		says string
	}{
		{"clear in both", []*ContrastResult{with(0.04, 0.02, 0.06), with(0.05, 0.02, 0.08)}, "in 2 of 2 crystals and is no part of this m"},
		{"clear in one", []*ContrastResult{with(0.04, 0.02, 0.06), with(0.01, -0.02, 0.04)}, "in 1 of 2 crystals"},
		{"clear of 0 only by its own interval", []*ContrastResult{with(0.0101, 0.0001, 0.0201), with(nan, nan, nan)}, "in 1 of 2 crystals"},
		{"not with two asked", []*ContrastResult{with(0.0101, 0.0001, 0.0201), with(0, -0.01, 0.01)}, ""},
		{"a gain of the strongest", []*ContrastResult{with(-0.04, -0.06, -0.02)}, ""},
		{"not in the model", []*ContrastResult{with(nan, nan, nan)}, ""},
	} {
		a := answerExchange(&Result{}, c.list)
		got := strings.Contains(a.Text, "curb")
		if got != (c.says != "") || !strings.Contains(a.Text, c.says) {
			t.Errorf("%s: %s", c.name, a.Text)
		}
		for _, line := range a.Detail {
			if strings.HasSuffix(line, "L1 m = 0.030 (0.010 to 0.050); by one slope 0.110") != got {
				t.Errorf("%s: %s", c.name, line)
			}
		}
	}
}
