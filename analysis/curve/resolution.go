package curve

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/intensity"
	"thinward/analysis/resample"
)

// Shells is the curve by resolution.
type Shells struct {
	// S2Lo, S2Hi and S2 are the least, greatest and mean sin^2(theta)/lambda^2 of
	// each shell, 1/angstrom^2; N the reflections in it.
	S2Lo, S2Hi, S2 []float64
	N              []int
	// LnRatio is ln(<thick>/<thin>) of each shell with its bands, on the scale of the
	// given intensities; Overall that of all reflections together.
	LnRatio, SE, Lo, Hi, LoSim, HiSim []float64
	Overall                           float64
	// DeltaB is B_thick - B_thin (angstrom^2) of the line LnRatio = Intercept - 2
	// DeltaB s^2 with weights 1/SE^2, and Share the share of the weighted variation
	// between shells that the line takes, noise included.
	DeltaB, DeltaBSE, DeltaBLo, DeltaBHi float64
	Intercept, Share                     float64
	// Rest is what B does not explain, with its bands; Chi2 of Rest on DF degrees of
	// freedom and its tail P.
	Rest, RestLo, RestHi, RestLoSim, RestHiSim []float64
	Chi2                                       float64
	DF                                         int
	P                                          float64
	Level, Multiplier                          float64
	Warnings                                   []intensity.Warning
}

// DefaultShells is the number of shells of ByResolution.
const DefaultShells = 12

// CodeWeakShell marks shells whose mean intensity is not clear of zero.
const CodeWeakShell = "weak-shell"

// clearOfZero is how many standard errors both sums of a shell must lie above 0.
const clearOfZero = 5

// ByResolution draws ln(<thick>/<thin>) by shell of s2 (sin^2(theta)/lambda^2,
// 1/angstrom^2), a ratio of sums over Settings.Shells equal-count shells, with
// bootstrap bands over reflections (or Settings.Resample.Blocks).
//
// thin and thick are intensities of the same reflections under one overall scale
// each and no B, or the line takes away what it should show. A shell in which
// either mean is not five standard errors above zero is NaN with an infinite band
// and a warning. With fewer than three shells left the line, Rest and their
// figures are NaN. It panics when lengths differ; no reflections, fewer than two
// in a shell, a value that is not finite, or no usable shell are errors.
func ByResolution(ctx context.Context, s2, thin, thick []float64, o *Settings) (*Shells, error) {
	var s Settings
	if o != nil {
		s = *o
	}
	if len(thin) != len(s2) || len(thick) != len(s2) {
		panic(fmt.Sprintf("curve: ByResolution: %d s2, %d thin, %d thick", len(s2), len(thin), len(thick)))
	}
	for _, list := range [][]float64{s2, thin, thick} {
		if err := checkColumn("ByResolution", list, nil); err != nil {
			return nil, err
		}
	}
	shells := s.Shells
	if shells == 0 {
		shells = DefaultShells
	}
	if shells < 1 || len(s2) < 2*shells {
		return nil, fmt.Errorf("curve: ByResolution: %d reflections for %d shells", len(s2), shells)
	}
	order, _ := ascending(s2)
	c := &Shells{}
	var used []resample.Window
	var of []int
	sorted := pick(s2, order)
	a, b := pick(thin, order), pick(thick, order)
	for k := range shells {
		w := resample.Window{Lo: k * len(order) / shells, Hi: (k + 1) * len(order) / shells}
		c.S2Lo, c.S2Hi = append(c.S2Lo, sorted[w.Lo]), append(c.S2Hi, sorted[w.Hi-1])
		c.S2, c.N = append(c.S2, meanOf(sorted[w.Lo:w.Hi], nil)), append(c.N, w.Len())
		if standsClear(a[w.Lo:w.Hi]) && standsClear(b[w.Lo:w.Hi]) {
			used, of = append(used, w), append(of, k)
		}
	}
	if len(used) == 0 {
		return nil, errors.New("curve: ByResolution: no shell has a mean intensity clear of zero")
	}
	if bad := shells - len(used); bad > 0 {
		c.Warnings = append(c.Warnings, intensity.Warning{Code: CodeWeakShell, Where: "resolution",
			Text: fmt.Sprintf("%d of %d shells have a mean intensity that is not %d standard errors above zero and are left out", bad, shells, clearOfZero)})
	}
	ro := s.Resample
	ro.NoBCa = true
	if ro.Blocks != nil {
		ro.Blocks = make([]int32, len(order))
		for k, i := range order {
			ro.Blocks[k] = s.Resample.Blocks[i]
		}
	}
	c.Overall = math.Log(meanOf(thick, nil) / meanOf(thin, nil))
	draws, err := resample.Scalars(ctx, len(order), lnRatios(a, b, used), &ro)
	if err != nil {
		return nil, err
	}
	if err := c.fill(ctx, draws, of, &ro); err != nil {
		return nil, err
	}
	return c, nil
}

