package result

import (
	"context"
	"os"
	"testing"

	"thinward/analysis"
	"thinward/analysis/crystal"
	"thinward/analysis/simulate"
)

// TestRealResult takes the numbers of an invented series through the file: they
// conform to the schema and come back the same.
func TestRealResult(t *testing.T) {
	if testing.Short() {
		t.Skip("runs an analysis")
	}
	plan := simulate.Tarn()
	plan.DMin, plan.Crystals = 3, plan.Crystals[:2]
	v, err := simulate.Invent(context.Background(), plan)
	if err != nil {
		t.Fatal(err)
	}
	c := v.Plan.Cell
	series := analysis.Series{Title: v.Plan.Title, EnergyKeV: 300, Seed: 1, Group: v.Group, Cell: crystal.Cell{A: c.A, B: c.B, C: c.C, Alpha: c.Alpha, Beta: c.Beta, Gamma: c.Gamma}}
	for i := range v.Specimens {
		s := analysis.Specimen{Name: v.Specimens[i].Name}
		for j := range v.Specimens[i].Positions {
			m := &v.Specimens[i].Positions[j]
			s.Positions = append(s.Positions, analysis.Position{Name: m.Plan.Name, ThicknessNM: m.Plan.ThicknessNM, Order: m.Plan.Order, Rows: m.Rows})
		}
		series.Crystals = append(series.Crystals, s)
	}
	study, err := analysis.New(series, &analysis.Settings{Replicates: 30, Flips: 30})
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
	file, err := os.ReadFile("schema.json")
	if err != nil {
		t.Fatal(err)
	}
	schema := tree(t, file)
	if err := validate(schema, schema, any(tree(t, data)), "result"); err != nil {
		t.Error(err)
	}
	back, err := Decode(data)
	if err != nil {
		t.Fatal(err)
	}
	if c := Compare(r, back, 0); !c.Identical || c.Numbers < 1000 {
		t.Errorf("%d numbers, changed on the way: %v", c.Numbers, c.Differences)
	}
}
