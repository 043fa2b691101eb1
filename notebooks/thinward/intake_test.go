package main

import (
	"strings"
	"testing"

	"thinward/analysis"
)

// What is the same of many places is said once, with a line for each proposal, and what is
// said of the indexing does not come again as a warning.
func TestIntakeTextSaysThingsOnce(t *testing.T) {
	d := &analysis.IntakeDetails{Laue: &analysis.LaueResult{Class: "2/m", Verdict: analysis.VerdictFine, Why: "all agree"}}
	for _, where := range []string{"L1/mid", "L1/thick", "L2/thin", "L2/mid", "L2/thick"} {
		d.Indexing = append(d.Indexing, analysis.IndexingResult{Where: where, Text: "the intensities do not decide"})
		d.Common = append(d.Common, analysis.CommonResult{Crystal: "L1", Position: "thin", WithCrystal: where[:2] + "b", WithPosition: where[3:], Why: "few are common"})
	}
	d.Indexing = append(d.Indexing, analysis.IndexingResult{Where: "L3/thin", Text: "has been re-indexed", Proposal: "k,h,-l"})
	d.Warnings = []analysis.WarningResult{
		{Code: "indexing-ambiguous", Where: "L1/mid, L1/thick", Text: "the intensities do not decide"}, {Code: "reindexed", Where: "L3/thin", Text: "has been re-indexed"},
		{Code: "laue-class", Text: "the class is wrong"}, {Code: "angles", Where: "L1/mid", Text: "other angles"},
	}
	want := strings.Join([]string{
		"Laue class 2/m: all agree",
		"indexing of L1/mid, L1/thick, L2/thin and 2 more: the intensities do not decide",
		"indexing of L3/thin: has been re-indexed",
		`  propose in the manifest: reindex = "k,h,-l"`,
		"L1/thin and L1b/mid, L1/thin and L1b/thick, L1/thin and L2b/thin and 2 more: few are common",
		"the class is wrong",
		"L1/mid: other angles",
		"",
	}, "\n")
	if got := intakeText(d); got != want {
		t.Errorf("got\n%s\nwant\n%s", got, want)
	}
	d.Laue.Verdict = analysis.VerdictFails
	if got := intakeText(d); strings.Contains(got, "all agree") {
		t.Errorf("a warning is said twice:\n%s", got)
	}
}
