package analysis

import (
	"context"
	"fmt"
	"maps"
	"slices"
	"testing"

	"thinward/analysis/simulate"
)

// Series without a flaw raise few alarms, all checks of the ledger, controls and
// answers taken together. Left out is what three crystals must be cautioned for.
func TestFalseAlarms(t *testing.T) {
	if !full() {
		t.Skip("THINWARD_FULL=1 runs it")
	}
	n := repeats(12)
	alarmed, failed, yes := 0, 0, 0
	by := map[string]int{}
	for seed := range uint64(n) {
		s := studyOf(t, simulate.Sound(seed+1), &Settings{Replicates: 500, Flips: 1000})
		r, err := s.Run(context.Background(), nil)
		if err != nil {
			t.Fatal(err)
		}
		alarms, fails := map[string]bool{}, false
		for _, e := range r.Ledger {
			if e.Check == "number of crystals" || e.Verdict != VerdictCaution && e.Verdict != VerdictFails {
				continue
			}
			alarms[e.Check+": "+e.Verdict] = true
			fails = fails || e.Verdict == VerdictFails
		}
		for _, c := range r.Controls {
			if c.Verdict == VerdictFails {
				alarms["control "+c.Control] = true
				fails = true
				t.Logf("seed %d: %s: %s, m = %s, p = %g", seed+1, c.Control, c.Why, span(c.M.Value, c.M.Lo, c.M.Hi), c.P)
			}
		}
		said := false
		for _, a := range r.Answers {
			if a.Section != "cautions" && (a.Verdict == VerdictYes || a.Verdict == VerdictUnsure) {
				by["answer "+a.Section+": "+a.Verdict]++
				said = said || a.Question != "Do the intensities differ at all?" && a.Verdict == VerdictYes
			}
		}
		t.Logf("seed %d: alarms %v, a yes that is not so %t", seed+1, slices.Sorted(maps.Keys(alarms)), said)
		for k := range alarms {
			by[k]++
		}
		if len(alarms) > 0 {
			alarmed++
		}
		if fails {
			failed++
		}
		if said {
			yes++
		}
	}
	text := ""
	for _, k := range slices.Sorted(maps.Keys(by)) {
		text += fmt.Sprintf("\n  %s in %d", k, by[k])
	}
	t.Logf("%d sound series: an alarm in %d, a failure in %d, a yes that is not so in %d%s", n, alarmed, failed, yes, text)
	if 2*alarmed > n || 4*failed > n || 4*yes > n {
		t.Error("sound series raise too many alarms")
	}
}
