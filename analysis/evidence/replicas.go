package evidence

import (
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/parallel"
)

// Spread describes one estimate over replicas: mean, standard deviation,
// standard error of the mean, and the 2.5 and 97.5 % quantiles. NaN without a
// finite value.
type Spread struct {
	Mean, SD, MeanSE, Lo, Hi float64
	N                        int
}

// Replicated is what a pipeline said of replicas with a known answer.
type Replicated struct {
	Expected float64 // the m that the replicas hold
	N        int     // replicas that gave an m
	Failed   int     // replicas from which the pipeline made no m
	M, Q     Spread
	// Missed is the share of intervals of M that do not hold Expected.
	Missed float64
	// CurveRejects is the share of p values below 0.05; NaN when no test was made.
	CurveRejects float64
	// Summaries are those of all replicas in order; M.Value is NaN for one that failed.
	Summaries []Summary
}

// Replicate draws n replicas of size intensities and runs the pipeline on each.
// draw fills dst for replica k and must depend on k alone. Errors of the pipeline
// count as failed replicas; when all fail the first error is returned, as is the
// cancellation of ctx. workers 0 means all processors; the result does not
// depend on it.
func Replicate(ctx context.Context, n, workers, size int, expected float64, draw func(k int, dst []float64), p Pipeline) (*Replicated, error) {
	if n < 1 || size < 0 {
		return nil, fmt.Errorf("evidence: Replicate: %d replicas of %d intensities", n, size)
	}
	list, errs := make([]Summary, n), make([]error, n)
	err := parallel.For(ctx, n, workers, func(ctx context.Context, k int) error {
		dst := make([]float64, size)
		draw(k, dst)
		list[k], errs[k] = p(ctx, dst)
		return ctx.Err()
	})
	if err != nil {
		return nil, err
	}
	r := &Replicated{Expected: expected, Summaries: list}
	var m, q []float64
	missed, tested, rejected := 0, 0, 0
	for k := range list {
		if errs[k] != nil || math.IsNaN(list[k].M.Value) {
			list[k].M.Value = math.NaN()
			r.Failed++
			continue
		}
		s := list[k]
		m = append(m, s.M.Value)
		if !(s.M.Lo <= expected && expected <= s.M.Hi) {
			missed++
		}
		if !math.IsNaN(s.Q.Value) {
			q = append(q, s.Q.Value)
		}
		if !math.IsNaN(s.P) {
			tested++
			if s.P < 0.05 {
				rejected++
			}
		}
	}
	r.N = len(m)
	if r.N == 0 {
		for _, e := range errs {
			if e != nil {
				return nil, fmt.Errorf("no replica gave an answer: %w", e)
			}
		}
		return nil, fmt.Errorf("no replica gave an answer")
	}
	r.M, r.Q = spread(m), spread(q)
	r.Missed = float64(missed) / float64(r.N)
	r.CurveRejects = math.NaN()
	if tested > 0 {
		r.CurveRejects = float64(rejected) / float64(tested)
	}
	return r, nil
}

func spread(v []float64) Spread {
	s := Spread{Mean: math.NaN(), SD: math.NaN(), MeanSE: math.NaN(), Lo: math.NaN(), Hi: math.NaN(), N: len(v)}
	if len(v) == 0 {
		return s
	}
	n := float64(len(v))
	s.Mean, s.SD = 0, 0
	for _, x := range v {
		s.Mean += x / n
	}
	for _, x := range v {
		s.SD += (x - s.Mean) * (x - s.Mean)
	}
	s.SD = math.Sqrt(s.SD / math.Max(n-1, 1))
	s.MeanSE = s.SD / math.Sqrt(n)
	sorted := slices.Sorted(slices.Values(v))
	s.Lo, s.Hi = quantile(sorted, 0.025), quantile(sorted, 0.975)
	return s
}

// quantile interpolates between order statistics at (n-1)q (type 7 of Hyndman &
// Fan 1996, Am. Stat. 50:361).
func quantile(sorted []float64, q float64) float64 {
	x := q * float64(len(sorted)-1)
	i := int(x)
	if i >= len(sorted)-1 {
		return sorted[len(sorted)-1]
	}
	f := x - float64(i)
	return float64((1-f)*sorted[i]) + float64(f*sorted[i+1])
}

// Detectable is the smallest exchange whose interval would exclude 0 on the
// positive side in the given share of the replicas, had it been added to each:
// the quantile at power of the distance from the lower end of the interval to 0.
// It needs replicas without an effect (Expected 0). power outside 0 to 1, and
// no replica with an interval, give NaN.
func (r *Replicated) Detectable(power float64) float64 {
	if !(power > 0 && power < 1) {
		return math.NaN()
	}
	var need []float64
	for _, s := range r.Summaries {
		if !math.IsNaN(s.M.Value) && !math.IsNaN(s.M.Lo) {
			need = append(need, math.Max(-s.M.Lo, 0))
		}
	}
	if len(need) == 0 {
		return math.NaN()
	}
	slices.Sort(need)
	return need[min(len(need)-1, int(math.Ceil(power*float64(len(need))))-1)]
}

// Power is the share of replicas whose interval of M lies above 0.
func (r *Replicated) Power() float64 {
	n := 0
	for _, s := range r.Summaries {
		if s.M.Lo > 0 {
			n++
		}
	}
	return float64(n) / float64(r.N)
}

// leastCover is what an interval of 95 % may cover in the presence of a bias, and harmless
// the bias, in standard deviations, at which it does: Phi(1.96 - b) - Phi(-1.96 - b) = 0.92.
const (
	leastCover = 0.92
	harmless   = 0.508
)

// Clean reports whether replicas without an effect are read without one, each of
// three readings at the chance alarm of an error: the mean of M lies within its standard
// error of Expected by the normal law, or so near that intervals still cover 92 % (replicas
// share one set of reflections, whose own small bias shows when there are many replicas);
// intervals of 95 % miss no oftener and the test of the curve rejects no oftener than the
// binomial law makes likely at 5 %.
func (r *Replicated) Clean(alarm float64) bool {
	z := distuv.UnitNormal.Quantile(1 - alarm/2)
	off := math.Abs(r.M.Mean - r.Expected)
	return (off <= z*r.M.MeanSE || off <= harmless*r.M.SD) && likely(r.Missed, r.N, alarm) &&
		(math.IsNaN(r.CurveRejects) || likely(r.CurveRejects, r.N, alarm))
}

// Allowed is the largest share of r.N draws that Clean takes for chance at 5 % each.
func (r *Replicated) Allowed(alarm float64) float64 {
	k := 0
	for k < r.N && likely(float64(k+1)/float64(r.N), r.N, alarm) {
		k++
	}
	return float64(k) / float64(r.N)
}

// likely says whether so large a share of n is more likely than alarm when each
// comes with a chance of 5 %.
func likely(share float64, n int, alarm float64) bool {
	k := math.Round(share * float64(n))
	return k == 0 || 1-distuv.Binomial{N: float64(n), P: 0.05}.CDF(k-1) >= alarm
}
