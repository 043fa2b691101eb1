package resample

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// maxSignUnits is the number of differences up to which SignFlips enumerates.
const maxSignUnits = 24

// SignTest counts the positive among the non-zero differences d: Stat is their
// number, its law binomial with p = 1/2. Zeros are left out (N counts the rest).
// Few units cannot be significant by sign alone: Smallest is 2^(1-N), 0.25 for
// three. No non-zero difference, or a NaN, is an error.
func SignTest(d []float64) (*RankTest, error) {
	kept, err := nonZero("SignTest", d)
	if err != nil {
		return nil, err
	}
	n := len(kept)
	r := &RankTest{N: n, Expected: float64(n) / 2, Var: float64(n) / 4}
	coin := lattice{p: []float64{0.5, 0.5}}
	l := point(0)
	up := 0
	for _, v := range kept {
		if v > 0 {
			up++
		}
		l = l.plus(coin)
	}
	r.Stat = float64(up)
	r.deviate()
	r.fromLattice(l, up)
	return r, nil
}

// SignFlips is the exact sign-flip test of the sum of d (Fisher 1935): all 2^n
// sign patterns, for up to 24 differences, zeros included. Stat is the sum, Var
// that of the flipped sum, P the share of patterns whose |sum| reaches |Stat|.
// Sums equal but for rounding count as equal. Empty d, more than 24 differences
// (use FlipTest), and a value that is not finite are errors.
func SignFlips(d []float64) (*RankTest, error) {
	n := len(d)
	if n == 0 || n > maxSignUnits {
		return nil, fmt.Errorf("resample: SignFlips: %d differences, need 1 to %d", n, maxSignUnits)
	}
	r := &RankTest{N: n, Exact: true, Smallest: math.Min(1, math.Pow(2, float64(1-n)))}
	abs := 0.0
	for i, v := range d {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("resample: SignFlips: difference %d is %g", i, v)
		}
		r.Stat += v
		r.Var += float64(v * v)
		abs += math.Abs(v)
	}
	r.deviate()
	tol := 1e-12 * abs
	var ge, le, both int
	var walk func(i int, sum float64)
	walk = func(i int, sum float64) {
		if i == n {
			if sum >= r.Stat-tol {
				ge++
			}
			if sum <= r.Stat+tol {
				le++
			}
			if math.Abs(sum) >= math.Abs(r.Stat)-tol {
				both++
			}
			return
		}
		walk(i+1, sum+d[i])
		walk(i+1, sum-d[i])
	}
	walk(0, 0)
	all := float64(int(1) << n)
	r.Upper, r.Lower, r.P = float64(ge)/all, float64(le)/all, float64(both)/all
	return r, nil
}

// SignedRank is Wilcoxon's signed-rank test (Wilcoxon 1945, Biometrics Bull.
// 1:80): zeros left out, equal |d| given mid-ranks, the law exact given those ties
// for up to 200 differences. Stat is V, the sum of the ranks of positive d.
func SignedRank(d []float64) (*RankTest, error) {
	kept, err := nonZero("SignedRank", d)
	if err != nil {
		return nil, err
	}
	abs := make([]float64, len(kept))
	for i, v := range kept {
		abs[i] = math.Abs(v)
	}
	ranks, err := MidRanks(abs)
	if err != nil {
		return nil, err
	}
	r := &RankTest{N: len(kept)}
	l := point(0)
	exact := len(kept) <= 200
	for i, q := range ranks {
		if kept[i] > 0 {
			r.Stat += q
		}
		r.Expected += q / 2
		r.Var += float64(q*q) / 4
		if exact {
			step := lattice{p: make([]float64, int(2*q)+1)}
			step.p[0], step.p[int(2*q)] = 0.5, 0.5
			l = l.plus(step)
		}
	}
	r.deviate()
	if exact {
		r.fromLattice(l, int(2*r.Stat))
	} else {
		r.fromNormal()
	}
	return r, nil
}

// HodgesLehmann is the median of the means of all pairs of d, each value paired
// with itself too (Hodges & Lehmann 1963, Ann. Math. Stat. 34:598). Empty d or a
// NaN is an error.
func HodgesLehmann(d []float64) (float64, error) {
	if len(d) == 0 {
		return 0, errors.New("resample: HodgesLehmann: no values")
	}
	means := make([]float64, 0, len(d)*(len(d)+1)/2)
	for i, a := range d {
		if math.IsNaN(a) {
			return 0, fmt.Errorf("resample: HodgesLehmann: value %d is NaN", i)
		}
		for _, b := range d[:i+1] {
			means = append(means, a/2+b/2)
		}
	}
	slices.Sort(means)
	return Quantile(means, 0.5, 5), nil
}

func nonZero(who string, d []float64) ([]float64, error) {
	var kept []float64
	for i, v := range d {
		if math.IsNaN(v) {
			return nil, fmt.Errorf("resample: %s: difference %d is NaN", who, i)
		}
		if v != 0 {
			kept = append(kept, v)
		}
	}
	if len(kept) == 0 {
		return nil, fmt.Errorf("resample: %s: no difference other than zero", who)
	}
	return kept, nil
}
