package analysis

import (
	"context"
	"slices"
	"testing"

	"thinward/analysis/evidence"
	"thinward/analysis/simulate"
)

// judged runs a plan as far as the ledger, with few draws: no verdict rests on more.
func judged(t *testing.T, p *simulate.Plan) []LedgerEntry {
	t.Helper()
	return judgedSeries(t, seriesOf(t, p))
}

func judgedSeries(t *testing.T, series Series) []LedgerEntry {
	t.Helper()
	s, err := New(series, &Settings{Replicates: 100, Flips: 200})
	if err != nil {
		t.Fatal(err)
	}
	return judgedStudy(t, s)
}

func judgedStudy(t *testing.T, s *Study) []LedgerEntry {
	t.Helper()
	ctx := context.Background()
	if _, err := s.IntakeTable(ctx); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Forbidden(ctx); err != nil {
		t.Fatal(err)
	}
	entries, err := s.Ledger(ctx)
	if err != nil {
		t.Fatal(err)
	}
	return entries
}

// verdictOf is the gravest verdict of a check, "" when it has no entry.
func verdictOf(entries []LedgerEntry, check string) string {
	grave := map[string]int{"": 0, VerdictUnknown: 1, VerdictFine: 2, VerdictCaution: 3, VerdictFails: 4}
	worst := ""
	for _, e := range entries {
		if e.Check == check && grave[e.Verdict] > grave[worst] {
			worst = e.Verdict
		}
	}
	return worst
}

func wantVerdict(t *testing.T, entries []LedgerEntry, check string, want ...string) {
	t.Helper()
	got := verdictOf(entries, check)
	for _, w := range want {
		if got == w {
			return
		}
	}
	t.Errorf("%s: %q, want %q", check, got, want)
	for _, e := range entries {
		if e.Check == check {
			t.Logf("%+v", e)
		}
	}
}

// three are the checks that three crystals without a replicate, or any series, cannot
// be fine in: what sound series of three must say. A primitive lattice has no null of a
// centring.
var three = map[string]string{checkReplicates: VerdictUnknown, checkCrystals: VerdictCaution, checkDouble: VerdictUnknown, checkNull: ""}

// A series without a flaw is fine in every check of the ledger.
func TestSoundSeriesHasACleanLedger(t *testing.T) {
	seeds := uint64(1)
	if full() {
		seeds = 6
	}
	dark := 0
	for seed := range seeds {
		s := studyOf(t, simulate.Sound(seed+1), &Settings{Replicates: 100, Flips: 200})
		if _, err := s.Specification(context.Background()); err != nil {
			t.Fatal(err)
		}
		entries := judgedStudy(t, s)
		for _, check := range LedgerChecks() {
			if want, ok := three[check]; ok {
				wantVerdict(t, entries, check, want)
				continue
			}
			if v := verdictOf(entries, check); v != VerdictFine {
				dark++
				t.Logf("seed %d: %s is %q", seed+1, check, v)
			}
		}
	}
	// One of the first seed's checks in a hundred may err; TestRatesOfFalseAlarms counts.
	if dark > int(seeds)/3 {
		t.Errorf("%d checks of %d sound series are not fine", dark, seeds)
	}
}

