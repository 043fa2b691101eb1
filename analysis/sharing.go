package analysis

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// mostShared is the largest correlation that estimates of two crystals may be thought to have:
// covariances are estimates too.
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

// covarianceBetween is the covariance matrix of estimates of several crystals with errors
// se, each a factor times the m of its contrast. A negative covariance counts as none, and
// so does an unknown one.
func covarianceBetween(list []*Compared, factor, se []float64) *mat.SymDense {
	cov := mat.NewSymDense(max(len(list), 1), nil)
	for i, a := range list {
		cov.SetSym(i, i, se[i]*se[i])
		for k, b := range list[:i] {
			if c := factor[i] * factor[k] * deletedCovariance(a, b); c > 0 {
				cov.SetSym(i, k, math.Min(c, mostShared*se[i]*se[k]))
			}
		}
	}
	return cov
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
