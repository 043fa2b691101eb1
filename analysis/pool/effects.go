package pool

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Effects joins k estimates of one number.
type Effects struct {
	K int
	// Fixed answers "in these": the inverse-variance mean.
	Fixed, FixedSE, FixedLo, FixedHi float64
	// SharedSE is the part of FixedSE that covariances make.
	SharedSE float64
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
	// Tau2 is the DerSimonian-Laird between-variance, I2 = max(0, (Q-E Q)/Q).
	// Both are computed from two estimates on, but say little below five (see
	// Estimable).
	Tau2, I2 float64
	// Birge is sqrt(Q/E Q).
	Birge float64
	// Estimable is false below five estimates: then Tau2 and I2 are not to be shown.
	Estimable bool
	Level     float64
}

// fewest is the number of crystals from which on a between-variance is shown
// (common practice, no source; with fewer its interval reaches from 0 to far
// beyond the estimates).
const fewest = 5

// Join pools estimates that share nothing; se are their standard errors, everything else is as in
// JoinCovariant.
func Join(y, se []float64, level float64) (*Effects, error) {
	if err := checkPairs(y, se); err != nil {
		return nil, err
	}
	cov := mat.NewSymDense(len(y), nil)
	for i, s := range se {
		cov.SetSym(i, i, s*s)
	}
	return JoinCovariant(y, cov, level)
}

// JoinCovariant pools the estimates y with covariance matrix C at the given confidence
// level (0 = 0.95), v_i = C_ii.
//
//	fixed: mu = sum w y / sum w, w = 1/v, SE^2 = w'Cw / (sum w)^2
//	Q = sum w (y-mu)^2, E Q = sum w v - w'Cw/sum w                        (k-1 when nothing is shared)
//	tau^2 = max(0, (Q - E Q)/(sum w - sum w^2/sum w))                      (DerSimonian & Laird 1986)
//	random: w* = 1/(v+tau^2), s^2 = sum w* (y-mu*)^2 / ((k-1) sum w*) (Hartung & Knapp 2001; Knapp & Hartung 2003)
//	SE^2 = s^2 + c, c = w*'Vw*/(sum w*)^2 - E s^2, V = C + tau^2
//
// The weights leave covariances out, which makes the mean a little less precise than the best
// and keeps an estimate of a covariance from deciding who counts. What is shared moves
// all estimates alike: the spread between them does not show it, so that it is added as c, and
// Q is compared with its own expectation: QP is the tail of Q (k-1)/E Q.
//
// One estimate gives its own fixed effect and an unbounded random interval. An
// empty list, unequal sizes, a value that is not finite and a variance that is not positive
// are errors.
func JoinCovariant(y []float64, cov *mat.SymDense, level float64) (*Effects, error) {
	k := len(y)
	if k > 0 && cov.SymmetricDim() != k {
		return nil, fmt.Errorf("pool: %d estimates but a covariance matrix of %d", k, cov.SymmetricDim())
	}
	se := make([]float64, k)
	for i := range se {
		se[i] = math.Sqrt(cov.At(i, i))
	}
	if err := checkPairs(y, se); err != nil {
		return nil, err
	}
	for i := range k {
		for j := range i {
			if c := cov.At(i, j); math.IsNaN(c) || math.IsInf(c, 0) {
				return nil, fmt.Errorf("pool: covariance of estimates %d and %d is %g", i, j, c)
			}
		}
	}
	if level == 0 {
		level = 0.95
	}
	if !(level > 0 && level < 1) {
		return nil, fmt.Errorf("pool: level %g is not between 0 and 1", level)
	}
	e := &Effects{K: k, Level: level, Estimable: k >= fewest}
	f := weigh(y, cov, 0)
	e.Fixed, e.FixedSE = f.mean, math.Sqrt(f.v)
	e.SharedSE = math.Sqrt(math.Max(0, f.v-f.alone))
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
	if !(f.expected > 1e-9*df) {
		return nil, fmt.Errorf("pool: the estimates have nothing of their own: the covariance matrix leaves no spread between them")
	}
	e.Q = f.q
	e.QP = distuv.ChiSquared{K: df}.Survival(e.Q * df / f.expected)
	e.Birge = math.Sqrt(e.Q / f.expected)
	e.Tau2 = math.Max(0, (e.Q-f.expected)/(f.sum-f.squares/f.sum))
	if e.Q > 0 {
		e.I2 = math.Max(0, (e.Q-f.expected)/e.Q)
	}
	r := weigh(y, cov, e.Tau2)
	e.Random = r.mean
	expected := r.expected / (df * r.sum)
	shared := math.Max(0, r.v-expected)
	spread := r.q / (df * r.sum)
	e.NormalSE, e.RandomSE = math.Sqrt(r.v), math.Sqrt(spread+shared)
	// What is shared is known by its own error, not by the spread of so few.
	t := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: df}.Quantile((1 + level) / 2)
	half := math.Sqrt(t*t*spread + z*z*shared)
	e.RandomLo, e.RandomHi = e.Random-half, e.Random+half
	half = math.Sqrt(t*t*math.Max(spread, expected) + z*z*shared)
	e.LikeLo, e.LikeHi = e.Random-half, e.Random+half
	return e, nil
}

// weighing is a mean with weights 1/(v + tau^2).
type weighing struct {
	mean, sum, squares float64 // sums of the weights and of their squares
	v, alone           float64 // variance of the mean, and without covariances
	q, expected        float64 // sum w (y-mean)^2 and what it is on the mean
}

func weigh(y []float64, cov *mat.SymDense, tau2 float64) weighing {
	var r weighing
	w := make([]float64, len(y))
	for i := range y {
		w[i] = 1 / (cov.At(i, i) + tau2)
		r.sum += w[i]
		r.squares += w[i] * w[i]
		r.mean += w[i] * y[i]
	}
	r.mean /= r.sum
	var quadratic, own float64
	for i := range y {
		for j := range y {
			c := cov.At(i, j)
			if i == j {
				c += tau2
				own += w[i] * w[i] * c
				r.expected += w[i] * c
			}
			quadratic += w[i] * w[j] * c
		}
		d := y[i] - r.mean
		r.q += w[i] * d * d
	}
	r.v, r.alone = quadratic/(r.sum*r.sum), own/(r.sum*r.sum)
	r.expected -= quadratic / r.sum
	return r
}

// LeaveOneOut returns the fixed effect without each estimate in turn; nil for
// fewer than two. Errors as in JoinCovariant.
func LeaveOneOut(y []float64, cov *mat.SymDense, level float64) ([]*Effects, error) {
	if len(y) < 2 {
		_, err := JoinCovariant(y, cov, level)
		return nil, err
	}
	out := make([]*Effects, len(y))
	for i := range y {
		var rest []float64
		var rows []int
		for j := range y {
			if j != i {
				rest, rows = append(rest, y[j]), append(rows, j)
			}
		}
		part := mat.NewSymDense(len(rows), nil)
		for a, ra := range rows {
			for b, rb := range rows[:a+1] {
				part.SetSym(a, b, cov.At(ra, rb))
			}
		}
		e, err := JoinCovariant(rest, part, level)
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
