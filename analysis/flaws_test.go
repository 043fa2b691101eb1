package analysis

import (
	"context"
	"testing"

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

// soundChecks are fine in a series without a flaw.
var soundChecks = []string{
	"rows against observations", "negatives removed", "indexing margin", "sigma calibration", "scale curve", "scale ratio against thickness ratio",
	"scatter of equivalents", "strength axis", "deviations", "additive offset", "high counts", "model against curve", "axis third against leading",
	"axis inverse-variance against leading", "ghost of noise", "bleed from neighbours", "scatter of frames", "tilt within a position",
	"ice rings", "common reflections", "tipping ratio", "dose order", "growth of B with dose", "forbidden reflections", "giants",
}

func TestSoundSeriesHasACleanLedger(t *testing.T) {
	seeds := uint64(1)
	if full() {
		seeds = 6
	}
	dark := 0
	for seed := range seeds {
		entries := judged(t, simulate.Sound(seed+1))
		for _, check := range soundChecks {
			if v := verdictOf(entries, check); v != VerdictFine {
				dark++
				t.Logf("seed %d: %s is %q", seed+1, check, v)
			}
		}
		// What the check of a series without a replicate, and of three crystals, must say.
		wantVerdict(t, entries, "replicate position", VerdictUnknown)
		wantVerdict(t, entries, "number of crystals", VerdictCaution)
		wantVerdict(t, entries, "double scattering", VerdictUnknown)
	}
	// 25 checks a series, each of which may err once in a hundred times.
	if dark > int(seeds) {
		t.Errorf("%d checks of %d sound series are not fine", dark, seeds)
	}
}

// Each flaw trips its entry; the sound series trips none of them.
func TestFlawsTripTheirEntries(t *testing.T) {
	for _, c := range []struct {
		flaw    simulate.Flaw
		sampled bool
		trips   map[string][]string
	}{
		{simulate.FlawOffset, false, map[string][]string{"additive offset": {VerdictCaution, VerdictFails}}},
		{simulate.FlawCopies, false, map[string][]string{"rows against observations": {VerdictCaution}}},
		{simulate.FlawDeviations, false, map[string][]string{
			"deviations": {VerdictCaution}, "axis third against leading": {VerdictCaution}, "axis inverse-variance against leading": {VerdictCaution}}},
		{simulate.FlawNegatives, true, map[string][]string{"negatives removed": {VerdictFails}, "cut or clipped list": {VerdictCaution}}},
		{simulate.FlawDeadCounts, false, map[string][]string{"high counts": {VerdictCaution}, "giants": {VerdictCaution}}},
		{simulate.FlawBleed, true, map[string][]string{"bleed from neighbours": {VerdictCaution, VerdictFails}}},
		{simulate.FlawTilt, false, map[string][]string{"tilt within a position": {VerdictCaution}}},
		{simulate.FlawScale, false, map[string][]string{"scale ratio against thickness ratio": {VerdictCaution}}},
		{simulate.FlawScatter, false, map[string][]string{"scatter of equivalents": {VerdictCaution}}},
		{simulate.FlawDose, false, map[string][]string{"dose order": {VerdictFails}, "growth of B with dose": {VerdictCaution}}},
		{simulate.FlawSigma, false, map[string][]string{"sigma calibration": {VerdictCaution}}},
		{simulate.FlawIndexing, false, map[string][]string{"indexing margin": {VerdictCaution}}},
		{simulate.FlawCoverage, false, map[string][]string{"common reflections": {VerdictCaution}}},
		{simulate.FlawIce, false, map[string][]string{"ice rings": {VerdictCaution, VerdictFails}}},
		{simulate.FlawOneCrystal, false, map[string][]string{"number of crystals": {VerdictCaution}, "strength axis": {VerdictCaution}, "ghost of noise": {VerdictCaution}}},
		{simulate.FlawJitter, false, map[string][]string{"scatter of frames": {VerdictCaution}}},
		{simulate.FlawForbidden, false, map[string][]string{"forbidden reflections": {VerdictUnknown}}},
		{simulate.FlawCurb, false, map[string][]string{"high counts": {VerdictCaution}}},
	} {
		t.Run(c.flaw.String(), func(t *testing.T) {
			if !c.sampled && !full() {
				t.Skip("sampled: THINWARD_FULL=1 runs all")
			}
			entries := judged(t, simulate.Flawed(c.flaw, 1))
			for check, want := range c.trips {
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
	for _, check := range soundChecks {
		if v := verdictOf(entries, check); v != VerdictFine {
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
