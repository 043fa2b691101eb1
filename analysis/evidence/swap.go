package evidence

import (
	"fmt"
	"math"
)

// Swapped compares the pooled exchange with what it would be had the positions
// of any of the k crystals been exchanged as wholes: 2^k ways, the measured one
// included. P is the share of ways whose pooled |m| is at least the measured one,
// Smallest the least P that k crystals can give, 2/2^k (1 for one crystal).
type Swapped struct {
	Pooled      float64
	P, Smallest float64
	Ways        int
}

// mostSwapped bounds the crystals whose ways are all enumerated.
const mostSwapped = 20

// Swap enumerates the ways. m and se are the exchanges as measured and their
// standard errors, swapped those with thin and thick exchanged. Pooling is by
// 1/se^2. Errors: no crystal, more than 20, unequal lengths, a value that is not
// finite, se not above 0.
func Swap(m, swapped, se []float64) (*Swapped, error) {
	k := len(m)
	if k == 0 || k > mostSwapped || len(swapped) != k || len(se) != k {
		return nil, fmt.Errorf("evidence: Swap: %d, %d and %d values (1 to %d crystals)", k, len(swapped), len(se), mostSwapped)
	}
	total := 0.0
	for i := range m {
		if !(se[i] > 0) || math.IsInf(se[i], 0) || math.IsNaN(m[i]+swapped[i]) || math.IsInf(m[i]+swapped[i], 0) {
			return nil, fmt.Errorf("evidence: Swap: crystal %d has m = %g, swapped %g, standard error %g", i, m[i], swapped[i], se[i])
		}
		total += 1 / (se[i] * se[i])
	}
	pooled := func(way int) float64 {
		sum := 0.0
		for i := range m {
			v := m[i]
			if way>>i&1 == 1 {
				v = swapped[i]
			}
			sum += v / (se[i] * se[i])
		}
		return sum / total
	}
	out := &Swapped{Pooled: pooled(0), Ways: 1 << k, Smallest: math.Min(1, 2/float64(int(1)<<k))}
	// A swapped exchange is -m/(1-m), not quite -m: the all-swapped way must count
	// as equal to the measured one.
	bar := math.Min(math.Abs(out.Pooled), math.Abs(pooled(out.Ways-1))) * (1 - 1e-9)
	n := 0
	for way := range out.Ways {
		if math.Abs(pooled(way)) >= bar {
			n++
		}
	}
	out.P = float64(n) / float64(out.Ways)
	return out, nil
}
