package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/curve"
	"thinward/analysis/difference"
	"thinward/analysis/resample"
	"thinward/analysis/size"
)

func (s *Study) curveSettings(x *Compared, purpose string) *curve.Settings {
	o := s.settings.Curve
	o.Flips = s.settings.Flips
	o.Resample = resample.Settings{
		Replicates: s.settings.Replicates, Level: s.settings.Level, Workers: s.settings.Workers,
		Seed: s.seed(x.Result.Crystal, x.Result.ThickCrystal, x.Result.Thin+" - "+x.Result.Thick, purpose),
	}
	return &o
}

// weights are the precisions of eps, the pooled mean squared over the variance
// of the difference.
func weights(p *difference.Pairs) []float64 {
	w := p.EpsVar()
	for i := range w {
		w[i] = 1 / w[i]
	}
	return w
}

// curves draws dI against strength and tests the curve jointly over strength and
// resolution.
func (s *Study) curves(ctx context.Context, x *Compared) error {
	o := s.curveSettings(x, "strength")
	o.S2 = x.Pairs.S2
	b, err := curve.ByStrength(ctx, x.Strengths.Z, x.Pairs.Eps(), weights(x.Pairs), o)
	if err != nil {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		x.Result.Strength = Curve{P: math.NaN(), PStrength: math.NaN(), PResolution: math.NaN(), Why: err.Error()}
		return nil
	}
	x.Band = b
	x.Result.Strength = curveResult(b)
	for _, w := range b.Warnings {
		x.warn(w.Code, w.Text)
	}
	if x.Contrast.Primary {
		x.Result.AngleBlocks, err = s.blockBands(ctx, x)
	}
	return err
}

func curveResult(b *curve.Banded) Curve {
	c := Curve{Grid: b.Grid, Mean: b.Mean, Lo: b.Lo, Hi: b.Hi, LoSim: b.LoSim, HiSim: b.HiSim, P: b.P, PStrength: math.NaN(), PResolution: math.NaN(), Level: b.Level}
	if b.Flip != nil {
		c.PStrength = slices.Min(b.Flip.Adjusted[0])
		if len(b.Flip.Adjusted) > 1 {
			c.PResolution = slices.Min(b.Flip.Adjusted[1])
		}
	}
	for _, n := range b.N {
		c.Window = max(c.Window, n)
	}
	return c
}

// withB gives the intensities of the pairs under their scale as a curve in the angle
// but with the fitted B factors put back: with B taken off no trend with resolution
// is left to see.
func (x *Compared) withB() (thin, thick []float64) {
	thin, thick = slices.Clone(x.Input.Thin), slices.Clone(x.Input.Thick)
	for i, s2 := range x.Pairs.S2 {
		thin[i] *= math.Exp(-2 * x.b[0] * s2)
		thick[i] *= math.Exp(-2 * x.b[1] * s2)
	}
	return thin, thick
}

func (s *Study) resolution(ctx context.Context, x *Compared) error {
	o := s.curveSettings(x, "resolution")
	o.Shells = min(12, max(3, x.Pairs.Len()/s.settings.ShellPairs))
	thin, thick := x.withB()
	sh, err := curve.ByResolution(ctx, x.Pairs.S2, thin, thick, o)
	if err != nil {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		x.Result.Resolution = Resolution{DeltaB: math.NaN(), DeltaBLo: math.Inf(-1), DeltaBHi: math.Inf(1), Share: math.NaN(), FittedB: math.NaN(), FittedBSE: math.NaN(), Why: err.Error()}
		return nil
	}
	r := Resolution{LogRatio: sh.LnRatio, Lo: sh.Lo, Hi: sh.Hi, DeltaB: sh.DeltaB, DeltaBLo: sh.DeltaBLo, DeltaBHi: sh.DeltaBHi, Share: sh.Share, Remainder: sh.Rest}
	for _, s2 := range sh.S2 {
		r.D = append(r.D, 1/(2*math.Sqrt(s2)))
	}
	r.FittedB, r.FittedBSE = x.b[1]-x.b[0], math.NaN()
	if !x.Contrast.Across() {
		sc := s.scaled[x.Contrast.Crystal]
		r.FittedBSE = math.Hypot(sc.Fit.BSE[sc.slot[x.Contrast.Thin]], sc.Fit.BSE[sc.slot[x.Contrast.Thick]])
	}
	r.Reconciled = reconciled(&r, sh.DeltaBSE)
	x.Result.Resolution = r
	for _, w := range sh.Warnings {
		x.warn(w.Code, w.Text)
	}
	return nil
}

// reconciled sets the B of sums by shell beside that of the scale. Both use the same
// reflections, so the error of their difference is at most that of two that do not.
func reconciled(r *Resolution, se float64) string {
	d, most := r.DeltaB-r.FittedB, 2*math.Hypot(se, r.FittedBSE)
	if math.IsNaN(d) || math.IsNaN(most) {
		return ""
	}
	half := zOf(0.95) * r.FittedBSE
	text := fmt.Sprintf("sums by shell say %s, the fitted scale %s", span(r.DeltaB, r.DeltaBLo, r.DeltaBHi), span(r.FittedB, r.FittedB-half, r.FittedB+half))
	if math.Abs(d) <= most {
		return text + ": the same within their errors"
	}
	return text + ": more apart than their errors; a few strong reflections, a curb or an offset pull the sums"
}

