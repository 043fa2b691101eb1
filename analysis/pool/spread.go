package pool

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// TauInterval is the interval of the spread tau between the true values behind the
// estimates y with standard errors se at the given level (0 = 0.95), by the Q-profile
// (Viechtbauer 2007, Stat. Med. 26:37): with
//
//	Q(tau^2) = sum (y - mu)^2/(se^2 + tau^2), mu the mean with weights 1/(se^2 + tau^2),
//
// chi-squared with k-1 degrees of freedom at the true tau, the ends are where Q falls to its
// upper and its lower point; an end is 0 where Q is below that point even at
// 0. It holds for any k from two on, unlike an estimate of tau, and is wide for few. Errors
// as of Join; fewer than two estimates have the interval from 0 to +Inf.
func TauInterval(y, se []float64, level float64) (lo, hi float64, err error) {
	if err := checkPairs(y, se); err != nil {
		return 0, 0, err
	}
	if level == 0 {
		level = 0.95
	}
	if !(level > 0 && level < 1) {
		return 0, 0, fmt.Errorf("pool: level %g is not between 0 and 1", level)
	}
	if len(y) < 2 {
		return 0, math.Inf(1), nil
	}
	chi := distuv.ChiSquared{K: float64(len(y) - 1)}
	return math.Sqrt(whereQ(y, se, chi.Quantile((1+level)/2))), math.Sqrt(whereQ(y, se, chi.Quantile((1-level)/2))), nil
}

// whereQ is the tau^2 at which Q falls to the target, 0 when it is below that at 0.
func whereQ(y, se []float64, target float64) float64 {
	if generalisedQ(y, se, 0) <= target {
		return 0
	}
	lo, hi := 0.0, 1.0
	for generalisedQ(y, se, hi) > target {
		hi *= 2
	}
	for range 200 {
		mid := (lo + hi) / 2
		if generalisedQ(y, se, mid) > target {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo + hi) / 2
}

func generalisedQ(y, se []float64, tau2 float64) float64 {
	mu, q := weightedMean(y, se, tau2), 0.0
	for i := range y {
		d := y[i] - mu
		q += d * d / (se[i]*se[i] + tau2)
	}
	return q
}
