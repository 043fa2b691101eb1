package analysis_test

import (
	"context"
	"errors"
	"fmt"

	"thinward/analysis"
	"thinward/analysis/simulate"
)

// invented makes a series as a reader of files would: two crystals with two
// positions each, whose thick position has exchanged a tenth of its intensity.
func invented() (analysis.Series, error) {
	plan := simulate.Tarn()
	plan.DMin, plan.Crystals = 2.2, plan.Crystals[:2]
	for i := range plan.Crystals {
		plan.Crystals[i].Positions = plan.Crystals[i].Positions[:2]
	}
	v, err := simulate.Invent(context.Background(), plan)
	if err != nil {
		return analysis.Series{}, err
	}
	s := analysis.Series{Title: "Two wedges", EnergyKeV: v.Plan.EnergyKeV, Seed: v.Plan.Seed, Group: v.Group}
	c := v.Plan.Cell
	s.Cell.A, s.Cell.B, s.Cell.C, s.Cell.Alpha, s.Cell.Beta, s.Cell.Gamma = c.A, c.B, c.C, c.Alpha, c.Beta, c.Gamma
	for i := range v.Specimens {
		crystal := analysis.Specimen{Name: v.Specimens[i].Name}
		for j := range v.Specimens[i].Positions {
			p := &v.Specimens[i].Positions[j]
			crystal.Positions = append(crystal.Positions, analysis.Position{Name: p.Plan.Name, ThicknessNM: p.Plan.ThicknessNM, Rows: p.Rows})
		}
		s.Crystals = append(s.Crystals, crystal)
	}
	return s, nil
}

// A study runs its steps in order; what a step found is there when the next one
// begins, and a run can end where one has enough.
func ExampleStudy_Run() {
	series, err := invented()
	if err != nil {
		fmt.Println(err)
		return
	}
	study, err := analysis.New(series, &analysis.Settings{Replicates: 100})
	if err != nil {
		fmt.Println(err)
		return
	}
	enough := errors.New("enough")
	_, err = study.Run(context.Background(), func(step string, sofar *analysis.Result) error {
		fmt.Println(step)
		if step != "differences" {
			return nil
		}
		for _, c := range sofar.Contrasts {
			fmt.Printf("%s: %s - %s: strength from %s, %d pairs\n", c.Crystal, c.Thin, c.Thick, c.StrengthAxis, c.Pairs)
		}
		return enough
	})
	fmt.Println(errors.Is(err, enough))
	// Output:
	// intake
	// scaling
	// differences
	// L1: thin - mid: strength from crystals, 169 pairs
	// L2: thin - mid: strength from crystals, 166 pairs
	// true
}