// naive draws the axes that share noise with the difference, each beside the
// curve that noise alone would draw on it.
func (s *Study) naive(ctx context.Context, x *Compared) error {
	x.Result.Naive = map[string]Naive{}
	for _, axis := range []difference.Axis{difference.AxisThin, difference.AxisThick, difference.AxisMean} {
		score, err := x.Pairs.Score(axis)
		if err != nil {
			x.warn("ghost", fmt.Sprintf("no ghost for the axis %s: %v", axis, err))
			continue
		}
		n := Naive{Score: score.Value, GhostScore: score.Ghost, Explained: score.Share, Correlation: correlation(score.Mean, score.GhostMean)}
		o := s.curveSettings(x, "naive")
		o.NoTest, o.Plain, o.Grid = true, true, 60
		o.Resample.Replicates = 2
		b, err := curve.ByStrength(ctx, x.Pairs.Naive(axis).Z, x.Pairs.Eps(), nil, o)
		if err != nil {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			x.warn("ghost", fmt.Sprintf("no curve for the axis %s: %v", axis, err))
			continue
		}
		ghost, err := x.Pairs.Ghost(axis)
		if err != nil {
			return err
		}
		lo, hi := make([]int, len(b.Windows)), make([]int, len(b.Windows))
		for i, w := range b.Windows {
			lo[i], hi[i] = w.Lo, w.Hi
		}
		n.Grid, n.Mean, n.Ghost = b.Grid, b.Mean, ghost.Windows(lo, hi)
		x.Result.Naive[axis.String()] = n
	}
	return nil
}

// correlation is Pearson's, NaN without variation.
func correlation(a, b []float64) float64 {
	n := float64(len(a))
	var ma, mb float64
	for i := range a {
		ma += a[i] / n
		mb += b[i] / n
	}
	var sa, sb, sab float64
	for i := range a {
		sa += (a[i] - ma) * (a[i] - ma)
		sb += (b[i] - mb) * (b[i] - mb)
		sab += (a[i] - ma) * (b[i] - mb)
	}
	return sab / math.Sqrt(sa*sb)
}

// axes gives m on every axis that can be built, with its difference from the
// leading one; the errors of both come from one set of draws.
func (s *Study) axes(ctx context.Context, x *Compared) error {
	type candidate struct {
		name, remark string
		legs         []*size.Input
		z            []float64
	}
	var list []candidate
	add := func(st *difference.Strengths, remark string) {
		if st != nil {
			list = append(list, candidate{st.Axis.String(), remark, []*size.Input{input(x.Pairs, st.Z)}, st.Z})
		}
	}
	if x.Leading == leadCrystals {
		add(x.Strengths, "shares no noise with the difference, and no geometry unless crystals lay alike")
	}
	for _, axis := range []difference.Axis{difference.AxisHalfThin, difference.AxisHalfThick} {
		remark := "one slope errs upward"
		if axis == difference.AxisHalfThick {
			remark = "one slope errs downward"
		}
		if legs := s.bracketLegs(x, axis); legs != nil {
			list = append(list, candidate{axis.String(), remark + " when the position has deviations that the other does not share", legs, nil})
		}
	}
	add(s.third(x), "shares this crystal's deviations; errs downward on a wedge")
	add(x.Pairs.InverseVariance(0), "safe only when the ratio of sigmas is right")
	for _, axis := range []difference.Axis{difference.AxisThin, difference.AxisThick, difference.AxisMean} {
		add(x.Pairs.Naive(axis), "shares the noise of the difference")
	}
	set := s.sizeSettings()
	var stats []*size.Instrument
	for _, c := range list {
		m, err := size.ExchangeCross(c.legs, nil, set)
		if err != nil {
			m = &size.Instrument{M: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1), Why: err.Error()}
		}
		stats = append(stats, m)
		x.Result.Axes = append(x.Result.Axes, AxisResult{
			Axis: c.name, N: int(m.N), M: interval(m.M, m.Lo, m.Hi, m.Why), Delta: none(), P: math.NaN(), Tip: math.NaN(), Remark: c.remark,
		})
	}
	if x.Leading != leadCrystals || len(list) < 2 || !x.Contrast.Primary {
		return nil
	}
	boot, err := resample.Scalars(ctx, x.Pairs.Len(), func(w []float64) ([]float64, error) {
		out := make([]float64, len(list))
		lead := math.NaN()
		for k, c := range list {
			m, err := size.ExchangeCross(c.legs, w, set)
			if err != nil {
				return nil, err
			}
			if k == 0 {
				lead = m.M
			}
			out[k] = m.M - lead
		}
		return out, nil
	}, &resample.Settings{Replicates: s.drawn(), Level: s.settings.Level, Workers: s.settings.Workers, NoBCa: true,
		Seed: s.seed(x.Result.Crystal, x.Result.Thin+" - "+x.Result.Thick, "axes")})
	if err != nil {
		if ctx.Err() != nil {
			return ctx.Err()
		}
		x.warn("axes", "the axes cannot be compared: "+err.Error())
		return nil
	}
	for k := 1; k < len(list); k++ {
		x.Result.Axes[k].Delta = interval(stats[k].M-stats[0].M, boot.Lo[k], boot.Hi[k], "")
	}
	return nil
}

// drawn is the number of draws for the errors of whole estimates, where each
// draw costs a fit.
func (s *Study) drawn() int {
	if s.settings.Long {
		return s.settings.Replicates
	}
	return max(50, s.settings.Replicates/10)
}
