package manifest

import (
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// reindex replaces the indices of c by their images.
func reindex(c *intensity.Columns, by crystal.Reindexing) error {
	for r := range c.H {
		old := crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])}
		n := by.Apply(old)
		for _, v := range []int{n.H, n.K, n.L} {
			if v < math.MinInt16 || v > math.MaxInt16 {
				return fmt.Errorf("index %d %d %d is too large after %q", old.H, old.K, old.L, by)
			}
		}
		c.H[r], c.K[r], c.L[r] = int16(n.H), int16(n.K), int16(n.L)
	}
	return nil
}

// recount brings the angles of c to factor phi + shift in degrees.
func recount(c *intensity.Columns, factor, shift float64) error {
	if factor == 0 {
		factor = 1
	}
	if factor == 1 && shift == 0 {
		return nil
	}
	if c.Phi == nil {
		return fmt.Errorf("the files of this position have no rotation angles")
	}
	for r := range c.Phi {
		c.Phi[r] = factor*c.Phi[r] + shift
	}
	return nil
}
