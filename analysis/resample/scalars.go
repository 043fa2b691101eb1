package resample

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// ScalarBoot is the bootstrap of K scalar statistics, every slice of length K.
type ScalarBoot struct {
	Estimate, Bias, SE []float64
	// Lo and Hi are the percentile interval, LoBCa and HiBCa the BCa interval (nil
	// with NoBCa). An interval the data cannot support is -Inf, +Inf.
	Lo, Hi, LoBCa, HiBCa []float64
	// Z0 and Accel are the bias correction and the acceleration of BCa; JackSE and
	// JackBias the jackknife's own error and bias (nil when it was not run).
	Z0, Accel, JackSE, JackBias []float64
	// Cov is the covariance of the draws, Cov[i][j].
	Cov [][]float64
	// Draws[r] are the statistics of replicate r, nil where the statistic failed.
	// Prob[r] is its probability when the resamples were enumerated, else nil.
	Draws [][]float64
	Prob  []float64
	// Achieved is the share of draws inside [Lo, Hi].
	Achieved   []float64
	Level      float64
	Replicates int
	Failed     int
	Units      int
	Scheme     Scheme
	Warnings   []intensity.Warning
}

// Scalars bootstraps stat, a function of n element weights.
//
// stat must be a ratio or a function of ratios: multiplying all weights by one
// number must not change it. weights must not be kept or changed; stat is called
// from several goroutines at once, and its result is copied. Weights are drawn as
// in Bands; with Settings.Blocks the elements of a block share one weight.
//
// Lo, Hi: percentile interval, (R+1)p-th ordered draws. LoBCa, HiBCa: Efron 1987
// (J. Am. Stat. Assoc. 82:171); z0 from the share of draws below the estimate plus
// half of those equal to it, acceleration by leaving out one unit, or one of
// Settings.JackknifeGroups groups of units when there are more units than that
// (unit i is in group i modulo the number; the acceleration then has a random
// error of about 0.4/sqrt(groups)), or from Settings.Accel.
//
// An error, a panic-free NaN or an infinity from stat at the plain weights is an
// error here; in a replicate it makes the replicate a failed one, which counts
// against both ends of every interval and is reported. With fewer units than
// UnitsNeeded(Level) intervals are infinite. It is an error when n < 1, when more
// than half of the replicates fail, or when a leave-out evaluation fails.
func Scalars(ctx context.Context, n int, stat func(weights []float64) ([]float64, error), o *Settings) (*ScalarBoot, error) {
	s, err := o.filled()
	if err != nil {
		return nil, err
	}
	if n < 1 {
		return nil, errors.New("resample: Scalars: no elements")
	}
	u := unitsOf(n, s.Blocks)
	k, estimate, err := plainEstimate(n, stat)
	if err != nil {
		return nil, err
	}
	if s.Accel != nil && len(s.Accel) != k {
		panic(fmt.Sprintf("resample: Settings.Accel: %d accelerations for %d statistics", len(s.Accel), k))
	}
	m := newSampler(u.n, s.Seed.At("scalars"), &s, maxExactDraws/max(k, 1))
	b := &ScalarBoot{
		Estimate: estimate, Draws: make([][]float64, m.total), Prob: m.prob,
		Level: s.Level, Replicates: m.total, Scheme: m.scheme, Units: u.n,
	}
	scratch := func() *scalarScratch { return &scalarScratch{units: newPacked(u.n), weights: make([]float64, n)} }
	err = eachReplicate(ctx, m.total, &s, scratch, func(t *scalarScratch, r int) error {
		m.fill(r, t.units)
		t.expand(u, m.table)
		if v, err := stat(t.weights); err == nil && len(v) == k && finite(v) {
			b.Draws[r] = slices.Clone(v)
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	if err := b.summarise(); err != nil {
		return nil, err
	}
	if !s.NoBCa {
		if err := b.accelerate(ctx, u, n, stat, &s); err != nil {
			return nil, err
		}
		b.bca()
	}
	b.warn()
	return b, nil
}

type scalarScratch struct {
	units   packed
	weights []float64
}

func (t *scalarScratch) expand(u units, table *[256]float64) {
	for i := range t.weights {
		j := i
		if u.of != nil {
			j = int(u.of[i])
		}
		t.weights[i] = table[t.units.at(j)]
	}
}

func plainEstimate(n int, stat func([]float64) ([]float64, error)) (int, []float64, error) {
	ones := make([]float64, n)
	for i := range ones {
		ones[i] = 1
	}
	v, err := stat(ones)
	if err != nil {
		return 0, nil, fmt.Errorf("resample: Scalars: at the plain weights: %w", err)
	}
	for i := range v {
		if math.IsNaN(v[i]) || math.IsInf(v[i], 0) {
			return 0, nil, fmt.Errorf("resample: Scalars: statistic %d at the plain weights is %g", i, v[i])
		}
	}
	return len(v), slices.Clone(v), nil
}

func finite(v []float64) bool {
	for _, x := range v {
		if math.IsNaN(x) || math.IsInf(x, 0) {
			return false
		}
	}
	return true
}

// column returns the draws of statistic j, NaN where they failed.
func (b *ScalarBoot) column(j int) []float64 {
	x := make([]float64, len(b.Draws))
	for r, d := range b.Draws {
		if d == nil {
			x[r] = math.NaN()
		} else {
			x[r] = d[j]
		}
	}
	return x
}

func (b *ScalarBoot) summarise() error {
	for _, d := range b.Draws {
		if d == nil {
			b.Failed++
		}
	}
	if 2*b.Failed > b.Replicates {
		return fmt.Errorf("resample: Scalars: the statistic failed in %d of %d replicates", b.Failed, b.Replicates)
	}
	alpha := (1 - b.Level) / 2
	means := make([]float64, len(b.Estimate))
	for j, e := range b.Estimate {
		l := newLaw(b.column(j), b.Prob)
		mean, sd := l.moments()
		means[j] = mean
		b.Bias, b.SE = append(b.Bias, mean-e), append(b.SE, sd)
		lo, hi := l.lower(alpha), l.upper(1-alpha)
		if b.Units < UnitsNeeded(b.Level) {
			lo, hi = math.Inf(-1), math.Inf(1)
		}
		b.Lo, b.Hi = append(b.Lo, lo), append(b.Hi, hi)
		b.Achieved = append(b.Achieved, l.share(lo, hi))
	}
	b.covariance(means)
	return nil
}

func (b *ScalarBoot) covariance(means []float64) {
	k := len(means)
	b.Cov = make([][]float64, k)
	for i := range b.Cov {
		b.Cov[i] = make([]float64, k)
	}
	total := 0.0
	for r, d := range b.Draws {
		if d == nil {
			continue
		}
		p := 1.0
		if b.Prob != nil {
			p = b.Prob[r]
		}
		total += p
		for i := range d {
			for j := 0; j <= i; j++ {
				b.Cov[i][j] += float64(p * float64((d[i]-means[i])*(d[j]-means[j])))
			}
		}
	}
	if b.Prob == nil {
		total--
	}
	for i := range b.Cov {
		for j := 0; j <= i; j++ {
			b.Cov[i][j] /= total
			b.Cov[j][i] = b.Cov[i][j]
		}
	}
}

func (b *ScalarBoot) warn() {
	if need := UnitsNeeded(b.Level); b.Units < need {
		b.Warnings = append(b.Warnings, warning(CodeFewUnits, fmt.Sprintf(
			"%d units cannot carry an interval at %g %%, which needs %d; it is infinite", b.Units, 100*b.Level, need), "scalars"))
		return
	}
	if b.Failed > 0 {
		b.Warnings = append(b.Warnings, warning(CodeFailedDraws, fmt.Sprintf(
			"the statistic failed in %d of %d replicates; they count against both ends of the interval", b.Failed, b.Replicates), "scalars"))
	}
	open := 0
	for _, list := range [][]float64{b.Lo, b.Hi, b.LoBCa, b.HiBCa} {
		for _, v := range list {
			if math.IsInf(v, 0) {
				open++
			}
		}
	}
	if open > 0 {
		b.Warnings = append(b.Warnings, warning(CodeFewDraws, fmt.Sprintf(
			"%d interval ends lie beyond what %d replicates can show and are infinite", open, b.Replicates), "scalars"))
	}
}

// BandsOf reads the K statistics of b as one curve and returns its pointwise and
// simultaneous bands, made as in Bands from the draws of b. N is nil; Units is the
// number of units of b at each point.
func BandsOf(ctx context.Context, b *ScalarBoot, o *Settings) (*BandSet, error) {
	s, err := o.filled()
	if err != nil {
		return nil, err
	}
	k := len(b.Estimate)
	out := &BandSet{Mean: slices.Clone(b.Estimate), Level: s.Level, Replicates: b.Replicates, Scheme: b.Scheme, Units: make([]int, k)}
	draws := make([]float64, b.Replicates*k)
	for r := range b.Replicates {
		row := draws[r*k : (r+1)*k]
		if b.Draws[r] != nil {
			copy(row, b.Draws[r])
			continue
		}
		for j := range row {
			row[j] = math.NaN()
		}
	}
	for j := range out.Units {
		out.Units[j] = b.Units
	}
	if err := out.summarise(ctx, draws, b.Prob, &s); err != nil {
		return nil, err
	}
	return out, nil
}
