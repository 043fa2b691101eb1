package curve

import (
	"context"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/resample"
)

// spread puts x, one value a usable shell, at its place among all shells; the
// others get rest.
func spread(x []float64, of []int, all int, rest float64) []float64 {
	out := make([]float64, all)
	for k := range out {
		out[k] = rest
	}
	for j := range x {
		out[of[j]] = x[j]
	}
	return out
}

// fill writes the bands of the usable shells of, then the line through them.
func (c *Shells) fill(ctx context.Context, draws *resample.ScalarBoot, of []int, o *resample.Settings) error {
	set, err := resample.BandsOf(ctx, draws, o)
	if err != nil {
		return err
	}
	all := len(c.S2)
	nan, inf := math.NaN(), math.Inf(1)
	c.LnRatio, c.SE = spread(set.Mean, of, all, nan), spread(set.SE, of, all, nan)
	c.Lo, c.Hi = spread(set.Lo, of, all, -inf), spread(set.Hi, of, all, inf)
	c.LoSim, c.HiSim = spread(set.LoSim, of, all, -inf), spread(set.HiSim, of, all, inf)
	c.Level, c.Multiplier = set.Level, set.Multiplier
	c.Warnings = append(c.Warnings, set.Warnings...)
	x, w := make([]float64, len(of)), make([]float64, len(of))
	for j, k := range of {
		x[j], w[j] = c.S2[k], 1/(set.SE[j]*set.SE[j])
	}
	l, ok := newFixedWeights(x, w)
	if !ok {
		c.DeltaB, c.DeltaBSE, c.DeltaBLo, c.DeltaBHi = nan, nan, -inf, inf
		c.Intercept, c.Share, c.Chi2, c.P = nan, nan, nan, nan
		c.Rest = spread(nil, of, all, nan)
		c.RestLo, c.RestHi = spread(nil, of, all, -inf), spread(nil, of, all, inf)
		c.RestLoSim, c.RestHiSim = spread(nil, of, all, -inf), spread(nil, of, all, inf)
		return nil
	}
	return c.fillLine(ctx, draws, of, l, o)
}

// fillLine refits the line in every draw. Delta B and the intercept are answers by
// themselves: the simultaneous band is that of the rest alone.
func (c *Shells) fillLine(ctx context.Context, draws *resample.ScalarBoot, of []int, l *fixedWeights, o *resample.Settings) error {
	k, all := len(of), len(c.S2)
	rest, line := *draws, *draws
	fit := l.apply(draws.Estimate)
	rest.Estimate, line.Estimate = fit[:k], fit[k:]
	rest.Draws, line.Draws = slices.Clone(draws.Draws), slices.Clone(draws.Draws)
	for r, d := range draws.Draws {
		if d != nil {
			d = l.apply(d)
			rest.Draws[r], line.Draws[r] = d[:k], d[k:]
		}
	}
	rs, err := resample.BandsOf(ctx, &rest, o)
	if err != nil {
		return err
	}
	ls, err := resample.BandsOf(ctx, &line, o)
	if err != nil {
		return err
	}
	nan, inf := math.NaN(), math.Inf(1)
	c.Rest = spread(rs.Mean, of, all, nan)
	c.RestLo, c.RestHi = spread(rs.Lo, of, all, -inf), spread(rs.Hi, of, all, inf)
	c.RestLoSim, c.RestHiSim = spread(rs.LoSim, of, all, -inf), spread(rs.HiSim, of, all, inf)
	c.DeltaB, c.DeltaBSE, c.DeltaBLo, c.DeltaBHi = ls.Mean[0], ls.SE[0], ls.Lo[0], ls.Hi[0]
	c.Intercept = ls.Mean[1]
	mean, variation := l.mean(draws.Estimate), 0.0
	for j, v := range draws.Estimate {
		c.Chi2 += float64(l.w[j] * float64(rs.Mean[j]*rs.Mean[j]))
		variation += float64(l.w[j] * float64((v-mean)*(v-mean)))
	}
	c.Share = nan
	if variation > 0 {
		c.Share = 1 - c.Chi2/variation
	}
	c.DF = k - 2
	c.P = distuv.ChiSquared{K: float64(c.DF)}.Survival(c.Chi2)
	return nil
}

// fixedWeights fits lines with fixed weights at fixed x.
type fixedWeights struct {
	x, w []float64
	sum  float64
	mx   float64
	xx   float64
}

func newFixedWeights(x, w []float64) (*fixedWeights, bool) {
	l := &fixedWeights{x: x, w: w}
	if len(x) < 3 {
		return nil, false
	}
	for i, v := range w {
		if math.IsInf(v, 0) || math.IsNaN(v) {
			return nil, false
		}
		l.sum += v
		l.mx += float64(v * x[i])
	}
	l.mx /= l.sum
	for i, v := range w {
		d := x[i] - l.mx
		l.xx += float64(v * float64(d*d))
	}
	return l, l.xx > 0
}

func (l *fixedWeights) mean(y []float64) float64 {
	m := 0.0
	for i, v := range l.w {
		m += float64(v * y[i])
	}
	return m / l.sum
}

// apply returns the rest of y about its line, then Delta B and the intercept.
func (l *fixedWeights) apply(y []float64) []float64 {
	m, xy := l.mean(y), 0.0
	for i, v := range l.w {
		xy += float64(v * float64((l.x[i]-l.mx)*(y[i]-m)))
	}
	slope := xy / l.xx
	out := make([]float64, 0, len(y)+2)
	for i, v := range y {
		out = append(out, v-m-float64(slope*(l.x[i]-l.mx)))
	}
	return append(out, -slope/2, m-float64(slope*l.mx))
}
