package analysis

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/intensity"
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
		{"curve of another shape", answered(clear, clear, 80, 1e-8), nil, VerdictYes, []string{"does not describe the curve in 1 of 1 crystal"}, []string{"detector"}},
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

func TestAnswerForbiddenCountsOnlyWhatWasRecorded(t *testing.T) {
	list := []*ContrastResult{{Crystal: "L1", Thin: "a", Thick: "b"}, {Crystal: "L2", Thin: "a", Thick: "b"}}
	row := func(crystal, position string, n int, ratio float64) Forbidden {
		return Forbidden{Crystal: crystal, Position: position, Element: "all", N: n, Ratio: ratio, SU: 0.01}
	}
	r := &Result{Forbidden: []Forbidden{row("L1", "a", 5, 0), row("L1", "b", 5, 0.1), row("L2", "a", 0, math.NaN()), row("L2", "b", 3, 0.1)}}
	if a := answerForbidden(r, list); a.Verdict != VerdictYes || !strings.Contains(a.Text, "1 of 1 crystals that recorded them") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
	for i := range r.Forbidden {
		r.Forbidden[i].N, r.Forbidden[i].Why = 0, intensity.NoneForbidden
	}
	if a := answerForbidden(r, list); a.Verdict != VerdictUnknown || !strings.Contains(a.Text, "forbids no reflection") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
}

func TestAnswerElseNamesFailedControls(t *testing.T) {
	r := &Result{Ledger: []LedgerEntry{{Check: "giants", Verdict: VerdictCaution}}, Controls: []ControlResult{{Control: "swapped positions", Verdict: VerdictFails}, {Control: "halves", Verdict: VerdictFine}}}
	a := answerElse(r)
	if all := a.Text + strings.Join(a.Detail, " "); a.Verdict != VerdictCaution || !strings.Contains(all, "controls that fail: swapped positions") || strings.Contains(all, "halves") {
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
