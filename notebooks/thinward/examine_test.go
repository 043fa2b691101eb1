package main

import (
	"testing"

	"thinward/analysis"
)

// The last line of a run counts what speaks against its answer, each kind by itself.
func TestOneLineCountsWhatSpeaksAgainst(t *testing.T) {
	entry := func(verdict string) analysis.LedgerEntry { return analysis.LedgerEntry{Check: "x", Verdict: verdict} }
	sizes := []analysis.Answer{{Question: "Moved?", Text: "Yes.", Section: "sizes"}}
	for _, c := range []struct {
		name, want string
		r          analysis.Result
	}{
		{"nothing", "Moved? Yes. 0 cautions.", analysis.Result{Answers: sizes}},
		{"cautions and warnings", "Moved? Yes. 2 cautions, 3 warnings.", analysis.Result{Answers: sizes,
			Ledger:    []analysis.LedgerEntry{entry(analysis.VerdictCaution), entry(analysis.VerdictFine), entry(analysis.VerdictCaution)},
			Warnings:  make([]analysis.WarningResult, 1),
			Contrasts: []analysis.ContrastResult{{Warnings: make([]analysis.WarningResult, 2)}}}},
		{"failures", "1 failing check, 1 failing control, 1 caution.", analysis.Result{
			Ledger:   []analysis.LedgerEntry{entry(analysis.VerdictFails), entry(analysis.VerdictCaution)},
			Controls: []analysis.ControlResult{{Control: "halves", Verdict: analysis.VerdictFails}, {Control: "halves", Verdict: analysis.VerdictFails}, {Control: "swap", Verdict: analysis.VerdictFine}}}},
	} {
		if got := oneLine(&c.r); got != c.want {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}
