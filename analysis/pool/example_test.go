package pool_test

import (
	"fmt"

	"thinward/analysis/pool"
)

// Three crystals: what holds in these, and what one may expect in crystals like
// these, which three estimates leave wide.
func ExampleJoin() {
	e, err := pool.Join([]float64{0.07, 0.10, 0.08}, []float64{0.015, 0.015, 0.015}, 0)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("these crystals %.3f (%.3f to %.3f)\n", e.Fixed, e.FixedLo, e.FixedHi)
	fmt.Printf("crystals like these %.3f (%.3f to %.3f)\n", e.Random, e.LikeLo, e.LikeHi)
	same, p, smallest := pool.Signs([]float64{0.07, 0.10, 0.08})
	fmt.Printf("%d of one sign: p = %.2f, and no three crystals can give less than %.2f\n", same, p, smallest)
	// Output:
	// these crystals 0.083 (0.066 to 0.100)
	// crystals like these 0.083 (0.045 to 0.121)
	// 3 of one sign: p = 0.25, and no three crystals can give less than 0.25
}

// How many crystals show an exchange of 0.03 when one gives it to 0.02.
func ExampleDesign_Crystals() {
	d := pool.Design{SE: 0.02, Pairs: 1500, Multiplicity: 4, NoiseShare: 0.3}
	n, err := d.Crystals(0.03, 0, 0)
	fmt.Println(n, err)
	// Output:
	// 4 <nil>
}
