package scaling

import (
	"cmp"
	"math"
	"slices"
)

// lawBins is the number of equal-count bins of intensity behind a variance law.
const lawBins = 24

// floorShare keeps the expected variance above this share of the law's value.
const floorShare = 0.2

// varianceLaw is the reported variance of one position as a function of
// intensity: a straight line, or where that bends a monotone broken line. It
// moves a variance computed from a noisy count to the expected intensity.
type varianceLaw struct {
	at0, slope float64   // the line, used when x is nil
	x, v, rise []float64 // the broken line and its slopes
	least      float64   // lower bound of the law itself
}

// at returns the variance at intensity y.
func (l *varianceLaw) at(y float64) float64 {
	v := l.at0 + l.slope*y
	if l.x != nil {
		v = l.bent(y)
	}
	if v < l.least {
		return l.least
	}
	return v
}

func (l *varianceLaw) bent(y float64) float64 {
	lo, hi := 0, len(l.x)-1
	for hi-lo > 1 {
		if mid := (lo + hi) / 2; l.x[mid] <= y {
			lo = mid
		} else {
			hi = mid
		}
	}
	return l.v[lo] + l.rise[lo]*(y-l.x[lo])
}

// fitLaws fits the law of every position, from every n-th reflection when there
// are very many: reflections and not rows, so that their order does not matter.
func fitLaws(in *Input) []varianceLaw {
	rows := make([][]int32, in.Positions)
	stride := int32(max(1, in.Len()/200000))
	for i, h := range in.Unique {
		if h%stride != 0 {
			continue
		}
		p := in.Position[i]
		rows[p] = append(rows[p], int32(i))
	}
	laws := make([]varianceLaw, in.Positions)
	for p, r := range rows {
		laws[p] = fitLaw(in, r)
	}
	return laws
}

func fitLaw(in *Input, rows []int32) varianceLaw {
	if len(rows) == 0 {
		return varianceLaw{at0: 1, least: 1}
	}
	slices.SortFunc(rows, func(a, b int32) int {
		return cmp.Or(cmp.Compare(in.I[a], in.I[b]), cmp.Compare(in.Var[a], in.Var[b]))
	})
	bins := max(1, min(lawBins, len(rows)/8))
	var x, v []float64
	for k := range bins {
		part := rows[k*len(rows)/bins : (k+1)*len(rows)/bins]
		mi, mv := medians(in, part)
		if n := len(x); n > 0 && !(mi > x[n-1]) {
			continue
		}
		x, v = append(x, mi), append(v, mv)
	}
	least := floorShare * slices.Min(v)
	if len(x) < 3 {
		return varianceLaw{at0: v[0], least: least}
	}
	at0, slope := lineByRelative(x, v)
	if slope >= 0 && worstRelative(x, v, at0, slope) < 0.1 {
		return varianceLaw{at0: at0, slope: slope, least: least}
	}
	l := varianceLaw{x: x, v: monotone(v), rise: make([]float64, len(x)), least: least}
	for i := range len(x) - 1 {
		l.rise[i] = (l.v[i+1] - l.v[i]) / (x[i+1] - x[i])
	}
	return l
}

func medians(in *Input, rows []int32) (mi, mv float64) {
	a, b := make([]float64, len(rows)), make([]float64, len(rows))
	for i, r := range rows {
		a[i], b[i] = in.I[r], in.Var[r]
	}
	return median(a), median(b)
}

// median orders x.
func median(x []float64) float64 {
	slices.Sort(x)
	n := len(x)
	if n == 0 {
		return math.NaN()
	}
	return 0.5 * (x[(n-1)/2] + x[n/2])
}

// lineByRelative fits v = at0 + slope x with weights 1/v^2, centred.
func lineByRelative(x, v []float64) (at0, slope float64) {
	var sw, sx, sv float64
	for i := range x {
		w := 1 / (v[i] * v[i])
		sw += w
		sx += w * x[i]
		sv += w * v[i]
	}
	mx, mv := sx/sw, sv/sw
	var cxx, cxv float64
	for i := range x {
		w := 1 / (v[i] * v[i])
		cxx += w * (x[i] - mx) * (x[i] - mx)
		cxv += w * (x[i] - mx) * (v[i] - mv)
	}
	if !(cxx > 0) {
		return mv, 0
	}
	slope = cxv / cxx
	return mv - slope*mx, slope
}

func worstRelative(x, v []float64, at0, slope float64) float64 {
	worst := 0.0
	for i := range x {
		worst = math.Max(worst, math.Abs(at0+slope*x[i]-v[i])/v[i])
	}
	return worst
}

// monotone returns the nearest non-decreasing sequence (pool adjacent violators:
// Ayer et al. 1955).
func monotone(v []float64) []float64 {
	var sum []float64
	var count []int
	for _, y := range v {
		sum, count = append(sum, y), append(count, 1)
		for k := len(sum) - 1; k > 0 && sum[k-1]*float64(count[k]) > sum[k]*float64(count[k-1]); k-- {
			sum[k-1] += sum[k]
			count[k-1] += count[k]
			sum, count = sum[:k], count[:k]
		}
	}
	out := make([]float64, 0, len(v))
	for k := range sum {
		for range count[k] {
			out = append(out, sum[k]/float64(count[k]))
		}
	}
	return out
}
