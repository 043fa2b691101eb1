package analysis

import (
	"context"
	"math"
	"reflect"
	"testing"

	"thinward/analysis/simulate"
)

// small is a demonstration of two crystals with a true exchange, cheap enough for
// controls.
func small() *simulate.Plan {
	p := simulate.Tarn()
	p.DMin, p.Crystals = 1.3, p.Crystals[:2]
	return p
}

func controlsOf(t *testing.T, p *simulate.Plan, set *Settings) (*Study, map[string][]ControlResult) {
	t.Helper()
	s := studyOf(t, p, set)
	list, err := s.Controls(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	by := map[string][]ControlResult{}
	for _, c := range list {
		by[c.Control] = append(by[c.Control], c)
		if c.Can == "" || c.Verdict == "" || c.Passed != (c.Verdict == VerdictFine) {
			t.Errorf("%s, %s: can see %q, verdict %q, passed %t", c.Control, c.Crystal, c.Can, c.Verdict, c.Passed)
		}
	}
	return s, by
}

func TestControls(t *testing.T) {
	s, by := controlsOf(t, small(), &Settings{Replicates: 100, Flips: 200})
	for control, n := range map[string]int{
		controlHalves: 4, controlSwapped: 3, controlNoise: 2, controlDetection: 2, controlExchange: 2, controlCurb: 2, controlReplicate: 1,
	} {
		if len(by[control]) != n {
			t.Errorf("%s: %d rows, want %d", control, len(by[control]), n)
		}
	}
	if c := by[controlReplicate][0]; c.Verdict != VerdictUnknown || c.Why == "" {
		t.Errorf("without a replicate the control says %+v", c)
	}
	for _, c := range by[controlExchange] {
		if !c.Passed || !(math.Abs(c.M.Value-injectedM) < 0.005) {
			t.Errorf("an exchange of %g came back as %+v", injectedM, c)
		}
	}
	for _, c := range by[controlNoise] {
		if !c.Passed || !(math.Abs(c.M.Value) < 0.01) || c.Draws < 90 {
			t.Errorf("noise-only replicas: %+v", c)
		}
	}
	for k, c := range by[controlDetection] {
		minimum := s.compared[s.primaryContrasts()[k]].Result.MinimumM
		if !(c.Expected > 0.6*minimum && c.Expected < 1.6*minimum) {
			t.Errorf("the detection limit is %g by replicas, %g by the standard error", c.Expected, minimum)
		}
	}
	for _, c := range by[controlSwapped] {
		if c.Crystal == "" && (c.P < c.M.Value-1 || c.Draws != 4) {
			t.Errorf("two crystals can be swapped in 4 ways: %+v", c)
		}
	}
}

// The same controls come out with one worker and with three.
func TestControlsDoNotDependOnWorkers(t *testing.T) {
	if !full() {
		t.Skip("sampled: THINWARD_FULL=1 runs it")
	}
	p := small()
	p.DMin = 1.6
	_, one := controlsOf(t, p, &Settings{Replicates: 100, Flips: 200, Workers: 1})
	_, three := controlsOf(t, p, &Settings{Replicates: 100, Flips: 200, Workers: 3})
	for name := range one {
		for k := range one[name] {
			if a, b := one[name][k], three[name][k]; a.M.Value != b.M.Value && !(math.IsNaN(a.M.Value) && math.IsNaN(b.M.Value)) || a.Why != b.Why {
				t.Errorf("%s: %+v and %+v", name, a, b)
			}
		}
	}
}

// With one crystal the same controls run on the halves of its own positions.
func TestControlsOfOneCrystal(t *testing.T) {
	p := small()
	p.DMin, p.Crystals = 1.7, p.Crystals[:1]
	_, by := controlsOf(t, p, &Settings{Replicates: 100, Flips: 200})
	for _, control := range []string{controlHalves, controlSwapped, controlNoise, controlExchange} {
		if len(by[control]) == 0 {
			t.Errorf("%s is missing", control)
		}
	}
	for _, c := range by[controlExchange] {
		if !c.Passed {
			t.Errorf("%+v", c)
		}
	}
}

// Replicate positions that do not differ pass, the only full null; ones that do
// differ fail.
func TestReplicateControl(t *testing.T) {
	if !full() {
		t.Skip("sampled: THINWARD_FULL=1 runs it")
	}
	p := simulate.Replicates(2)
	p.DMin, p.Crystals = 1.5, p.Crystals[:2]
	_, by := controlsOf(t, p, &Settings{Replicates: 100, Flips: 200})
	passed := 0
	for _, c := range by[controlReplicate] {
		if c.Passed {
			passed++
		}
	}
	if len(by[controlReplicate]) != 2 || passed != 2 {
		t.Errorf("%+v", by[controlReplicate])
	}
	for i := range p.Crystals {
		p.Crystals[i].Positions[1].Exchange = 0.1
	}
	_, by = controlsOf(t, p, &Settings{Replicates: 100, Flips: 200})
	for _, c := range by[controlReplicate] {
		if c.Passed {
			t.Errorf("places that differ by an exchange of 0.1 pass: %+v", c)
		}
	}
}

func TestSpecification(t *testing.T) {
	p := small()
	p.DMin = 1.4
	s := studyOf(t, p, &Settings{Replicates: 100, Flips: 200})
	table, err := s.Specification(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	choices, leading := map[string]map[string]int{}, 0
	for _, row := range table {
		if row.Leading {
			leading++
			for _, c := range s.primaryContrasts() {
				x := s.compared[c]
				if x.Result.Crystal == row.Crystal && row.M != (Interval{x.Result.Exchange.M, x.Result.Exchange.Lo, x.Result.Exchange.Hi, x.Result.Exchange.Why}) {
					t.Errorf("the leading row %+v is not the result %+v", row, x.Result.Exchange)
				}
			}
			continue
		}
		if choices[row.Choice] == nil {
			choices[row.Choice] = map[string]int{}
		}
		choices[row.Choice][row.Level]++
		if math.IsNaN(row.M.Value) {
			t.Errorf("%s, %s: %s", row.Choice, row.Level, row.M.Why)
		}
		if row.Choice == choiceScale || row.Choice == choiceAnchor {
			for _, c := range s.primaryContrasts() {
				if x := s.compared[c]; x.Result.Crystal == row.Crystal && !(math.Abs(row.M.Value-x.Result.Exchange.M) < x.Result.Exchange.SE) {
					t.Errorf("%s %s moves m from %g to %g", row.Choice, row.Level, x.Result.Exchange.M, row.M.Value)
				}
			}
		}
	}
	if leading != 2 {
		t.Errorf("%d leading rows", leading)
	}
	for choice, n := range map[string]int{choiceAxis: 7, choiceModel: 2, choiceScale: 3, choiceAnchor: 4, choiceGiants: 3, choiceLeave: 3, choiceFriedel: 1} {
		if len(choices[choice]) != n {
			t.Errorf("%s: levels %v, want %d", choice, choices[choice], n)
		}
	}
	again, err := s.Specification(context.Background())
	if err != nil || !reflect.DeepEqual(again[0].Level, table[0].Level) {
		t.Errorf("asked twice: %v", err)
	}
	entries, err := s.Ledger(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	for _, check := range []string{"scale variants", "anchors", "exclusions", "Friedel mates"} {
		wantVerdict(t, entries, check, VerdictFine)
	}
}
