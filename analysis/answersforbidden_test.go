package analysis

import (
	"math"
	"strings"
	"testing"
	"thinward/analysis/internal/floatcmp"

	"thinward/analysis/intensity"
)

func TestAnswerForbiddenCountsOnlyWhatWasRecorded(t *testing.T) {
	list := []*ContrastResult{{Crystal: "L1", Thin: "a", Thick: "b"}, {Crystal: "L2", Thin: "a", Thick: "b"}}
	row := func(crystal, position string, n int, ratio float64) Forbidden {
		return Forbidden{Crystal: crystal, Position: position, Element: "all", N: n, Ratio: ratio, SU: 0.01}
	}
	r := &Result{Forbidden: []Forbidden{row("L1", "a", 5, 0), row("L1", "b", 5, 0.1), row("L2", "a", 0, math.NaN()), row("L2", "b", 3, 0.1)}}
	if a := answerForbidden(r, list); a.Verdict != VerdictYes || !strings.Contains(a.Text, "1 of 1 crystals that recorded them") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
	r.Ledger = []LedgerEntry{{Check: checkGroup, Verdict: VerdictFails}}
	if a := answerForbidden(r, list); a.Verdict != VerdictUnsure || !strings.Contains(a.Text, "the space group is wrong") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
	for i := range r.Forbidden {
		r.Forbidden[i].N, r.Forbidden[i].Why = 0, intensity.NoneForbidden
	}
	if a := answerForbidden(r, list); a.Verdict != VerdictUnknown || !strings.Contains(a.Text, "forbids no reflection") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
}

// Where a centring forbids there is no lattice point: what is measured there makes no
// filling, and where it rises too nothing else does.
func TestAnswerForbiddenLeavesTheCentringOut(t *testing.T) {
	list := []*ContrastResult{{Crystal: "L1", Thin: "a", Thick: "b"}}
	rows := func(element string, centring bool, why string, thin, thick float64) []Forbidden {
		n := 40
		if why != "" {
			n = 0
		}
		return []Forbidden{
			{Crystal: "L1", Position: "a", Element: element, Centring: centring, N: n, Ratio: thin, SU: 0.003, Why: why},
			{Crystal: "L1", Position: "b", Element: element, Centring: centring, N: n, Ratio: thick, SU: 0.003, Why: why},
		}
	}
	null := "where the C centring forbids, a null for background: L1 "
	for _, c := range []struct {
		name    string
		rows    []Forbidden
		verdict string
		says    []string
	}{
		{"centring alone, rising", append(rows("all", false, intensity.OnlyCentring, math.NaN(), math.NaN()), rows("C centring", true, "", 0.023, 0.111)...),
			VerdictUnknown, []string{"No screw axis or glide plane forbids any", "no lattice point", null + "thin 0.023 (0.017 to 0.029), thick 0.111"}},
		{"both rise", append(rows("all", false, "", 0.01, 0.1), rows("C centring", true, "", 0.023, 0.111)...),
			VerdictUnsure, []string{"so is what was measured where the centring forbids", null}},
		{"screw axes rise, the null does not", append(rows("all", false, "", 0.01, 0.1), rows("C centring", true, "", 0.001, 0.002)...),
			VerdictYes, []string{"They rise with thickness in 1 of 1 crystals", null}},
	} {
		a := answerForbidden(&Result{Forbidden: c.rows}, list)
		text := a.Text + strings.Join(a.Detail, " ")
		if a.Verdict != c.verdict {
			t.Errorf("%s: %q: %s", c.name, a.Verdict, text)
		}
		for _, s := range c.says {
			if !strings.Contains(text, s) {
				t.Errorf("%s: %q does not say %q", c.name, text, s)
			}
		}
	}
}

// Two positions on two crystals tell nothing of thickness, whatever is filled.
func TestAnswerForbiddenOfTwoCrystals(t *testing.T) {
	list := []*ContrastResult{{Crystal: "L1", ThickCrystal: "L2", Thin: "a", Thick: "b"}}
	rows := []Forbidden{{Crystal: "L1", Position: "a", Element: "all", N: 9, Ratio: 0.01, SU: 0.003}, {Crystal: "L2", Position: "b", Element: "all", N: 9, Ratio: 0.1, SU: 0.003}}
	a := answerForbidden(&Result{Forbidden: rows}, list)
	if a.Verdict != VerdictUnsure || !strings.Contains(a.Text, "Undecided as to thickness: they are stronger in the thick position in 1 of 1 pair of crystals") || strings.Contains(a.Text, "rise with thickness") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
	rows[1].Ratio = 0.011
	if a = answerForbidden(&Result{Forbidden: rows}, list); a.Verdict != VerdictNo || strings.Contains(a.Text, "with thickness") || !strings.Contains(a.Text, "in each pair") {
		t.Errorf("%q: %s", a.Verdict, a.Text)
	}
}

// With n = 5 and 5, errors 0.024 and 0.019 the ratio 3.136 has 7.600 degrees of freedom (Welch
// 1947); Student's tail by numerical integration and the normal quantile of Python's statistics:
// p = 0.007408 one-sided, 2.4368.
func TestRiseOfFew(t *testing.T) {
	got := rise(&Forbidden{N: 5, Ratio: 0.043, SU: 0.024}, &Forbidden{N: 5, Ratio: 0.139, SU: 0.019})
	floatcmp.Check(t, "few", got, 2.4368, 1e-3, 0)
	got = rise(&Forbidden{N: 4000, Ratio: 0.139, SU: 0.019}, &Forbidden{N: 4000, Ratio: 0.043, SU: 0.024})
	floatcmp.Check(t, "many", got, -3.136, 0.004, 0)
}
