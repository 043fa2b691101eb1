package intensity

import (
	"fmt"
	"math"
	"slices"
)

// Cuts says whether a list looks cut: below at a value of I/sigma, or above at
// a value of I that many rows share.
type Cuts struct {
	// Lowest is the smallest I/sigma. Above it lie First observations within
	// the next quarter sigma and Second in the quarter after. In a list that
	// runs out by itself the lowest quarter holds a few at most; LowCut says
	// that it holds at least 20 and half as many as the next.
	Lowest        float64
	First, Second int
	LowCut        bool
	// Highest is the largest I, shared by AtHighest rows of different index;
	// Ceiling says that these are at least three.
	Highest   float64
	AtHighest int
	Ceiling   bool
	Warnings  []Warning
}

// FindCuts looks for cuts in observations (copies collapsed, or a copied strong
// row would look like a ceiling). No rows: zero counts and NaN.
func FindCuts(c *Columns) *Cuts {
	out := &Cuts{Lowest: math.NaN(), Highest: math.NaN()}
	if c.Len() == 0 {
		return out
	}
	out.Lowest, out.Highest = c.I[0]/c.Sigma[0], slices.Max(c.I)
	for r := range c.I {
		out.Lowest = math.Min(out.Lowest, c.I[r]/c.Sigma[r])
	}
	const quarter = 0.25
	top := map[uint64]bool{}
	for r := range c.I {
		switch x := c.I[r]/c.Sigma[r] - out.Lowest; {
		case x < quarter:
			out.First++
		case x < 2*quarter:
			out.Second++
		}
		if c.I[r] == out.Highest {
			top[pack(c.H[r], c.K[r], c.L[r])] = true
		}
	}
	out.AtHighest = len(top)
	out.LowCut = out.First >= 20 && 2*out.First >= out.Second
	out.Ceiling = out.AtHighest >= 3
	if out.LowCut {
		out.Warnings = append(out.Warnings, Warning{Code: "cut-low", Text: fmt.Sprintf(
			"I/sigma stops sharply at %.3g: %d observations lie within a quarter sigma of the lowest, as in a list from which weaker ones were removed", out.Lowest, out.First)})
	}
	if out.Ceiling {
		out.Warnings = append(out.Warnings, Warning{Code: "ceiling", Text: fmt.Sprintf(
			"%d reflections share the largest intensity %g: the strongest look clipped", out.AtHighest, out.Highest)})
	}
	return out
}
