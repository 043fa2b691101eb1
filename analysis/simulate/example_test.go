package simulate_test

import (
	"context"
	"fmt"

	"thinward/analysis/simulate"
)

// Two positions of one crystal: the exchange moves intensity from strong to weak
// reflections and into forbidden ones, and leaves the mean of each shell.
func ExampleInvent() {
	plan := &simulate.Plan{
		Title: "Two places on a wedge", SpaceGroup: "P 21 21 21", Seed: 7, DMin: 1.5,
		Cell: simulate.Cell{A: 10, B: 12, C: 14},
		Crystals: []simulate.Crystal{{Positions: []simulate.Position{
			{Name: "thin", ThicknessNM: 140},
			{Name: "thick", ThicknessNM: 310, Exchange: 0.1},
		}}},
	}
	s, err := simulate.Invent(context.Background(), plan)
	if err != nil {
		fmt.Println(err)
		return
	}
	thick := s.Specimens[0].Positions[1]
	for u, absent := range s.Truth.Absent {
		if absent {
			fmt.Printf("%v is forbidden, holds %.2f of its shell mean\n", s.Truth.HKL[u], thick.Law[u]/s.Truth.Local[u])
			break
		}
	}
	fmt.Printf("m of the contrast: %.2f\n", s.ExchangeBetween(0, 0, 1))
	// Output:
	// {0 0 1} is forbidden, holds 0.10 of its shell mean
	// m of the contrast: 0.10
}
