package manifest

import (
	"fmt"
	"math"
	"strings"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// reindex replaces the indices of c by those that text names, such as "k,h,-l".
// The text must be a whole-number change with determinant 1 or -1.
func reindex(c *intensity.Columns, text string) error {
	xyz := strings.NewReplacer("h", "x", "k", "y", "l", "z", "H", "x", "K", "y", "L", "z").Replace(text)
	op, err := crystal.ParseOp(xyz)
	if err != nil {
		return fmt.Errorf("%q is no change of indices: %w", text, err)
	}
	if op.T != [3]int8{} {
		return fmt.Errorf("%q is no change of indices: it holds a constant", text)
	}
	if d := op.Det(); d != 1 && d != -1 {
		return fmt.Errorf("%q is no change of indices: its determinant is %d", text, d)
	}
	for r := range c.H {
		old := [3]int{int(c.H[r]), int(c.K[r]), int(c.L[r])}
		var now [3]int
		for j := range 3 {
			for i := range 3 {
				now[j] += int(op.R[j][i]) * old[i]
			}
			if now[j] < math.MinInt16 || now[j] > math.MaxInt16 {
				return fmt.Errorf("index %v is too large after %q", old, text)
			}
		}
		c.H[r], c.K[r], c.L[r] = int16(now[0]), int16(now[1]), int16(now[2])
	}
	return nil
}
