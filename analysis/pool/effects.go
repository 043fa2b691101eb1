package pool

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Effects joins k estimates of one number.
type Effects struct {
	K int
	// Fixed answers "in these": the inverse-variance mean.
	Fixed, FixedSE, FixedLo, FixedHi float64
	// Random answers "in others like these": the mean with between-variance Tau2
	// and the interval of Hartung and Knapp with k-1 degrees of freedom.
	Random, RandomSE, RandomLo, RandomHi float64
	// LikeLo and LikeHi are the interval of Random with the larger of RandomSE and
	// NormalSE: where few estimates agree better than their own errors allow, that of
	// Hartung and Knapp is narrower than the fixed one, which no report should claim of
	// others (Knapp & Hartung 2003, who bound their factor by 1; Roever, Knapp & Friede 2015).
	LikeLo, LikeHi float64
	// NormalSE is the plain standard error of Random, without Hartung and Knapp.
	NormalSE float64
	// Q is Cochran's heterogeneity with K-1 degrees of freedom and tail QP.
	Q, QP float64
	// Tau2 is the DerSimonian-Laird between-variance, I2 = max(0, (Q-df)/Q).
	// Both are computed from two estimates on, but say little below five (see
	// Estimable).
	Tau2, I2 float64
	// Birge is sqrt(Q/df).
	Birge float64
	// Estimable is false below five estimates: then Tau2 and I2 are not to be shown.
	Estimable bool
	Level     float64
}

// fewest is the number of crystals from which on a between-variance is shown
// (common practice, no source; with fewer its interval reaches from 0 to far
// beyond the estimates).
const fewest = 5

// Join pools estimates that share nothing; see JoinSharing.
func Join(y, se []float64, level float64) (*Effects, error) { return JoinSharing(y, se, 0, level) }

// JoinSharing pools the estimates y with standard errors se at the given confidence
// level (0 = 0.95), of which shared, a standard error, is that of something they have in
// common: y_i = mu + common + own_i. What is common does not fall with the number of
// estimates and makes none of them differ, so below se^2 stands for se^2 - shared^2, and
// shared^2 is added to the squared error of every mean.
//
//	fixed: mu = sum w y / sum w, w = 1/se^2, SE = 1/sqrt(sum w)
//	Q = sum w (y-mu)^2, tau^2 = max(0, (Q-df)/(sum w - sum w^2/sum w))   (DerSimonian & Laird 1986)
//	random: w* = 1/(se^2+tau^2), SE^2 = sum w* (y-mu*)^2 / ((k-1) sum w*) (Hartung & Knapp 2001; Knapp & Hartung 2003)
//
// The weights are those of the best linear mean, since what is common moves all alike.
// One estimate gives its own fixed effect and an unbounded random interval. An
// empty list, unequal lengths, a value that is not finite, se <= 0 and a shared error that is
// negative or not below every se are errors.
func JoinSharing(y, se []float64, shared, level float64) (*Effects, error) {
	if err := checkPairs(y, se); err != nil {
		return nil, err
	}
	own := make([]float64, len(se))
	for i, s := range se {
		if !(shared >= 0 && shared < s) {
			return nil, fmt.Errorf("pool: a shared error of %g beside %g of estimate %d: it must be smaller and not negative", shared, s, i)
		}
		own[i] = math.Sqrt(s*s - shared*shared)
	}
	se = own
	if level == 0 {
		level = 0.95
	}
	if !(level > 0 && level < 1) {
		return nil, fmt.Errorf("pool: level %g is not between 0 and 1", level)
	}
	k := len(y)
	e := &Effects{K: k, Level: level, Estimable: k >= fewest}
	var sw, sw2 float64
	for _, s := range se {
		w := 1 / (s * s)
		sw += w
		sw2 += w * w
	}
	e.Fixed = weightedMean(y, se, 0)
	e.FixedSE = math.Hypot(1/math.Sqrt(sw), shared)
	z := distuv.UnitNormal.Quantile((1 + level) / 2)
	e.FixedLo, e.FixedHi = e.Fixed-z*e.FixedSE, e.Fixed+z*e.FixedSE
	df := float64(k - 1)
	if k == 1 {
		e.QP, e.I2, e.Tau2, e.Birge = 1, math.NaN(), math.NaN(), math.NaN()
		e.Random, e.RandomSE, e.NormalSE = e.Fixed, math.Inf(1), math.Inf(1)
		e.RandomLo, e.RandomHi = math.Inf(-1), math.Inf(1)
		e.LikeLo, e.LikeHi = e.RandomLo, e.RandomHi
		return e, nil
	}
	for i := range y {
		d := y[i] - e.Fixed
		e.Q += d * d / (se[i] * se[i])
	}
	e.QP = distuv.ChiSquared{K: df}.Survival(e.Q)
	e.Birge = math.Sqrt(e.Q / df)
	e.Tau2 = math.Max(0, (e.Q-df)/(sw-sw2/sw))
	if e.Q > 0 {
		e.I2 = math.Max(0, (e.Q-df)/e.Q)
	}
	e.Random = weightedMean(y, se, e.Tau2)
	var ws, spread float64
	for i := range y {
		w := 1 / (se[i]*se[i] + e.Tau2)
		d := y[i] - e.Random
		ws += w
		spread += w * d * d
	}
	normal, random := 1/math.Sqrt(ws), math.Sqrt(spread/(df*ws))
	e.NormalSE, e.RandomSE = math.Hypot(normal, shared), math.Hypot(random, shared)
	// What is common is known by its own error, not by the spread of so few.
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: df}.Quantile((1 + level) / 2)
	half := math.Hypot(t*random, z*shared)
	e.RandomLo, e.RandomHi = e.Random-half, e.Random+half
	half = math.Hypot(t*math.Max(random, normal), z*shared)
	e.LikeLo, e.LikeHi = e.Random-half, e.Random+half
	return e, nil
}

