package curve

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mathext"
)

// NormalScores returns Blom's approximation of the n expected normal order
// statistics, ascending: the normal quantile of (i - 3/8)/(n + 1/4), i = 1..n (Blom
// 1958). n < 1 gives none.
func NormalScores(n int) []float64 {
	out := make([]float64, max(n, 0))
	for i := range out {
		out[i] = mathext.NormalQuantile((float64(i+1) - 0.375) / (float64(n) + 0.25))
	}
	return out
}

// HalfNormalScores is NormalScores for absolute values: the normal quantile of
// 1/2 + (i - 3/8)/(n + 1/4)/2.
func HalfNormalScores(n int) []float64 {
	out := make([]float64, max(n, 0))
	for i := range out {
		out[i] = mathext.NormalQuantile(0.5 + (float64(i+1)-0.375)/(float64(n)+0.25)/2)
	}
	return out
}

// OrderMedians returns the normal quantiles of Filliben's medians of the n uniform
// order statistics, ascending: (i - 0.3175)/(n + 0.365), the last 0.5^(1/n), the
// first one less that (Filliben 1975, Technometrics 17:111).
func OrderMedians(n int) []float64 {
	out := make([]float64, max(n, 0))
	for i := range out {
		m := (float64(i+1) - 0.3175) / (float64(n) + 0.365)
		switch i {
		case n - 1:
			m = math.Pow(0.5, 1/float64(n))
		case 0:
			m = 1 - math.Pow(0.5, 1/float64(n))
		}
		out[i] = mathext.NormalQuantile(m)
	}
	return out
}

// ProbabilityPlot is a normal probability plot: ordered values against
// OrderMedians, the least-squares line through them and its correlation, which is
// Filliben's test statistic.
type ProbabilityPlot struct {
	Score, Ordered      []float64
	Slope, Intercept, R float64
}

// NewProbabilityPlot orders x. Fewer than three values, one that is not finite, or
// all of them equal is an error. x is not changed.
func NewProbabilityPlot(x []float64) (*ProbabilityPlot, error) {
	if len(x) < 3 {
		return nil, fmt.Errorf("curve: NewProbabilityPlot: %d values, need three", len(x))
	}
	if err := checkColumn("NewProbabilityPlot", x, nil); err != nil {
		return nil, err
	}
	p := &ProbabilityPlot{Score: OrderMedians(len(x)), Ordered: slices.Clone(x)}
	slices.Sort(p.Ordered)
	ms, mx := meanOf(p.Score, nil), meanOf(p.Ordered, nil)
	var ss, sx, xx float64
	for i, v := range p.Ordered {
		ds, dx := p.Score[i]-ms, v-mx
		ss += float64(ds * ds)
		sx += float64(ds * dx)
		xx += float64(dx * dx)
	}
	if xx == 0 {
		return nil, fmt.Errorf("curve: NewProbabilityPlot: all %d values are %g", len(x), x[0])
	}
	p.Slope = sx / ss
	p.Intercept = mx - p.Slope*ms
	p.R = sx / math.Sqrt(float64(ss*xx))
	return p, nil
}
