package resample

import (
	"errors"
	"fmt"
	"math"
	"slices"
)

// maxKendall is the number of points up to which MannKendall is exact.
const maxKendall = 60

// MannKendall tests y, in the order of measurement or of thickness, for a trend
// (Mann 1945, Econometrica 13:245): S is the number of rising less that of falling
// pairs. Up to 60 points the law is exact given the ties in y; beyond that normal,
// with the tie-corrected variance and no continuity correction. Tau is S/(n(n-1)/2)
// corrected for ties (tau-b). Fewer than two points or a NaN is an error.
func MannKendall(y []float64) (*RankTest, error) {
	n := len(y)
	if n < 2 {
		return nil, fmt.Errorf("resample: MannKendall: %d points, need two", n)
	}
	r := &RankTest{N: n}
	for i, v := range y {
		if math.IsNaN(v) {
			return nil, fmt.Errorf("resample: MannKendall: value %d is NaN", i)
		}
		for _, u := range y[:i] {
			switch {
			case v > u:
				r.Stat++
			case v < u:
				r.Stat--
			}
		}
	}
	f := float64(n)
	r.Var = f * (f - 1) * (2*f + 5)
	ties := tieSizes(y)
	for _, k := range ties {
		t := float64(k)
		r.Var -= t * (t - 1) * (2*t + 5)
	}
	r.Var /= 18
	r.deviate()
	if n > maxKendall {
		r.fromNormal()
		return r, nil
	}
	// Inserting the tied sets one after another makes the number of falling pairs a
	// sum of independent Mann-Whitney counts.
	total, before, untied := point(0), 0, 0
	for _, k := range ties {
		if before > 0 {
			total = total.plus(mannWhitneyLaw(before, k))
			untied += before * k
		}
		before += k
	}
	// Here total is the law of rising pairs; S = 2 rising - untied.
	r.fromLattice(total, (int(r.Stat)+untied)/2)
	return r, nil
}

// mannWhitneyLaw is the law of the number of pairs (one of a, one of b) in order:
// N(a, b) = N(a-1, b) shifted by b, with chance a/(a+b), or N(a, b-1).
func mannWhitneyLaw(a, b int) lattice {
	row := make([]lattice, b+1)
	for j := range row {
		row[j] = point(0)
	}
	for i := 1; i <= a; i++ {
		for j := 1; j <= b; j++ {
			mixed := lattice{p: make([]float64, i*j+1)}
			share := float64(i) / float64(i+j)
			for v, p := range row[j].p { // i-1, j
				mixed.p[v+j] += float64(share * p)
			}
			for v, p := range row[j-1].p { // i, j-1
				mixed.p[v] += float64((1 - share) * p)
			}
			row[j] = mixed
		}
	}
	return row[b]
}

// TauB is Kendall's tau of y against its order, ties in y allowed for:
// S / sqrt((N - T) N), N the number of pairs, T that of tied ones (Kendall 1945,
// Biometrika 33:239). All equal gives NaN. NaN in y, or fewer than two points, is
// an error.
func TauB(y []float64) (float64, error) {
	r, err := MannKendall(y)
	if err != nil {
		return 0, err
	}
	pairs := float64(len(y)) * float64(len(y)-1) / 2
	untied := pairs
	for _, t := range tieSizes(y) {
		untied -= float64(t) * float64(t-1) / 2
	}
	if untied == 0 {
		return math.NaN(), nil
	}
	return r.Stat / math.Sqrt(float64(pairs*untied)), nil
}

// TheilSen returns the median of the slopes of all pairs with different x (Theil
// 1950; Sen 1968, J. Am. Stat. Assoc. 63:1379) and the intercept median(y) - slope
// median(x). It panics when lengths differ; a NaN, or no two different x, is an
// error.
func TheilSen(x, y []float64) (slope, intercept float64, err error) {
	if len(x) != len(y) {
		panic(fmt.Sprintf("resample: TheilSen: %d x for %d y", len(x), len(y)))
	}
	var slopes []float64
	for i := range x {
		if math.IsNaN(x[i]) || math.IsNaN(y[i]) {
			return 0, 0, fmt.Errorf("resample: TheilSen: point %d is NaN", i)
		}
		for j := range i {
			if x[i] != x[j] {
				slopes = append(slopes, (y[i]-y[j])/(x[i]-x[j]))
			}
		}
	}
	if len(slopes) == 0 {
		return 0, 0, errors.New("resample: TheilSen: no two different x")
	}
	slope = median(slopes)
	return slope, median(y) - slope*median(x), nil
}

func median(x []float64) float64 {
	s := slices.Clone(x)
	slices.Sort(s)
	return Quantile(s, 0.5, 5)
}