// LeaveOneOut returns the fixed effect without each estimate in turn, shared as in
// JoinSharing; nil for fewer than two.
func LeaveOneOut(y, se []float64, shared, level float64) ([]*Effects, error) {
	if err := checkPairs(y, se); err != nil {
		return nil, err
	}
	if len(y) < 2 {
		return nil, nil
	}
	out := make([]*Effects, len(y))
	for i := range y {
		var a, b []float64
		for j := range y {
			if j != i {
				a, b = append(a, y[j]), append(b, se[j])
			}
		}
		e, err := JoinSharing(a, b, shared, level)
		if err != nil {
			return nil, err
		}
		out[i] = e
	}
	return out, nil
}

// PauleMandel returns the between-variance at which the generalised Q equals
// its degrees of freedom (Paule & Mandel 1982), 0 when Q is below them already.
func PauleMandel(y, se []float64) (float64, error) {
	if err := checkPairs(y, se); err != nil {
		return 0, err
	}
	return whereQ(y, se, float64(len(y)-1)), nil
}

// Signs counts how many estimates lie on the side of the majority, the
// two-sided p of the sign test for it, and the smallest p that so many estimates
// can reach at all: 2^(1-k).
func Signs(y []float64) (same int, p, smallest float64) {
	positive, k := 0, 0
	for _, v := range y {
		if v == 0 || math.IsNaN(v) {
			continue
		}
		k++
		if v > 0 {
			positive++
		}
	}
	if k == 0 {
		return 0, 1, 1
	}
	same = max(positive, k-positive)
	tail := 0.0
	b := distuv.Binomial{N: float64(k), P: 0.5}
	for i := same; i <= k; i++ {
		tail += b.Prob(float64(i))
	}
	return same, math.Min(1, 2*tail), math.Min(1, 2*math.Pow(0.5, float64(k)))
}

func weightedMean(y, se []float64, tau2 float64) float64 {
	var sw, s float64
	for i := range y {
		w := 1 / (se[i]*se[i] + tau2)
		sw += w
		s += w * y[i]
	}
	return s / sw
}

func checkPairs(y, se []float64) error {
	if len(y) == 0 {
		return errors.New("pool: no estimate")
	}
	if len(y) != len(se) {
		return fmt.Errorf("pool: %d estimates but %d standard errors", len(y), len(se))
	}
	for i := range y {
		if math.IsNaN(y[i]) || math.IsInf(y[i], 0) {
			return fmt.Errorf("pool: estimate %d is %g", i, y[i])
		}
		if !(se[i] > 0) || math.IsInf(se[i], 0) {
			return fmt.Errorf("pool: standard error %d is %g: it must be positive and finite", i, se[i])
		}
	}
	return nil
}
