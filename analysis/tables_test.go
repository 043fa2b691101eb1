package analysis

import (
	"context"
	"fmt"
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

func TestTables(t *testing.T) {
	ctx := context.Background()
	s := studyOf(t, smallPlan(2), &Settings{Replicates: 20, Flips: 20})
	scaled, err := s.ScaledTables(ctx)
	if err != nil {
		t.Fatal(err)
	}
	merged, err := s.MergedTables(ctx)
	if err != nil {
		t.Fatal(err)
	}
	if len(scaled) != 6 || len(merged) != 6 || scaled[4].Crystal != "L2" || scaled[4].Position != "mid" || merged[4].Position != "mid" {
		t.Fatalf("%d and %d tables", len(scaled), len(merged))
	}
	// J - Residual SUJ is the joint intensity: one number for each reflection of a
	// crystal, between the smallest and the largest of its observations.
	type joint struct{ j, lo, hi float64 }
	joints := map[string]*joint{}
	for k := range scaled {
		for i := range scaled[k].Rows {
			r := &scaled[k].Rows[i]
			name := fmt.Sprint(scaled[k].Crystal, r.Unique)
			if joints[name] == nil {
				joints[name] = &joint{r.J - r.Residual*r.SUJ, math.Inf(1), math.Inf(-1)}
			}
			q := joints[name]
			q.lo, q.hi = math.Min(q.lo, r.J), math.Max(q.hi, r.J)
			floatcmp.Check(t, "joint J", r.J-r.Residual*r.SUJ, q.j, 1e-6, 1e-9)
		}
	}
	for name, q := range joints {
		if slack := 1e-9 * (1 + math.Abs(q.hi)); q.j < q.lo-slack || q.j > q.hi+slack {
			t.Errorf("%s: joint J %g lies outside %g to %g", name, q.j, q.lo, q.hi)
		}
	}
	forbidden := 0
	for k := range scaled {
		// The merged mean is the weighted mean of the scaled rows, by the rows alone.
		type sums struct {
			w, wj float64
			n     int
		}
		by := map[crystal.HKL]*sums{}
		for i := range scaled[k].Rows {
			r := &scaled[k].Rows[i]
			floatcmp.Check(t, "J", r.J, r.I/r.Scale, 0, 1e-12)
			if got := s.Series.Group.Canonical(r.HKL); got != r.Unique {
				t.Fatalf("%v is equivalent to %v, not %v", r.HKL, got, r.Unique)
			}
			if by[r.Unique] == nil {
				by[r.Unique] = new(sums)
			}
			w := 1 / (r.SUJ * r.SUJ)
			by[r.Unique].w += w
			by[r.Unique].wj += w * r.J
			by[r.Unique].n++
		}
		if len(by) != len(merged[k].Rows) {
			t.Fatalf("%d unique reflections, %d merged rows", len(by), len(merged[k].Rows))
		}
		for i := range merged[k].Rows {
			r := &merged[k].Rows[i]
			e := by[r.HKL]
			if e == nil || e.n != r.N {
				t.Fatalf("%v: %+v against %+v", r.HKL, r, e)
			}
			floatcmp.Check(t, "merged J", r.J, e.wj/e.w, 1e-12, 1e-9)
			floatcmp.Check(t, "merged su", r.SU, 1/math.Sqrt(e.w), 0, 1e-9)
			floatcmp.Check(t, "d", r.D, s.Series.Cell.D(r.HKL), 0, 1e-9)
			if r.Forbidden != s.Series.Group.Absent(r.HKL) || r.Centric != s.Series.Group.Centric(r.HKL) || r.Epsilon != s.Series.Group.Epsilon(r.HKL) {
				t.Errorf("%+v", r)
			}
			if r.Forbidden {
				forbidden++
			}
		}
	}
	if forbidden == 0 {
		t.Error("no forbidden reflection in P 21 21 21: the test is empty")
	}
}

func TestMostChanged(t *testing.T) {
	ctx := context.Background()
	s := studyOf(t, smallPlan(2), &Settings{Replicates: 20, Flips: 20})
	list, err := s.MostChanged(ctx, 7)
	if err != nil {
		t.Fatal(err)
	}
	if len(list) != 14 || list[7].Crystal != "L2" || list[7].Rank != 1 {
		t.Fatalf("%d rows", len(list))
	}
	all, err := s.MostChanged(ctx, 0)
	if err != nil {
		t.Fatal(err)
	}
	largest := map[string]float64{}
	for _, r := range all {
		largest[r.Crystal] = math.Max(largest[r.Crystal], math.Abs(r.Z))
	}
	for i := range list {
		r := &list[i]
		if r.Rank == 1 && math.Abs(r.Z) != largest[r.Crystal] {
			t.Errorf("%s: |z| %g is not the largest, %g", r.Crystal, r.Z, largest[r.Crystal])
		}
		if r.Rank > 1 && math.Abs(r.Z) > math.Abs(list[i-1].Z) {
			t.Errorf("rank %d stands out of order", r.Rank)
		}
	}
}

func TestByNoise(t *testing.T) {
	// One of one: the median |z| of a normal, 0.67449 (any table of the normal distribution).
	floatcmp.Check(t, "1 of 1", byNoise(1, 1), 0.67448975, 1e-8, 0)
	// The largest of n is below x with probability (2 Phi(x) - 1)^n: its exact median at n = 1000 is where
	// 2 Phi(x) - 1 = 0.5^(1/1000), x = 3.3919; the median rank is good to 1 % of p there.
	exact := math.Sqrt2 * math.Erfinv(math.Pow(0.5, 1.0/1000))
	floatcmp.Check(t, "1 of 1000", byNoise(1, 1000), exact, 0.01, 0)
	if !(byNoise(2, 1000) < byNoise(1, 1000)) || !(byNoise(1, 2000) > byNoise(1, 1000)) {
		t.Error("not monotone")
	}
}
