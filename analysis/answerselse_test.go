package analysis

import (
	"strings"
	"testing"
)

// The last card fails as soon as a check or a control does, names each once, and counts
// the warnings of steps and contrasts.
func TestAnswerElseCounts(t *testing.T) {
	entry := func(check, verdict string) LedgerEntry { return LedgerEntry{Check: check, Verdict: verdict} }
	halves := []ControlResult{{Control: "halves", Crystal: "L1", Verdict: VerdictFails}, {Control: "halves", Crystal: "L2", Verdict: VerdictFails}}
	warned := []ContrastResult{{Warnings: []WarningResult{{Code: "a"}, {Code: "b"}}}}
	for _, c := range []struct {
		name    string
		r       Result
		verdict string
		says    []string
		silent  []string
	}{
		{"nothing", Result{}, VerdictFine, []string{"No check of the ledger gives a caution"}, []string{"warning", "fails"}},
		{"a caution", Result{Ledger: []LedgerEntry{entry("dose", VerdictCaution), entry("dose", VerdictCaution)}}, VerdictCaution, []string{"No check fails; 1 gives a caution.", "caution: dose"}, []string{"dose, dose"}},
		{"a check", Result{Ledger: []LedgerEntry{entry("dose", VerdictFails), entry("ice", VerdictCaution)}}, VerdictFails, []string{"1 check of the ledger fails; 1 gives a caution.", "fails: dose", "caution: ice"}, []string{"control"}},
		{"a control", Result{Controls: halves}, VerdictFails, []string{"No check of the ledger fails, but 1 control fails", "controls that fail: halves"}, []string{"halves, halves", "caution"}},
		{"both", Result{Ledger: []LedgerEntry{entry("dose", VerdictFails)}, Controls: halves}, VerdictFails, []string{"1 check of the ledger and 1 control fail:", "fails: dose", "controls that fail: halves"}, nil},
		{"warnings", Result{Warnings: []WarningResult{{Code: "c"}}, Contrasts: warned}, VerdictFine, []string{"3 warnings"}, nil},
	} {
		a := answerElse(&c.r)
		text := a.Text + " " + strings.Join(a.Detail, "; ")
		if a.Verdict != c.verdict {
			t.Errorf("%s: verdict %q, want %q", c.name, a.Verdict, c.verdict)
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
