package resample

import (
	"fmt"
	"math"
	"slices"
)

// Quantile returns the p-quantile of ascending x by the definition numbered as
// in Hyndman & Fan 1996 (Am. Stat. 50:361), types 1 to 9. Bootstrap percentiles
// here are type 6, the (R+1)p-th ordered draw; those of an enumerated law are its
// inverse distribution function (type 1 with probabilities). Empty x gives NaN.
// It panics when p is outside [0, 1], kind outside 1..9, or x is not ascending
// (NaN included).
func Quantile(x []float64, p float64, kind int) float64 {
	if !(p >= 0 && p <= 1) {
		panic("resample: Quantile: p must lie in [0, 1]")
	}
	for i := range x {
		if math.IsNaN(x[i]) || (i > 0 && x[i] < x[i-1]) {
			panic(fmt.Sprintf("resample: Quantile: x is not ascending at %d", i))
		}
	}
	n := float64(len(x))
	if n == 0 {
		return math.NaN()
	}
	// The fuzz keeps n*p that is a whole number but for rounding a whole number.
	const fuzz = 4 * 0x1p-52
	var a, b float64
	switch kind {
	case 1, 2, 3:
		return stepQuantile(x, p, kind, fuzz)
	case 4:
		a, b = 0, 1
	case 5:
		a, b = 0.5, 0.5
	case 6:
		a, b = 0, 0
	case 7:
		a, b = 1, 1
	case 8:
		a, b = 1.0/3, 1.0/3
	case 9:
		a, b = 3.0/8, 3.0/8
	default:
		panic("resample: Quantile: kind must be 1 to 9")
	}
	return between(x, a+p*(n+1-a-b), fuzz)
}

func stepQuantile(x []float64, p float64, kind int, fuzz float64) float64 {
	h := float64(len(x)) * p
	if kind == 3 {
		h -= 0.5
	}
	j := math.Floor(h + fuzz*math.Max(1, h))
	even := math.Abs(h-j) <= fuzz*math.Max(1, math.Abs(h))
	lo, hi := at(x, int(j)), at(x, int(j)+1)
	switch {
	case !even:
		return hi
	case kind == 1:
		return lo
	case kind == 2:
		return lo + (hi-lo)/2
	case math.Mod(j, 2) == 0:
		return lo
	}
	return hi
}

// at returns the k-th ordered value, k from 1, clamped to the ends.
func at(x []float64, k int) float64 { return x[min(max(k, 1), len(x))-1] }

func between(x []float64, h, fuzz float64) float64 {
	j := math.Floor(h + fuzz*math.Max(1, math.Abs(h)))
	g := h - j
	lo := at(x, int(j))
	if math.Abs(g) <= fuzz*math.Max(1, math.Abs(h)) {
		return lo
	}
	hi := at(x, int(j)+1)
	if lo == hi || math.IsInf(lo, -1) || math.IsInf(hi, 1) {
		if g == 0 || lo == hi || math.IsInf(lo, -1) {
			return lo
		}
		return hi
	}
	return lo + float64(g*(hi-lo))
}

// law is a sorted sample of draws: equal weights when prob is nil. failed draws
// count as lying beyond either end, so they can only widen an interval.
type law struct {
	x      []float64
	prob   []float64
	failed float64 // number of draws, or probability when prob is set
}

func newLaw(x, prob []float64) law {
	l := law{x: make([]float64, 0, len(x))}
	if prob == nil {
		for _, v := range x {
			if !math.IsNaN(v) {
				l.x = append(l.x, v)
			}
		}
		l.failed = float64(len(x) - len(l.x))
		slices.Sort(l.x)
		return l
	}
	order := make([]int, 0, len(x))
	for i, v := range x {
		if math.IsNaN(v) {
			l.failed += prob[i]
			continue
		}
		order = append(order, i)
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case x[a] < x[b]:
			return -1
		case x[a] > x[b]:
			return 1
		}
		return 0
	})
	l.prob = make([]float64, 0, len(order))
	for _, i := range order {
		l.x = append(l.x, x[i])
		l.prob = append(l.prob, prob[i])
	}
	return l
}

// lower and upper are the p-quantiles with the failed draws at -Inf, at +Inf.
// They are infinite too when so few draws cannot reach p.
func (l law) lower(p float64) float64 { return l.quantile(p, l.failed) }
func (l law) upper(p float64) float64 { return l.quantile(p, 0) }

func (l law) quantile(p, below float64) float64 {
	if l.prob != nil {
		// A rounded sum may stop just short of p that it equals.
		sum := below
		if p <= sum {
			return math.Inf(-1)
		}
		for i, q := range l.prob {
			if sum += q; sum >= p-1e-13 {
				return l.x[i]
			}
		}
		return math.Inf(1)
	}
	n := float64(len(l.x))
	h := (n+l.failed+1)*p - below
	const fuzz = 1e-12
	switch {
	case !(h >= 1-fuzz*(n+1)):
		return math.Inf(-1)
	case h > n+fuzz*(n+1):
		return math.Inf(1)
	}
	return between(l.x, h, fuzz)
}

// share returns the share of all draws inside [lo, hi], failed ones outside.
func (l law) share(lo, hi float64) float64 {
	if l.prob != nil {
		in := 0.0
		for i, v := range l.x {
			if v >= lo && v <= hi {
				in += l.prob[i]
			}
		}
		return math.Min(in, 1)
	}
	in := 0
	for _, v := range l.x {
		if v >= lo && v <= hi {
			in++
		}
	}
	return float64(in) / (float64(len(l.x)) + l.failed)
}

// moments returns mean and standard deviation of the draws that did not fail:
// divisor R-1 for sampled draws, probabilities for an enumerated law.
func (l law) moments() (mean, sd float64) {
	if len(l.x) == 0 {
		return math.NaN(), math.NaN()
	}
	p := func(i int) float64 { return 1 }
	div := float64(len(l.x) - 1)
	total := float64(len(l.x))
	if l.prob != nil {
		p = func(i int) float64 { return l.prob[i] }
		total = 0
		for _, q := range l.prob {
			total += q
		}
		div = total
	}
	base := l.x[len(l.x)/2]
	for i, v := range l.x {
		mean += float64(p(i) * (v - base))
	}
	mean = base + mean/total
	ss := 0.0
	for i, v := range l.x {
		d := v - mean
		ss += float64(p(i) * float64(d*d))
	}
	if div <= 0 {
		return mean, math.NaN()
	}
	return mean, math.Sqrt(ss / div)
}

// AttainableConfidence is the largest confidence that an interval inside the
// range of k independent units can have for the centre of a symmetric law:
// 1 - 2^(1-k) (the sign test; common knowledge). k < 1 gives 0.
func AttainableConfidence(k int) float64 {
	if k < 1 {
		return 0
	}
	return 1 - math.Pow(2, float64(1-k))
}

// UnitsNeeded is the smallest number of units whose AttainableConfidence reaches
// level: 6 for 0.95. It panics unless 0 < level < 1.
func UnitsNeeded(level float64) int {
	if !(level > 0 && level < 1) {
		panic("resample: UnitsNeeded: level must lie between 0 and 1")
	}
	k := 1
	for AttainableConfidence(k) < level {
		k++
	}
	return k
}
