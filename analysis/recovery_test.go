package analysis

import (
	"context"
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

func primaryOf(t *testing.T, s *Study, crystal int) *Compared {
	t.Helper()
	x, err := s.Compare(context.Background(), s.primaryContrasts()[crystal])
	if err != nil {
		t.Fatal(err)
	}
	return x
}

// thickOnly is a sound series whose thick positions are changed.
func thickOnly(seed uint64, change func(*simulate.Position)) *simulate.Plan {
	p := simulate.Sound(seed)
	for i := range p.Crystals {
		change(&p.Crystals[i].Positions[2])
	}
	return p
}

// T3: an additive constant of 1 % reads as an exchange when m stands alone, and not
// with offset and curb beside it.
func TestOffsetIsNoExchange(t *testing.T) {
	p := thickOnly(1, func(q *simulate.Position) { q.Offset = 0.01 })
	p.Structure.B = 4
	s := studyOf(t, p, quick())
	for i := range p.Crystals[:2] {
		r := &primaryOf(t, s, i).Result
		if r.Exchange.Model != "(m,q,o)" {
			t.Fatalf("%s leads", r.Exchange.Model)
		}
		if !(math.Abs(r.Exchange.M) < 3*r.Exchange.SE) || !(r.Offset.O > 0) || !(r.Offset.Lo < 0.013 && r.Offset.Hi > 0.007) {
			t.Errorf("m = %+v, o = %+v", r.Exchange, r.Offset)
		}
		if alone := r.Models[0].M; !(alone.Lo > 0.01) {
			t.Errorf("the offset does not read as an exchange when m stands alone: %+v", alone)
		}
	}
}

// T4: a curb of 0.02 is found and m stays consistent with 0.
func TestCurbIsNoExchange(t *testing.T) {
	if !full() {
		t.Skip("sampled: THINWARD_FULL=1 runs it")
	}
	s := studyOf(t, thickOnly(1, func(q *simulate.Position) { q.Curb = 0.02 }), quick())
	for i := range 2 {
		r := &primaryOf(t, s, i).Result
		if !(math.Abs(r.Exchange.M) < 3*r.Exchange.SE+0.005) || !(r.Curb.Lo > 0 && math.Abs(r.Curb.Q-0.02) < 0.008) {
			t.Errorf("m = %+v, q = %+v", r.Exchange, r.Curb)
		}
	}
}

// T5: rows that stand on three frames each give the answer of the collapsed list,
// and are counted once.
func TestCopiedRows(t *testing.T) {
	p := small()
	p.DMin = 1.4
	copies := small()
	copies.DMin, copies.Common.Copies = 1.4, 3
	series := seriesOf(t, copies)
	for i := range series.Crystals {
		for j := range series.Crystals[i].Positions {
			series.Crystals[i].Positions[j].Policy = intensity.RowsCopies
		}
	}
	a := studyOf(t, p, quick())
	b, err := New(series, quick())
	if err != nil {
		t.Fatal(err)
	}
	auto, err := New(seriesOf(t, copies), quick())
	if err != nil {
		t.Fatal(err)
	}
	x, y, z := primaryOf(t, a, 0), primaryOf(t, b, 0), primaryOf(t, auto, 0)
	for _, c := range []*Compared{y, z} {
		if c.Pairs.Len() != x.Pairs.Len() {
			t.Errorf("%d pairs, want %d", c.Pairs.Len(), x.Pairs.Len())
		}
		floatcmp.Check(t, "m", c.Result.Exchange.M, x.Result.Exchange.M, 0.05*x.Result.Exchange.SE, 0)
		floatcmp.Check(t, "its error", c.Result.Exchange.SE, x.Result.Exchange.SE, 0, 0.02)
		floatcmp.Check(t, "variances of the thin position", stat.Mean(c.Input.VarThin, nil), stat.Mean(x.Input.VarThin, nil), 0, 0.1)
	}
	for i := range a.intake.Positions {
		for j := range a.intake.Positions[i] {
			if n, m := a.intake.Positions[i][j].Observations.Len(), b.intake.Positions[i][j].Observations.Len(); n != m {
				t.Errorf("%s: %d observations of copied rows, want %d", a.place(i, j), m, n)
			}
		}
	}
}

// T9: with thin sigmas understated by 1.5 a null series needs a factor below 1.5 on
// the ratio of sigmas, or none, to lose its curve on the inverse-variance axis.
func TestTippingRatio(t *testing.T) {
	p := simulate.Flawed(simulate.FlawSigma, 1)
	p.DMin = 1.4
	s := studyOf(t, p, quick())
	if _, err := s.Ledger(context.Background()); err != nil {
		t.Fatal(err)
	}
	for _, x := range s.found.tipped {
		if !(x.Value < 1.5 && x.Value > 1/1.5) {
			t.Errorf("%s: %+v", x.where, x.Finding)
		}
	}
	for _, c := range s.primaryContrasts() {
		for _, a := range s.compared[c].Result.Axes {
			if a.Axis == "inverse-variance" && (math.IsNaN(a.P) || math.IsNaN(a.Tip)) {
				t.Errorf("the axis has no tipping ratio: %+v", a)
			}
		}
	}
}
