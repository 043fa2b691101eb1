package curve

import (
	"fmt"
	"math"

	"thinward/analysis/resample"
)

// Defaults of Windows.
const (
	DefaultShare = 0.05
	DefaultMin   = 50
	DefaultGrid  = 200
)

// Windows returns rank windows over n elements, centred on grid ranks spread
// evenly from the first to the last. share is the share of elements in a window
// (0 = 0.05), min the least number (0 = 50), grid the number of centres (0 = 200,
// at most n). At an edge a window is cut off and so shrinks to one half, but is
// lengthened inward again to hold min elements, or all of them when n < min.
// n < 1 gives none. It panics when share is outside [0, 1] or min or grid are
// negative.
func Windows(n int, share float64, min, grid int) []resample.Window {
	if !(share >= 0 && share <= 1) || min < 0 || grid < 0 {
		panic(fmt.Sprintf("curve: Windows: share %g, min %d, grid %d", share, min, grid))
	}
	if n < 1 {
		return nil
	}
	if share == 0 {
		share = DefaultShare
	}
	if min == 0 {
		min = DefaultMin
	}
	if grid == 0 {
		grid = DefaultGrid
	}
	least := clamp(min, 1, n)
	width := clamp(int(math.Round(share*float64(n))), least, n)
	grid = clamp(grid, 1, n)
	out := make([]resample.Window, grid)
	for g := range out {
		centre := (n - 1) / 2
		if grid > 1 {
			centre = int(math.Round(float64(g) * float64(n-1) / float64(grid-1)))
		}
		lo := centre - width/2
		hi := lo + width
		lo, hi = clamp(lo, 0, n), clamp(hi, 0, n)
		if hi-lo < least {
			if lo == 0 {
				hi = least
			} else {
				lo = n - least
			}
		}
		out[g] = resample.Window{Lo: lo, Hi: hi}
	}
	return out
}

func clamp(v, lo, hi int) int {
	if v < lo {
		return lo
	}
	if v > hi {
		return hi
	}
	return v
}
