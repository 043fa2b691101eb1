package analysis

import (
	"context"
	"os"
	"testing"

	"thinward/analysis/simulate"
)

// full says whether the long calibrations were asked for.
func full() bool { return os.Getenv("THINWARD_FULL") == "1" }

// seriesOf invents a series and hands it over as a reader of files would.
func seriesOf(t testing.TB, p *simulate.Plan) Series {
	t.Helper()
	return readOf(invented(t, p))
}

func invented(t testing.TB, p *simulate.Plan) *simulate.Series {
	t.Helper()
	v, err := simulate.Invent(context.Background(), p)
	if err != nil {
		t.Fatal(err)
	}
	return v
}

func readOf(v *simulate.Series) Series {
	out := Series{Title: v.Plan.Title, EnergyKeV: v.Plan.EnergyKeV, Seed: v.Plan.Seed, Group: v.Group, ThicknessScaleSU: v.Plan.ThicknessScaleSU}
	c := v.Plan.Cell
	out.Cell.A, out.Cell.B, out.Cell.C, out.Cell.Alpha, out.Cell.Beta, out.Cell.Gamma = c.A, c.B, c.C, c.Alpha, c.Beta, c.Gamma
	for i := range v.Specimens {
		s := Specimen{Name: v.Specimens[i].Name}
		for j := range v.Specimens[i].Positions {
			m := &v.Specimens[i].Positions[j]
			s.Positions = append(s.Positions, Position{
				Name: m.Plan.Name, ThicknessNM: m.Plan.ThicknessNM, ThicknessSU: m.Plan.ThicknessSUNM, Order: m.Plan.Order, DosePerA2: m.Plan.Dose,
				TiltZeroDeg: m.Plan.TiltZeroDeg, HasTiltZero: true, ReplicateOf: m.Plan.ReplicateOf, Rows: m.Rows,
			})
		}
		out.Crystals = append(out.Crystals, s)
	}
	return out
}

func studyOf(t testing.TB, p *simulate.Plan, set *Settings) *Study {
	t.Helper()
	s, err := New(seriesOf(t, p), set)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// sized is the first primary contrast of an invented series as far as its sizes.
func sized(t testing.TB, p *simulate.Plan) (*Study, *Compared) {
	t.Helper()
	s := studyOf(t, p, quick())
	if _, err := s.Scale(context.Background()); err != nil {
		t.Fatal(err)
	}
	x, err := s.paired(context.Background(), s.primaryContrasts()[0])
	if err != nil {
		t.Fatal(err)
	}
	if err := s.sizes(context.Background(), x); err != nil {
		t.Fatal(err)
	}
	return s, x
}
