package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
	"thinward/analysis/size"
)

// What the result says of scale and precision is what the steps found: ln K rises
// by the logarithm of the counts that the plan gives the thicker positions (140,
// 225 and 310 nm, 2 counts a nm), R_meas is that of the scaled observations, and
// what the exchange does to amplitudes is the effect of the m printed beside it.
func TestResultCarriesWhatWasFound(t *testing.T) {
	plan := simulate.Sound(7)
	plan.Common.Deviation = 0
	s := studyOf(t, plan, quick())
	if _, _, err := s.Quality(context.Background()); err != nil {
		t.Fatal(err)
	}
	if _, err := s.Join(context.Background()); err != nil {
		t.Fatal(err)
	}
	r := s.assemble()
	for i := range s.Series.Crystals {
		rows := r.Scaling[3*i : 3*i+3]
		for j, counts := range []float64{280, 450, 620} {
			floatcmp.Check(t, "ln K of "+rows[j].Crystal+"/"+rows[j].Position, rows[j].LnK-rows[0].LnK, math.Log(counts/280), 0.05, 0)
		}
	}
	n := 0
	for _, q := range r.Quality {
		i, j := s.Series.findCrystal(q.Crystal), -1
		if q.Shell == 0 && q.Position != AllPositions {
			j = s.Series.Crystals[i].find(q.Position)
		}
		if j < 0 {
			continue
		}
		n++
		p := s.scaled[i].Positions[j]
		var unique []int32
		var values []float64
		for o, u := range p.Unique {
			if !s.intake.Catalogue.Absent[u] {
				unique, values = append(unique, u), append(values, p.I[o])
			}
		}
		want := intensity.MeasureR(unique, values)
		floatcmp.Check(t, "R_merge", q.RMerge, want.Merge, 0, 1e-12)
		floatcmp.Check(t, "R_meas", q.RMeas, want.Meas, 0, 1e-12)
		floatcmp.Check(t, "R_pim", q.RPim, want.Pim, 0, 1e-12)
	}
	if n != 9 {
		t.Errorf("%d positions in the table of precision, want 9", n)
	}
	if len(r.Matters) != 3 {
		t.Fatalf("%d crystals in what matters, want 3", len(r.Matters))
	}
	for _, m := range r.Matters {
		e, err := size.ExpectedEffect(m.M, &size.EffectSettings{CentricShare: centricShare(s)})
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, "agreement factor of "+m.Crystal, m.AgreementShift, e.Agreement, 0, 1e-12)
		floatcmp.Check(t, "weak |F| of "+m.Crystal, m.WeakShift, e.WeakF, 0, 1e-12)
	}
}

func centricShare(s *Study) float64 {
	centric, allowed := 0.0, 0.0
	for u, absent := range s.intake.Catalogue.Absent {
		if absent {
			continue
		}
		allowed++
		if s.intake.Catalogue.Centric[u] {
			centric++
		}
	}
	return centric / allowed
}