// trips says which checks each flaw trips, and how. Sampled ones run in every test.
var trips = []struct {
	flaw    simulate.Flaw
	sampled bool
	checks  map[string][]string
}{
	{simulate.FlawOffset, false, map[string][]string{checkOffset: {VerdictCaution, VerdictFails}}},
	{simulate.FlawCopies, false, map[string][]string{checkRows: {VerdictCaution}}},
	{simulate.FlawDeviations, false, map[string][]string{checkDeviations: {VerdictCaution}, checkThird: {VerdictCaution}, checkWeighted: {VerdictCaution}}},
	{simulate.FlawNegatives, true, map[string][]string{checkNegatives: {VerdictFails}, checkCut: {VerdictCaution}}},
	{simulate.FlawDeadCounts, false, map[string][]string{checkHighCounts: {VerdictCaution}, checkGiants: {VerdictCaution}}},
	{simulate.FlawBleed, false, map[string][]string{checkBleed: {VerdictCaution, VerdictFails}}},
	{simulate.FlawTilt, false, map[string][]string{checkTilt: {VerdictCaution}}},
	{simulate.FlawScale, false, map[string][]string{checkScaleRatio: {VerdictCaution}}},
	{simulate.FlawScatter, false, map[string][]string{checkScatter: {VerdictCaution}}},
	{simulate.FlawDose, false, map[string][]string{checkDoseOrder: {VerdictFails}, checkDoseGrowth: {VerdictCaution}}},
	{simulate.FlawSigma, false, map[string][]string{checkSigmas: {VerdictCaution}}},
	{simulate.FlawIndexing, false, map[string][]string{checkIndexing: {VerdictCaution}}},
	{simulate.FlawCoverage, false, map[string][]string{checkCommon: {VerdictCaution}}},
	{simulate.FlawIce, false, map[string][]string{checkIce: {VerdictCaution, VerdictFails}}},
	{simulate.FlawOneCrystal, false, map[string][]string{checkCrystals: {VerdictCaution}, checkAxis: {VerdictCaution}, checkGhost: {VerdictCaution}}},
	{simulate.FlawJitter, false, map[string][]string{checkFrames: {VerdictCaution}}},
	{simulate.FlawFlicker, false, map[string][]string{checkBlocks: {VerdictCaution}}},
	{simulate.FlawForbidden, false, map[string][]string{checkForbidden: {VerdictUnknown}}},
	{simulate.FlawCurb, false, map[string][]string{checkHighCounts: {VerdictCaution}}},
	{simulate.FlawMates, false, map[string][]string{checkFriedel: {VerdictCaution}}},
	{simulate.FlawOnce, false, map[string][]string{checkTipping: {VerdictCaution}, checkScaleCurve: {VerdictCaution}}},
	{simulate.FlawBackground, false, map[string][]string{checkAnchors: {VerdictCaution}, checkScale: {VerdictCaution}, checkExclusions: {VerdictCaution}}},
	{simulate.FlawSaturation, false, map[string][]string{checkModel: {VerdictCaution}}},
	{simulate.FlawAlike, false, map[string][]string{checkLying: {VerdictCaution}}},
	{simulate.FlawGroupLow, false, map[string][]string{checkGroup: {VerdictCaution}}},
	{simulate.FlawGroupHigh, false, map[string][]string{checkGroup: {VerdictFails, VerdictCaution}}},
	{simulate.FlawCentringLow, false, map[string][]string{checkGroup: {VerdictCaution}}},
	{simulate.FlawCentringHigh, false, map[string][]string{checkGroup: {VerdictFails}}},
	{simulate.FlawLaueHigh, true, map[string][]string{checkLaue: {VerdictFails}, checkScatter: {VerdictUnknown}, checkSigmas: {VerdictUnknown}}},
	{simulate.FlawReplicates, false, map[string][]string{checkReplicates: {VerdictFails, VerdictCaution}}},
	{simulate.FlawCentringNull, false, map[string][]string{checkNull: {VerdictCaution}, checkOffset: {VerdictCaution, VerdictFails}}},
}

// Every check has a flaw that trips it, and the sound series that does not is the one
// above, or that of TestManyCrystalsAndReplicates. A check added to the ledger without
// its flaw fails here.
func TestEveryCheckHasAFlaw(t *testing.T) {
	tripped := map[string]bool{checkDouble: true} // drawn without a verdict
	flaws := map[simulate.Flaw]bool{simulate.FlawExchange: true}
	for _, c := range trips {
		flaws[c.flaw] = true
		for check := range c.checks {
			tripped[check] = true
			if !slices.Contains(LedgerChecks(), check) {
				t.Errorf("%s trips %q, which the ledger has not", c.flaw, check)
			}
		}
	}
	for _, check := range LedgerChecks() {
		if !tripped[check] {
			t.Errorf("no flaw trips %q", check)
		}
	}
	for _, f := range simulate.Flaws() {
		if !flaws[f] {
			t.Errorf("the flaw %q trips no check", f)
		}
	}
	defer func() {
		if got := recover(); got != "analysis: ledger: no check is named bad weather" {
			t.Errorf("a check of no name: %v", got)
		}
	}()
	(&ledgerBook{}).add("bad weather", "", evidence.Finding{})
}

