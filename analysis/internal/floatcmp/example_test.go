package floatcmp_test

import (
	"fmt"
	"math"

	"thinward/analysis/internal/floatcmp"
)

// A not-a-number passes only where one is wanted.
func ExampleEqual() {
	fmt.Println(floatcmp.Equal(0.1+0.2, 0.3, 0, 1e-12))
	fmt.Println(floatcmp.Equal(math.NaN(), 0.3, 1, 1))
	fmt.Println(floatcmp.Equal(math.NaN(), math.NaN(), 0, 0))
	// Output:
	// true
	// false
	// true
}
