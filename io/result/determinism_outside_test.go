package result

import (
	"bytes"
	"context"
	"os"
	"runtime"
	"testing"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/simulate"
)

// TestSameBytesOnAnyNumberOfProcessors: scales, bands, flips, draws of scalars, controls,
// ledger and specification of one seed come out with the same bits on one processor
// and on two, so that the file is the same byte for byte; in the long form another seed
// gives another.
func TestSameBytesOnAnyNumberOfProcessors(t *testing.T) {
	if testing.Short() {
		t.Skip("runs an analysis twice")
	}
	before := runtime.GOMAXPROCS(0)
	defer runtime.GOMAXPROCS(before)
	run := func(processors int, seed uint64) []byte {
		runtime.GOMAXPROCS(processors)
		plan := simulate.Tarn()
		plan.DMin, plan.Crystals = 2.6, plan.Crystals[:2]
		v, err := simulate.Invent(context.Background(), plan)
		if err != nil {
			t.Fatal(err)
		}
		c := v.Plan.Cell
		series := analysis.Series{Title: v.Plan.Title, EnergyKeV: 300, Seed: seed, Group: v.Group, Cell: crystal.Cell{A: c.A, B: c.B, C: c.C, Alpha: c.Alpha, Beta: c.Beta, Gamma: c.Gamma}}
		for i := range v.Specimens {
			s := analysis.Specimen{Name: v.Specimens[i].Name}
			for j := range v.Specimens[i].Positions {
				m := &v.Specimens[i].Positions[j]
				s.Positions = append(s.Positions, analysis.Position{Name: m.Plan.Name, ThicknessNM: m.Plan.ThicknessNM, ThicknessSU: 12, Order: m.Plan.Order, Rows: m.Rows})
			}
			series.Crystals = append(series.Crystals, s)
		}
		study, err := analysis.New(series, &analysis.Settings{Replicates: 60, Flips: 60})
		if err != nil {
			t.Fatal(err)
		}
		r, err := study.Run(context.Background(), nil)
		if err != nil {
			t.Fatal(err)
		}
		data, err := Encode(r)
		if err != nil {
			t.Fatal(err)
		}
		return data
	}
	one := run(1, 1)
	if two := run(2, 1); !bytes.Equal(one, two) {
		a, _ := Decode(one)
		b, _ := Decode(two)
		t.Errorf("two processors give other bytes: %v", Compare(a, b, 0).Differences)
	}
	if os.Getenv("THINWARD_FULL") != "1" {
		return
	}
	if other := run(2, 2); bytes.Equal(one, other) {
		t.Error("another seed gives the same bytes: nothing in them is random, so nothing is tested")
	}
}
