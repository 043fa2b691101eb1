package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/curve"
	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/resample"
	"thinward/analysis/scaling"
	"thinward/analysis/size"
)

// reading repeats what a Study does with one contrast, from scaled positions
// on, for data that are not those measured. It is safe for several goroutines.
type reading struct {
	study *Study
	x     *Compared
	cat   *intensity.Catalogue
	// others and third hold what the leading axis takes from elsewhere.
	others []difference.OtherCrystal
	third  *intensity.Merged
	model  size.Model
	// lead is the fit that is repeated: that of the contrast, or on a bracket that of
	// half of the thin position; nil when there is none.
	lead *size.Fit
	// flips is the number of sign flips for the p of the curve; 0 leaves it out.
	flips int
	seed  resample.Seed
	// alarm is the chance left to one reading of a control to fail by chance.
	alarm float64
	// precision and leave-outs of a variant; nil keeps all reflections.
	keep func(unique int32) bool
}

func (s *Study) newReading(x *Compared) *reading {
	r := &reading{study: s, x: x, cat: s.intake.Catalogue, model: x.Model, lead: x.Fit, seed: s.seed(x.Result.Crystal, "reading")}
	if x.Leading == leadBracket {
		if legs := s.legs(x); legs != nil {
			if fit, err := size.MomentsCross(legs, nil, x.Model, s.sizeSettings()); err == nil && fit.Estimable {
				r.lead = fit
			}
		}
	}
	switch x.Leading {
	case leadCrystals:
		r.others = s.others(x.Contrast)
	case difference.AxisThird.String():
		if j := s.thirdOf(x.Contrast); j >= 0 {
			r.third = intensity.Merge(r.cat.Len(), s.scaled[x.Contrast.Crystal].Positions[j])
		}
	}
	return r
}

// pair brings two positions together as the contrast was.
func (r *reading) pair(ctx context.Context, thin, thick *intensity.Scaled, how difference.Matching) (*difference.Pairs, error) {
	set := r.study.pairSettings(r.x.Contrast)
	set.Matching = how
	if r.keep != nil {
		thin, thick = selected(thin, r.keep), selected(thick, r.keep)
	}
	return difference.Pair(ctx, thin, thick, r.cat, set)
}

// selected is s without the reflections that keep refuses.
func selected(s *intensity.Scaled, keep func(int32) bool) *intensity.Scaled {
	var rows []int
	for o, u := range s.Unique {
		if keep(u) {
			rows = append(rows, o)
		}
	}
	return scaledRows(s, rows)
}

func scaledRows(s *intensity.Scaled, rows []int) *intensity.Scaled {
	return &intensity.Scaled{Unique: take(s.Unique, rows), Raw: take(s.Raw, rows), I: take(s.I, rows), Var: take(s.Var, rows), Phi: take(s.Phi, rows)}
}

// strengths gives the legs of the estimate and one strength a pair for the curve.
func (r *reading) strengths(p *difference.Pairs) ([]*size.Input, []float64, error) {
	switch {
	case r.others != nil:
		st, err := p.Crystals(r.others)
		if err != nil {
			return nil, nil, err
		}
		return []*size.Input{input(p, st.Z)}, st.Z, nil
	case r.third != nil:
		st, err := p.Third(r.third)
		if err != nil {
			return nil, nil, err
		}
		return []*size.Input{input(p, st.Z)}, st.Z, nil
	case r.x.Leading == leadBracket:
		legs := r.study.halfLegs(p, r.x.Result.Crystal, difference.AxisHalfThin)
		if legs == nil {
			return nil, nil, fmt.Errorf("no reflection was measured at two equivalent indices")
		}
		return legs, p.InverseVariance(0).Z, nil
	}
	z := p.InverseVariance(0).Z
	if axis, err := difference.ParseAxis(r.x.Leading); err == nil && axis.Naive() {
		z = p.Naive(axis).Z
	}
	return []*size.Input{input(p, z)}, z, nil
}

// of works out two positions.
func (r *reading) of(ctx context.Context, thin, thick *intensity.Scaled, how difference.Matching) (evidence.Summary, error) {
	p, err := r.pair(ctx, thin, thick, how)
	if err != nil {
		return evidence.Summary{}, err
	}
	return r.ofPairs(ctx, p)
}

func (r *reading) ofPairs(ctx context.Context, p *difference.Pairs) (evidence.Summary, error) {
	out := evidence.Summary{P: math.NaN()}
	legs, z, err := r.strengths(p)
	if err != nil {
		return out, err
	}
	fit, err := size.MomentsCross(legs, nil, r.model, r.study.sizeSettings())
	if err != nil {
		return out, err
	}
	if !fit.Estimable {
		return out, fmt.Errorf("%s", fit.Why)
	}
	out.M = evidence.Estimate{Value: fit.M.Value, SE: fit.M.SE, Lo: fit.M.Lo, Hi: fit.M.Hi}
	out.Q = evidence.Estimate{Value: math.NaN(), SE: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1)}
	if fit.Model >= size.MQ {
		out.Q = evidence.Estimate{Value: fit.Q.Value, SE: fit.Q.SE, Lo: fit.Q.Lo, Hi: fit.Q.Hi}
	}
	if r.flips > 0 {
		if err := refit(ctx, p, z, r.others != nil); err != nil {
			return out, err
		}
		b, err := curve.ByStrength(ctx, z, p.Eps(), weights(p), &curve.Settings{S2: p.S2, Resample: resample.Settings{Replicates: r.flips, Workers: 1, Seed: r.seed.At("curve")}})
		if err != nil {
			return out, err
		}
		out.P = b.P
	}
	return out, nil
}

// thirdOf is the position whose thickness lies nearest the middle of the pair,
// -1 when there is none.
func (s *Study) thirdOf(c Contrast) int {
	if c.Across() {
		return -1
	}
	positions := s.Series.Crystals[c.Crystal].Positions
	middle := (positions[c.Thin].ThicknessNM + positions[c.Thick].ThicknessNM) / 2
	best, at := -1, math.Inf(1)
	for j := range positions {
		if j == c.Thin || j == c.Thick {
			continue
		}
		if d := math.Abs(positions[j].ThicknessNM - middle); d < at {
			best, at = j, d
		}
	}
	return best
}

// rescaled puts crystal i with other intensities (parallel to the rows of its
// Input; nil means those measured) or another scale model on one scale and gives
// its positions, indexed as in the Series. The noise model stays that of the
// study.
func (s *Study) rescaled(ctx context.Context, i int, intensities []float64, set *scaling.Settings, workers int) ([]*intensity.Scaled, error) {
	sc := s.scaled[i]
	in := sc.Input
	if intensities != nil {
		in.I = intensities
	}
	own := s.settings.Scaling
	if set != nil {
		own = *set
	}
	own.Workers = workers
	fit, err := scaling.Estimate(ctx, in, &own)
	if err != nil {
		return nil, err
	}
	variance := sc.Noise.Variance(in, fit)
	out := make([]*intensity.Scaled, len(sc.Order))
	for p, j := range sc.Order {
		a := &s.intake.Positions[i][j]
		out[j] = sc.position(p, a, &in, fit, variance)
	}
	return out, nil
}
