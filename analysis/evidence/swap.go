package evidence

import (
	"fmt"
	"math"
)

// Swapped compares the pooled exchange with what it would be had the positions
// of any of the k crystals been exchanged as wholes: 2^k ways, the measured one
// included. Pooled is the measured m, P the share of ways whose pooled |mu| is at least its,
// Smallest the least P that k crystals can give, 2/2^k (1 for one crystal).
type Swapped struct {
	Pooled      float64
	P, Smallest float64
	Ways        int
}

// mostSwapped bounds the crystals whose ways are all enumerated.
const mostSwapped = 20

// Swap enumerates the ways. m and se are the exchanges as measured and their
// standard errors, swapped those with thin and thick exchanged, which should be
// -m/(1-m). Each crystal counts with mu = -ln(1-m), which changes sign only, taken
// as half the difference of its two readings; pooling is by 1/se(mu)^2. Errors: no
// crystal, more than 20, unequal lengths, a value that is not finite or an m of 1 or
// more, se not above 0.
func Swap(m, swapped, se []float64) (*Swapped, error) {
	k := len(m)
	if k == 0 || k > mostSwapped || len(swapped) != k || len(se) != k {
		return nil, fmt.Errorf("evidence: Swap: %d, %d and %d values (1 to %d crystals)", k, len(swapped), len(se), mostSwapped)
	}
	mu, w, total := make([]float64, k), make([]float64, k), 0.0
	for i := range m {
		mu[i] = (math.Log1p(-swapped[i]) - math.Log1p(-m[i])) / 2
		s := se[i] / (1 - m[i])
		if !(s > 0) || math.IsInf(s, 0) || math.IsNaN(mu[i]) || math.IsInf(mu[i], 0) {
			return nil, fmt.Errorf("evidence: Swap: crystal %d has m = %g, swapped %g, standard error %g", i, m[i], swapped[i], se[i])
		}
		w[i] = 1 / (s * s)
		total += w[i]
	}
	pooled := func(way int) float64 {
		sum := 0.0
		for i := range mu {
			if way>>i&1 == 1 {
				sum -= w[i] * mu[i]
			} else {
				sum += w[i] * mu[i]
			}
		}
		return sum / total
	}
	out := &Swapped{Pooled: -math.Expm1(-pooled(0)), Ways: 1 << k, Smallest: math.Min(1, 2/float64(int(1)<<k))}
	bar := math.Abs(pooled(0)) * (1 - 1e-9)
	n := 0
	for way := range out.Ways {
		if math.Abs(pooled(way)) >= bar {
			n++
		}
	}
	out.P = float64(n) / float64(out.Ways)
	return out, nil
}
