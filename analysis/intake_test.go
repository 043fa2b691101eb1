package analysis

import (
	"context"
	"math"
	"slices"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// handMade is two crystals of two positions in P 1, with few reflections that can be
// counted by hand. The cell is cubic, a = 10: 1/d^2 = (hh+kk+ll)/100.
func handMade() Series {
	list := func(i float64, hkl ...[3]int16) *intensity.Columns {
		c := &intensity.Columns{}
		for k, h := range hkl {
			c.H, c.K, c.L = append(c.H, h[0]), append(c.K, h[1]), append(c.L, h[2])
			c.I, c.Sigma = append(c.I, i*float64(k+1)), append(c.Sigma, 1+float64(k)/10)
		}
		return c
	}
	cell := crystal.Cell{A: 10, B: 10, C: 10, Alpha: 90, Beta: 90, Gamma: 90}
	g, err := crystal.Lookup("P 1")
	if err != nil {
		panic(err)
	}
	return Series{Title: "by hand", Seed: 1, Cell: cell, Group: g, Crystals: []Specimen{
		{Name: "L1", Positions: []Position{
			{Name: "thin", ThicknessNM: 100, Rows: list(10, [3]int16{1, 0, 0}, [3]int16{0, 1, 0}, [3]int16{0, 0, 1}, [3]int16{1, 1, 0}), Cell: crystal.Cell{A: 10.1, B: 10, C: 10, Alpha: 90, Beta: 90.5, Gamma: 90}},
			{Name: "thick", ThicknessNM: 200, Rows: list(20, [3]int16{1, 0, 0}, [3]int16{0, -1, 0}, [3]int16{2, 0, 0})},
		}},
		{Name: "L2", Positions: []Position{
			{Name: "thin", ThicknessNM: 100, Rows: list(10, [3]int16{1, 0, 0}, [3]int16{0, 0, 1}, [3]int16{1, 1, 1}), Sources: []Source{
				{Path: "a", Rows: 5, SetAside: []SetAside{{"sigma is zero", 2, 7}}, Cell: cell},
				{Path: "b", Cell: crystal.Cell{A: 10, B: 10, C: 9.9, Alpha: 90, Beta: 90, Gamma: 90}},
			}},
			{Name: "thick", ThicknessNM: 200, Rows: list(10, [3]int16{2, 0, 0}, [3]int16{1, 1, 0}), Merged: true},
		}},
	}}
}

// Shares, limits, cells and counts of the series above, worked by hand.
func TestIntakeByHand(t *testing.T) {
	s, err := New(handMade(), nil)
	if err != nil {
		t.Fatal(err)
	}
	d, err := s.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	// L1/thin has 100 010 001 110, L1/thick 100 010 200, L2/thin 100 001 111, L2/thick 200
	// 110; spacings are 10 for 100, 7.07 for 110, 5.77 for 111 and 5 for 200. The median of an
	// even number is the upper one.
	for k, c := range []struct {
		pair           string
		common         int
		share, with    float64
		dCommon, dBoth float64
	}{
		{"L1/thin L1/thick", 2, 2.0 / 4, 2.0 / 3, 10, 10},
		{"L1/thin L2/thin", 2, 2.0 / 4, 2.0 / 3, 10, 10},
		{"L1/thin L2/thick", 1, 1.0 / 4, 1.0 / 2, 10 / math.Sqrt2, 10},
		{"L1/thick L2/thin", 1, 1.0 / 3, 1.0 / 3, 10, 10},
		{"L1/thick L2/thick", 1, 1.0 / 3, 1.0 / 2, 5, 10},
		{"L2/thin L2/thick", 0, 0, 0, math.NaN(), 10 / math.Sqrt2},
	} {
		x := d.Common[k]
		if got := x.Crystal + "/" + x.Position + " " + x.WithCrystal + "/" + x.WithPosition; got != c.pair || x.Common != c.common || x.Why == "" {
			t.Errorf("%d: %s, %d common, %q; want %+v", k, got, x.Common, x.Why, c)
		}
		floatcmp.Check(t, c.pair+": share", x.Share, c.share, 1e-15, 0)
		floatcmp.Check(t, c.pair+": share of the other", x.WithShare, c.with, 1e-15, 0)
		floatcmp.Check(t, c.pair+": d", x.DCommon, c.dCommon, 1e-12, 0)
		floatcmp.Check(t, c.pair+": d of both", x.DAll, c.dBoth, 1e-12, 0)
	}
	// L1/thin ends at 110 (7.07 A), L1/thick and L2/thick at 200 (5), L2/thin at 111 (5.77), so
	// that all reach 7.07 A. To there lie, Friedel mates together, 100 010 001 and the six of
	// 110: nine.
	for k, c := range []struct {
		complete float64
		others   float64
	}{{4.0 / 9, 3.0 / 4}, {2.0 / 9, 2.0 / 3}, {2.0 / 9, 2.0 / 3}, {1.0 / 9, 2.0 / 2}} {
		r := d.Positions[k]
		floatcmp.Check(t, "common limit", r.CommonDMin, 10/math.Sqrt2, 1e-12, 0)
		floatcmp.Check(t, r.Crystal+"/"+r.Position+": completeness to it", r.CompletenessCommon, c.complete, 1e-15, 0)
		floatcmp.Check(t, r.Crystal+"/"+r.Position+": in other crystals", r.InOthers, c.others, 1e-15, 0)
	}
	// |10.1 - 10|/10.05 = 0.995 %; of two files the farther one, 0.1/9.95.
	thin, thick, two := d.Positions[0].Cell, d.Positions[1].Cell, d.Positions[2].Cell
	floatcmp.Check(t, "cell of L1/thin", thin.LengthPercent, 100*0.1/10.05, 1e-9, 0)
	floatcmp.Check(t, "angle of L1/thin", thin.AngleDeg, 0.5, 1e-12, 0)
	floatcmp.Check(t, "cell of L2/thin", two.LengthPercent, 100*0.1/9.95, 1e-9, 0)
	floatcmp.Check(t, "tolerance", thin.ToleranceDeg, 0.02*180/math.Pi, 1e-12, 0)
	if thin.Length != "a" || thin.Angle != "beta" || two.Length != "c" || !thin.Given || thick.Given || thick.Why == "" || !math.IsNaN(thick.LengthPercent) {
		t.Errorf("cells: %+v, %+v, %+v", thin, thick, two)
	}
	var found []string
	for _, m := range d.Remarks {
		found = append(found, strings.Join([]string{m.Crystal, m.Position, m.Kind, m.File, strings.Fields(m.Why)[0]}, " "))
		if m.Kind == "unusable" && (m.Count != 2 || m.FirstLine != 7) || m.Kind == "merged" && m.Crystal == "L2" && m.Position == "thick" && m.Count != 2 {
			t.Errorf("%+v", m)
		}
	}
	if got := strings.Join(found, "; "); got != "L1 thin merged  almost; L1 thick merged  almost; L2 thin unusable a sigma; L2 thin merged  almost; L2 thick merged  the" {
		t.Error(got)
	}
}

// A position with the cell of another crystal is refused, whether the position or one of
// its files carries it; the tolerance moves the line.
func TestOtherCellIsRefused(t *testing.T) {
	for _, c := range []struct {
		change func(*Series)
		want   string
	}{
		{func(s *Series) { s.Crystals[0].Positions[0].Cell.A = 10.3 }, "L1/thin: its cell differs from that of the series by 3.0 % in a, more than 2 %"},
		{func(s *Series) { s.Crystals[0].Positions[0].Cell.Beta = 92 }, "by 2.00 degrees in beta, more than 1.15"},
		{func(s *Series) { s.Crystals[1].Positions[0].Sources[1].Cell.C = 11 }, "L2/thin: its cell differs from that of the series by 9.5 % in c"},
		{func(s *Series) { s.Crystals[0].Positions[0].Cell.A = 10.3; s.CellTolerance = 0.04 }, ""},
		{func(s *Series) { s.CellTolerance = -1 }, "cell_tolerance is -1"},
	} {
		series := handMade()
		c.change(&series)
		_, err := New(series, nil)
		if c.want == "" && err != nil || c.want != "" && (err == nil || !strings.Contains(err.Error(), c.want)) {
			t.Errorf("%v, want %q", err, c.want)
		}
	}
}

// Common reflections that are the strong ones of a position do not stand for the rest. With
// n of N values of mean m and standard deviation s the standard error is
// s/sqrt(n) sqrt(1 - n/N) (Cochran 1977, 2.6): here 2, 4, 6 of 6 values.
func TestUnlikeTheRest(t *testing.T) {
	m, se := sampleMean([]float64{2, 4, 6}, 0.5)
	floatcmp.Check(t, "mean", m, 4, 1e-15, 0)
	floatcmp.Check(t, "error", se, 2/math.Sqrt(3)*math.Sqrt(0.5), 1e-15, 0)
	p := simulate.Sound(3)
	p.DMin = 1.5
	s, err := New(seriesOf(t, p), nil)
	if err != nil {
		t.Fatal(err)
	}
	sound, err := s.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range sound.Common {
		if c.Why != "" {
			t.Errorf("sound: %+v", c)
		}
	}
	cut := seriesOf(t, p)
	rows := cut.Crystals[0].Positions[2].Rows
	keep := make([]bool, rows.Len())
	for r := range keep {
		keep[r] = rows.I[r] > 12*rows.Sigma[r]
	}
	cut.Crystals[0].Positions[2].Rows = rows.Select(keep)
	if s, err = New(cut, nil); err != nil {
		t.Fatal(err)
	}
	spoiled, err := s.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range spoiled.Common {
		thick := c.Crystal == "L1" && c.Position == "thick" || c.WithCrystal == "L1" && c.WithPosition == "thick"
		if thick != strings.Contains(c.Why, "stronger") {
			t.Errorf("%+v", c)
		}
	}
	warned := false
	for _, w := range spoiled.Warnings {
		warned = warned || w.Code == "common" && strings.HasPrefix(w.Where, "L1/thin and L1/thick")
	}
	if !warned {
		t.Errorf("no warning: %+v", spoiled.Warnings)
	}
}

// Lists that were cut or clipped before they came are named, those that were not are
// not: the change that was made is the oracle.
func TestCutListsAreNamed(t *testing.T) {
	p := simulate.Sound(3)
	p.DMin = 1.4
	p.Crystals = p.Crystals[:2]
	for i := range p.Crystals {
		p.Crystals[i].Positions = p.Crystals[i].Positions[:2]
		for j := range p.Crystals[i].Positions {
			p.Crystals[i].Positions[j].Counts = 20 // weak enough that noise leaves negatives
		}
	}
	for _, c := range []struct {
		name, want string
		change     func(*intensity.Columns) *intensity.Columns
	}{
		{"sound", "", func(c *intensity.Columns) *intensity.Columns { return c }},
		{"negatives removed", "negatives look removed", func(c *intensity.Columns) *intensity.Columns {
			keep := make([]bool, c.Len())
			for r := range keep {
				keep[r] = c.I[r] > 0
			}
			return c.Select(keep)
		}},
		{"negatives set to zero", "stops sharply at 0", func(c *intensity.Columns) *intensity.Columns {
			for r := range c.I {
				c.I[r] = math.Max(c.I[r], 0)
			}
			return c
		}},
		{"below three sigma removed", "stops sharply at 3", func(c *intensity.Columns) *intensity.Columns {
			keep := make([]bool, c.Len())
			for r := range keep {
				keep[r] = c.I[r] > 3*c.Sigma[r]
			}
			return c.Select(keep)
		}},
		{"clipped", "share the largest intensity", func(c *intensity.Columns) *intensity.Columns {
			sorted := slices.Clone(c.I)
			slices.Sort(sorted)
			for r := range c.I {
				c.I[r] = math.Min(c.I[r], sorted[99*len(sorted)/100])
			}
			return c
		}},
	} {
		series := seriesOf(t, p)
		rows := &series.Crystals[1].Positions[1].Rows
		*rows = c.change(*rows)
		s, err := New(series, nil)
		if err != nil {
			t.Fatal(err)
		}
		table, err := s.IntakeTable(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		for _, r := range table {
			want := ""
			if r.Crystal == "L2" && r.Position == series.Crystals[1].Positions[1].Name {
				want = c.want
			}
			if (want == "") != (r.Truncated == "") || !strings.Contains(r.Truncated, want) {
				t.Errorf("%s: %s/%s: %q", c.name, r.Crystal, r.Position, r.Truncated)
			}
		}
	}
}

// A call that was cancelled leaves nothing behind: the next one says every warning and remark
// once.
func TestIntakeIsToldOnce(t *testing.T) {
	s, err := New(handMade(), nil)
	if err != nil {
		t.Fatal(err)
	}
	gone, cancel := context.WithCancel(context.Background())
	if _, err := s.Intake(gone); err != nil {
		t.Fatal(err)
	}
	cancel()
	if _, err := s.IntakeTable(gone); err == nil {
		t.Fatal("a cancelled call was answered")
	}
	first, err := s.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	fresh, err := New(handMade(), nil)
	if err != nil {
		t.Fatal(err)
	}
	want, err := fresh.IntakeDetails(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	if len(first.Warnings) != len(want.Warnings) || len(first.Remarks) != len(want.Remarks) || len(want.Warnings) == 0 {
		t.Errorf("%d warnings and %d remarks after a cancelled call, want %d and %d", len(first.Warnings), len(first.Remarks), len(want.Warnings), len(want.Remarks))
	}
}

// A position of forbidden reflections alone has nothing to compare, and is named.
func TestForbiddenAloneIsRefused(t *testing.T) {
	series := handMade()
	g, err := crystal.Lookup("I 2 2 2")
	if err != nil {
		t.Fatal(err)
	}
	series.Group = g
	series.Crystals[1].Positions[0].Rows = &intensity.Columns{H: []int16{1, 0}, K: []int16{0, 1}, L: []int16{0, 0}, I: []float64{1, 2}, Sigma: []float64{1, 1}}
	s, err := New(series, nil)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.IntakeTable(context.Background()); err == nil || !strings.Contains(err.Error(), "L2/thin: the space group forbids every reflection") {
		t.Errorf("%v", err)
	}
}

// A remark on sigmas goes by chi-square of near equivalents: none within a quarter of the
// sigma or three standard errors of 1.
func TestSigmaRemark(t *testing.T) {
	for _, c := range []struct {
		chi2, se float64
		want     string
	}{
		{1.02, 0.05, ""}, {1.5, 0.01, ""}, {2.25, 0.5, ""}, {2.25, 0.2, "scatter 1.5 times"}, {0.25, 0.02, "scatter 0.5 times"}, {math.NaN(), math.NaN(), "7 pairs of near equivalents are too few"},
	} {
		got := sigmaResult(&intensity.Sigmas{Chi2: c.chi2, Chi2SE: c.se, Pairs: 7}).Why
		if !strings.Contains(got, c.want) || (c.want == "") != (got == "") {
			t.Errorf("chi2 %g +- %g: %q, want %q", c.chi2, c.se, got, c.want)
		}
	}
}
