package analysis

import (
	"context"
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis/internal/floatcmp"
)

// TestSplitFindsWhatTouchesOnePart: an exchange of a third, put into odd l of one
// thick position only, makes the parts differ there and nowhere else.
func TestSplitFindsWhatTouchesOnePart(t *testing.T) {
	series := seriesOf(t, smallPlan(3))
	p := &series.Crystals[1].Positions[len(series.Crystals[1].Positions)-1]
	rows := *p.Rows
	rows.I = append([]float64(nil), rows.I...)
	mean := 0.0
	for _, v := range rows.I {
		mean += v / float64(len(rows.I))
	}
	for r := range rows.I {
		if rows.L[r]%2 != 0 {
			rows.I[r] += (mean - rows.I[r]) / 3
		}
	}
	p.Rows = &rows
	s, err := New(series, &Settings{Replicates: 20, Flips: 20})
	if err != nil {
		t.Fatal(err)
	}
	odd := func(r *PairRow) bool { return r.HKL.L%2 != 0 }
	got, err := s.Split(context.Background(), odd)
	if err != nil || len(got) != 3 {
		t.Fatalf("%d crystals, %v", len(got), err)
	}
	for i, r := range got {
		lo, hi := r.Difference.Lo, r.Difference.Hi
		if touched := i == 1; touched != (lo > 0) || hi-lo > 0.5 {
			t.Errorf("%s: difference %+v, touched %v", r.Crystal, r.Difference, touched)
		}
		floatcmp.Check(t, "difference", r.Difference.Value, r.MKept.Value-r.MLeft.Value, 0, 1e-12)
	}

	other, err := s.Split(context.Background(), func(r *PairRow) bool { return !odd(r) })
	if err != nil {
		t.Fatal(err)
	}
	for i := range got {
		floatcmp.Check(t, "the other way round", other[i].Difference.Value, -got[i].Difference.Value, 0, 1e-12)
		floatcmp.Check(t, "its end", other[i].Difference.Lo, -got[i].Difference.Hi, 0, 1e-12)
		if other[i].Kept != got[i].Left || other[i].MKept != got[i].MLeft {
			t.Errorf("%s: the parts are not exchanged", got[i].Crystal)
		}
	}
}

// TestSplitOfEverything: all pairs in one part give the leading m, the empty part
// none; keep may use the study and cannot change it.
func TestSplitOfEverything(t *testing.T) {
	s := studyOf(t, smallPlan(2), &Settings{Replicates: 20, Flips: 20})
	got, err := s.Split(context.Background(), func(r *PairRow) bool {
		r.Strength = math.NaN()
		return len(s.Warnings()) >= 0
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, r := range got {
		c, err := s.Find(r.Crystal, "", "")
		if err != nil {
			t.Fatal(err)
		}
		x, err := s.Compare(context.Background(), c)
		if err != nil {
			t.Fatal(err)
		}
		e := x.Result.Exchange
		floatcmp.CheckSlice(t, r.Crystal, []float64{r.MKept.Value, r.MKept.Lo, r.MKept.Hi}, []float64{e.M, e.Lo, e.Hi}, 0, 1e-12)
		if r.Left != 0 || !math.IsNaN(r.MLeft.Value) || r.MLeft.Why == "" || r.Difference.Why == "" {
			t.Errorf("%s: the empty part gives %+v, difference %+v", r.Crystal, r.MLeft, r.Difference)
		}
	}
}

// TestScaleVariants: the row of the study's own scale is the leading result, the
// other rows agree with the specification table, and workers change no bit.
func TestScaleVariants(t *testing.T) {
	plan := smallPlan(2)
	s := studyOf(t, plan, &Settings{Replicates: 20, Flips: 20})
	ctx := context.Background()
	got, err := s.ScaleVariants(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if len(got) != 2*8 {
		t.Fatalf("%d rows, want four models and five anchors with one in common, of two crystals", len(got))
	}
	spec, err := s.Specification(ctx)
	if err != nil {
		t.Fatal(err)
	}
	matched := 0
	for _, v := range got {
		if v.Leading {
			c, err := s.Find(v.Crystal, "", "")
			if err != nil {
				t.Fatal(err)
			}
			x, err := s.Compare(ctx, c)
			if err != nil {
				t.Fatal(err)
			}
			r := &x.Result
			floatcmp.CheckSlice(t, v.Crystal+" sizes", []float64{v.M.Value, v.Q.Value, v.O.Value}, []float64{r.Exchange.M, r.Curb.Q, r.Offset.O}, 1e-9, 1e-6)
			floatcmp.CheckSlice(t, v.Crystal+" classes", []float64{v.Floor.Value, v.Middle.Value, v.Top.Value}, []float64{r.Classes.Floor.Eps, r.Classes.Middle.Eps, r.Classes.Top.Eps}, 1e-9, 1e-6)
		}
		for _, x := range spec {
			if x.Crystal == v.Crystal && (x.Choice == "anchor" && x.Level == v.Anchor && v.Model == got[0].Model || x.Choice == "scale" && x.Level == v.Model && v.Anchor == got[0].Anchor) {
				matched++
				floatcmp.CheckSlice(t, v.Crystal+" "+x.Level, []float64{v.M.Value, v.M.Lo, v.M.Hi, v.Q.Value}, []float64{x.M.Value, x.M.Lo, x.M.Hi, x.Q.Value}, 0, 1e-12)
			}
		}
		if !(v.M.Lo < v.M.Value && v.M.Value < v.M.Hi) {
			t.Errorf("%+v", v)
		}
	}
	if matched != 2*7 {
		t.Errorf("%d rows stand in the specification table, want 14", matched)
	}
	again, err := studyOf(t, plan, &Settings{Replicates: 20, Flips: 20, Workers: 1}).ScaleVariants(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(got, again, cmpopts.EquateNaNs()); diff != "" {
		t.Errorf("with one worker (-all +one):\n%s", diff)
	}
}
