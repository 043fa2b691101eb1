package electron_test

import (
	"fmt"

	"thinward/analysis/electron"
)

func ExampleShareOf() {
	free, err := electron.EstimateFreePaths(200, electron.Macromolecular())
	if err != nil {
		fmt.Println(err)
		return
	}
	s, err := electron.ShareOf(200, free)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("elastic %.0f nm, inelastic %.0f nm, both to %.0f %%\n", free.ElasticNM, free.InelasticNM, 100*free.RelativeSU)
	fmt.Printf("unscattered %.2f, kinematic %.2f, multiply elastic %.2f, inelastic %.2f\n", s.Unscattered, s.Kinematic, s.Multiple, s.Inelastic)
	// Output:
	// elastic 426 nm, inelastic 268 nm, both to 30 %
	// unscattered 0.30, kinematic 0.14, multiply elastic 0.04, inelastic 0.53
}

func ExampleBlackmanRatio() {
	for _, a := range []float64{0.1, 0.5, 1, 2} {
		fmt.Printf("A = %.1f: %.4f of the kinematic intensity\n", a, electron.BlackmanRatio(a))
	}
	// Output:
	// A = 0.1: 0.9967 of the kinematic intensity
	// A = 0.5: 0.9197 of the kinematic intensity
	// A = 1.0: 0.7129 of the kinematic intensity
	// A = 2.0: 0.2562 of the kinematic intensity
}
