package analysis

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// mostShared is the largest share of a squared error that estimates may be thought to have
// in common: covariances are estimates too, and weights need an error of one's own.
const mostShared = 0.9

// deletedCovariance is the covariance of m of two contrasts by the reflections that they have
// in common: the sum of the products of what each deletion takes off either (see size.Fit).
// It holds noise of positions in both, and, between crystals, the chance of the shell means, which are
// those of the same reflections. NaN where one was fitted without deletions.
func deletedCovariance(a, b *Compared) float64 {
	if a.Fit == nil || b.Fit == nil || a.Fit.MDeleted == nil || b.Fit.MDeleted == nil {
		return math.NaN()
	}
	of := make(map[int32]float64, len(a.Pairs.Unique))
	for i, u := range a.Pairs.Unique {
		of[u] = a.Fit.MDeleted[i]
	}
	sum := 0.0
	for i, u := range b.Pairs.Unique {
		sum += of[u] * b.Fit.MDeleted[i]
	}
	return sum
}

// sharedError is the standard error that estimates of several crystals have in common: the
// root of the mean of their covariances, each times the factors of its two, 0 where that mean is not
// positive, and never so much that one of the errors se has nothing of its own.
func sharedError(list []*Compared, factor, se []float64) float64 {
	sum, n := 0.0, 0.0
	least := math.Inf(1)
	for i, a := range list {
		least = math.Min(least, se[i])
		for k, b := range list[:i] {
			if c := deletedCovariance(a, b); !math.IsNaN(c) {
				sum += c * factor[i] * factor[k]
				n++
			}
		}
	}
	if !(sum > 0) {
		return 0
	}
	return math.Min(math.Sqrt(sum/n), math.Sqrt(mostShared)*least)
}

// deletedMu is the covariance of mu = -ln(1-m) of contrasts, nil where one has no deletions.
func deletedMu(list []*Compared) *mat.SymDense {
	cov := mat.NewSymDense(len(list), nil)
	for a, x := range list {
		for b, y := range list[:a+1] {
			c := deletedCovariance(x, y)
			if math.IsNaN(c) {
				return nil
			}
			cov.SetSym(a, b, c/((1-x.Fit.M.Value)*(1-y.Fit.M.Value)))
		}
	}
	return cov
}