// Each flaw trips its entry; the sound series trips none of them.
func TestFlawsTripTheirEntries(t *testing.T) {
	for _, c := range trips {
		t.Run(c.flaw.String(), func(t *testing.T) {
			if !c.sampled && !full() {
				t.Skip("sampled: THINWARD_FULL=1 runs all")
			}
			s := studyOf(t, simulate.Flawed(c.flaw, 1), &Settings{Replicates: 100, Flips: 200})
			ctx := context.Background()
			for check := range c.checks {
				var err error
				switch check {
				case checkAnchors, checkScale, checkExclusions, checkFriedel:
					_, err = s.Specification(ctx)
				case checkReplicates:
					_, err = s.Controls(ctx)
				}
				if err != nil {
					t.Fatal(err)
				}
			}
			entries := judgedStudy(t, s)
			for check, want := range c.checks {
				wantVerdict(t, entries, check, want...)
			}
		})
	}
}

// A true exchange is no artefact: it trips nothing that a sound series does not.
func TestExchangeIsNoFlaw(t *testing.T) {
	if !full() {
		t.Skip("sampled: THINWARD_FULL=1 runs all")
	}
	entries := judged(t, simulate.Flawed(simulate.FlawExchange, 1))
	dark := 0
	for _, check := range LedgerChecks() {
		v := verdictOf(entries, check)
		if _, ok := three[check]; !ok && (v == VerdictCaution || v == VerdictFails) {
			dark++
			t.Logf("%s is %q", check, v)
		}
	}
	if dark > 1 {
		t.Errorf("%d checks are not fine", dark)
	}
}

// Five crystals and replicate positions are what the ledger asks for.
func TestManyCrystalsAndReplicates(t *testing.T) {
	if !full() {
		t.Skip("sampled: THINWARD_FULL=1 runs all")
	}
	p := simulate.Replicates(1)
	for k := range 2 {
		c := p.Crystals[k]
		c.Name = []string{"L4", "L5"}[k]
		p.Crystals = append(p.Crystals, c)
	}
	s := studyOf(t, p, &Settings{Replicates: 100, Flips: 200})
	controls, err := s.Controls(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	entries, err := s.Ledger(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	wantVerdict(t, entries, "number of crystals", VerdictFine)
	wantVerdict(t, entries, "replicate position", VerdictFine, VerdictCaution)
	n := 0
	for _, c := range controls {
		if c.Control == controlReplicate && c.Verdict != VerdictUnknown {
			n++
		}
	}
	if n != 5 {
		t.Errorf("%d replicate contrasts, want 5", n)
	}
}

// T7: without equivalents the common curve of the scale is not determined; it
// falls back to a constant, says so, and stays finite.
func TestScaleWithoutEquivalents(t *testing.T) {
	p := simulate.Sound(3)
	p.SpaceGroup, p.DMin, p.Crystals = "P 1", 1.6, p.Crystals[:2]
	series := seriesOf(t, p)
	for i := range series.Crystals {
		for j := range series.Crystals[i].Positions {
			rows := series.Crystals[i].Positions[j].Rows
			keep := make([]bool, rows.Len())
			for r := range keep {
				h, k, l := rows.H[r], rows.K[r], rows.L[r]
				keep[r] = l > 0 || l == 0 && (k > 0 || k == 0 && h > 0)
			}
			series.Crystals[i].Positions[j].Rows = rows.Select(keep)
		}
	}
	s, err := New(series, &Settings{Replicates: 100, Flips: 200})
	if err != nil {
		t.Fatal(err)
	}
	scaled, err := s.Scale(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	for i, sc := range scaled {
		if !sc.Fit.Constant {
			t.Errorf("crystal %d: the common curve was fitted without equivalents (softest direction %g)", i, sc.Fit.SoftSE)
		}
		for _, g := range sc.Fit.Scale {
			if !(g > 0.01 && g < 1e4) {
				t.Fatalf("crystal %d: a scale of %g", i, g)
			}
		}
	}
	said := false
	for _, w := range s.Warnings() {
		said = said || w.Code == "curve-constant"
	}
	if !said {
		t.Errorf("no warning says that the scale is constant: %+v", s.Warnings())
	}
}
