package analysis_test

import (
	"context"
	"math"
	"strings"
	"testing"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/resample"
	"thinward/analysis/simulate"
)

// mixed invents two crystals of two positions and writes the second position of
// the second crystal with other indices.
func mixed(t *testing.T, group string, cell simulate.Cell, reindex string) *analysis.Study {
	t.Helper()
	plan := simulate.Sound(5)
	plan.SpaceGroup, plan.Cell, plan.DMin = group, cell, 1.6
	plan.Crystals = plan.Crystals[:2]
	for i := range plan.Crystals {
		plan.Crystals[i].Positions = plan.Crystals[i].Positions[:2]
	}
	plan.Crystals[1].Positions[1].Reindex = reindex
	invented, err := simulate.Invent(context.Background(), plan)
	if err != nil {
		t.Fatal(err)
	}
	g, err := crystal.Lookup(group)
	if err != nil {
		t.Fatal(err)
	}
	series := analysis.Series{Title: group, Seed: 1, Group: g, Cell: crystal.Cell{A: cell.A, B: cell.B, C: cell.C, Alpha: cell.Alpha, Beta: cell.Beta, Gamma: cell.Gamma}}
	for i := range invented.Specimens {
		s := analysis.Specimen{Name: invented.Specimens[i].Name}
		for j := range invented.Specimens[i].Positions {
			m := &invented.Specimens[i].Positions[j]
			s.Positions = append(s.Positions, analysis.Position{Name: m.Plan.Name, ThicknessNM: m.Plan.ThicknessNM, Rows: m.Rows})
		}
		series.Crystals = append(series.Crystals, s)
	}
	study, err := analysis.New(series, &analysis.Settings{Replicates: 50, Flips: 50})
	if err != nil {
		t.Fatal(err)
	}
	return study
}

// TestMixedIndexingIsMended: a position indexed another way than the rest is
// found and brought back; the changes are those of International Tables A, the
// cosets of the Laue class in the lattice rotations.
func TestMixedIndexingIsMended(t *testing.T) {
	hexagonal := simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 120}
	tetragonal := simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 90}
	for _, c := range []struct {
		group, reindex string
		cell           simulate.Cell
		options        int
	}{
		{"P 3", "-h,-k,l", hexagonal, 4},
		{"P 3", "k,h,-l", hexagonal, 4},
		{"P 4", "k,h,-l", tetragonal, 2},
	} {
		study := mixed(t, c.group, c.cell, c.reindex)
		list, err := study.Indexing(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		if len(list) != 3 {
			t.Fatalf("%s: %d positions were looked at, want 3", c.group, len(list))
		}
		for _, x := range list {
			if len(x.Options) != c.options || x.Ambiguous || !(x.Z > 4) {
				t.Errorf("%s %s: %s: options %v, z %.1f, ambiguous %v", c.group, c.reindex, x.Where, x.Options, x.Z, x.Ambiguous)
			}
			if strings.HasSuffix(x.Where, "L2/mid") != (x.Proposal != "") {
				t.Errorf("%s %s: %s: proposal %q", c.group, c.reindex, x.Where, x.Proposal)
			}
		}
		scaled, err := study.Compare(context.Background(), study.Contrasts()[1])
		if err != nil {
			t.Fatal(err)
		}
		if r := scaled.Result.Correlation.R; !(r > 0.95) || math.IsNaN(r) {
			t.Errorf("%s %s: after mending the positions correlate by %.3f only", c.group, c.reindex, r)
		}
	}
}

// TestAmbiguousIndexingIsSaid: intensities that have the higher symmetry
// themselves cannot decide.
func TestAmbiguousIndexingIsSaid(t *testing.T) {
	study := mixed(t, "P 4", simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 90}, "")
	// Symmetrise: every intensity gets the value of its index with h and k
	// exchanged too.
	for i := range study.Series.Crystals {
		for j := range study.Series.Crystals[i].Positions {
			rows := study.Series.Crystals[i].Positions[j].Rows
			noise := resample.NewSeed(1).At("symmetrised").Stream(10*i + j)
			for r := range rows.I {
				rows.I[r] = 100 + 20*noise.Normal() + 10*float64((int(rows.H[r])*int(rows.H[r])+int(rows.K[r])*int(rows.K[r]))*7%13+int(rows.L[r])*int(rows.L[r])%5)
			}
		}
	}
	list, err := study.Indexing(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	// Within a crystal the angles decide; between crystals nothing does.
	for _, x := range list {
		if x.Ambiguous != (x.Where == "L2/thin") || x.Proposal != "" || !(x.Z < 4) {
			t.Errorf("%s: ambiguous %v, proposal %q: %s", x.Where, x.Ambiguous, x.Proposal, x.Text)
		}
	}
	said := ""
	for _, w := range study.Warnings() {
		if w.Code == "indexing-ambiguous" {
			said += w.Where
		}
	}
	if said != "L2/thin" {
		t.Errorf("warned of %q", said)
	}
}

// Without angles nothing decides, and one warning names all positions.
func TestAmbiguousIndexingWithoutAnglesIsSaidOnce(t *testing.T) {
	study := mixed(t, "P 4 2 2", simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 90}, "")
	study.Series.Group, _ = crystal.Lookup("P 4")
	for i := range study.Series.Crystals {
		for j := range study.Series.Crystals[i].Positions {
			rows := *study.Series.Crystals[i].Positions[j].Rows
			rows.Phi = nil
			study.Series.Crystals[i].Positions[j].Rows = &rows
		}
	}
	list, err := study.Indexing(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	for _, x := range list {
		if !x.Ambiguous {
			t.Errorf("%+v", x)
		}
	}
	var said []string
	for _, w := range study.Warnings() {
		if w.Code == "indexing-ambiguous" {
			said = append(said, w.Where)
		}
	}
	if len(said) != 1 || said[0] != "L1/mid, L2/thin, L2/mid" {
		t.Errorf("warned of %q", said)
	}
}

// Intensities that are noise leave four ways to index; the angles of the crystal know which,
// and nothing then speaks of another grain.
func TestAnglesDecideTheIndexingOfACrystal(t *testing.T) {
	for _, reindex := range []string{"k,h,-l", "-h,-k,l", ""} {
		study := mixed(t, "P 3", simulate.Cell{A: 14, B: 14, C: 11, Alpha: 90, Beta: 90, Gamma: 120}, reindex)
		for i := range study.Series.Crystals {
			for j := range study.Series.Crystals[i].Positions {
				rows := study.Series.Crystals[i].Positions[j].Rows
				noise := resample.NewSeed(1).At("noise").Stream(10*i + j)
				for r := range rows.I {
					rows.I[r] = 100 + 20*noise.Normal()
				}
			}
		}
		d, err := study.IntakeDetails(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		for _, x := range d.Indexing {
			if x.Ambiguous != (x.Where == "L2/thin") || (x.Proposal != "") != (x.Where == "L2/mid" && reindex != "") {
				t.Errorf("%q: %+v", reindex, x)
			}
		}
		for _, x := range d.Turns {
			if x.Verdict != "fine" {
				t.Errorf("%q: %+v", reindex, x)
			}
		}
	}
}