// standsClear reports whether the mean of x is well above zero.
func standsClear(x []float64) bool {
	m, ss := meanOf(x, nil), 0.0
	for _, v := range x {
		ss += float64((v - m) * (v - m))
	}
	n := float64(len(x))
	return m > clearOfZero*math.Sqrt(ss/n/(n-1))
}

func lnRatios(thin, thick []float64, windows []resample.Window) func([]float64) ([]float64, error) {
	return func(w []float64) ([]float64, error) {
		out := make([]float64, len(windows))
		for k, win := range windows {
			var a, b float64
			for i := win.Lo; i < win.Hi; i++ {
				a += float64(w[i] * thin[i])
				b += float64(w[i] * thick[i])
			}
			out[k] = math.Log(b / a)
		}
		return out, nil
	}
}

// fill spreads the usable shells of over all shells and adds the line.
func (c *Shells) fill(ctx context.Context, draws *resample.ScalarBoot, of []int, o *resample.Settings) error {
	set, err := resample.BandsOf(ctx, draws, o)
	if err != nil {
		return err
	}
	all := len(c.S2)
	spread := func(x []float64, rest float64) []float64 {
		out := make([]float64, all)
		for k := range out {
			out[k] = rest
		}
		for j := range x {
			out[of[j]] = x[j]
		}
		return out
	}
	nan, inf := math.NaN(), math.Inf(1)
	c.LnRatio, c.SE = spread(set.Mean, nan), spread(set.SE, nan)
	c.Lo, c.Hi = spread(set.Lo, -inf), spread(set.Hi, inf)
	c.LoSim, c.HiSim = spread(set.LoSim, -inf), spread(set.HiSim, inf)
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
		c.Rest, c.RestLo, c.RestHi = spread(nil, nan), spread(nil, -inf), spread(nil, inf)
		c.RestLoSim, c.RestHiSim = spread(nil, -inf), spread(nil, inf)
		return nil
	}
	derived := *draws
	derived.Estimate = l.apply(set.Mean)
	derived.Draws = make([][]float64, len(draws.Draws))
	for r, d := range draws.Draws {
		if d != nil {
			derived.Draws[r] = l.apply(d)
		}
	}
	// The last two columns, Delta B and the intercept, are answers by themselves: the
	// simultaneous band is that of the rest alone.
	k := len(of)
	rest, line := derived, derived
	rest.Estimate, line.Estimate = derived.Estimate[:k], derived.Estimate[k:]
	rest.Draws, line.Draws = slices.Clone(derived.Draws), slices.Clone(derived.Draws)
	for r, d := range derived.Draws {
		if d != nil {
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
	c.Rest, c.RestLo, c.RestHi = spread(rs.Mean, nan), spread(rs.Lo, -inf), spread(rs.Hi, inf)
	c.RestLoSim, c.RestHiSim = spread(rs.LoSim, -inf), spread(rs.HiSim, inf)
	c.DeltaB, c.DeltaBSE, c.DeltaBLo, c.DeltaBHi = ls.Mean[0], ls.SE[0], ls.Lo[0], ls.Hi[0]
	c.Intercept = ls.Mean[1]
	mean, variation := l.mean(set.Mean), 0.0
	for j := range of {
		c.Chi2 += float64(w[j] * float64(rs.Mean[j]*rs.Mean[j]))
		d := set.Mean[j] - mean
		variation += float64(w[j] * float64(d*d))
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
