package analysis

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/size"
)

// swapGroups is the number of groups of reflections that are left out in turn.
const swapGroups = 20

// swappedControl exchanges the two positions as wholes.
func (s *Study) swappedControl(ctx context.Context, r *reading) ([]ControlResult, error) {
	const can = "whether the estimate treats both sides alike: m of the swapped pair must be −m/(1 − m)"
	const cannot = "where a difference comes from: an artefact swaps sign as well"
	p, err := r.pair(ctx, r.x.thick, r.x.thin, difference.MatchAuto)
	var v evidence.Summary
	if err == nil {
		v, err = r.ofPairs(ctx, p)
	}
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		return []ControlResult{unread(controlSwapped, r.x.Result.Crystal, can, cannot, err.Error())}, nil
	}
	m := r.lead.M
	x := ControlResult{Control: controlSwapped, Crystal: r.x.Result.Crystal, M: intervalOf(v.M), Q: intervalOf(v.Q), Expected: -m.Value / (1 - m.Value), P: math.NaN(), Rejections: math.NaN(),
		Draws: 1, Through: "pairing on", Can: can, Cannot: cannot}
	se, err := r.swapError(ctx, p)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		return []ControlResult{unread(controlSwapped, r.x.Result.Crystal, can, cannot, err.Error())}, nil
	}
	if r.lead.F >= firmF {
		se = math.Min(se, m.SE/((1-m.Value)*(1-m.Value))+v.M.SE)
	}
	off := math.Abs(v.M.Value - x.Expected)
	allowed := distuv.StudentsT{Sigma: 1, Nu: swapGroups - 1}.Quantile(1-r.alarm/2)*se + swappedOrder(m.Value, r.lead.Q.Value)
	x.judge(off <= allowed)
	x.Why = fmt.Sprintf("whole positions were exchanged, thin for thick; m is %s off what is expected, and %s is allowed", short(off), short(allowed))
	if q := r.lead.Q.Value; math.Abs(q) >= turnsOver {
		x.Why += fmt.Sprintf("; a curb of q = %s turns the strongest reflections over, so that no curb describes the swapped pair: neither m is one to trust", short(q))
	}
	return []ControlResult{x}, nil
}

// turnsOver is the curb q at which y exp(-q y) has its maximum at a strength y of 6, the
// highest that the axis tells apart (it is clipped there): with a larger q the strongest
// reflections of a pair do not rise with strength, and the law has no inverse.
const turnsOver = 1. / 6

// swappedOrder is by how much m of the swapped pair differs from -m/(1-m) when curb and exchange
// are both there. The curb comes first; swapped, it would be taken off the intensities
// x = (y - m)/(1-m) from before the exchange, q x^2, but the model takes it off y: the
// term -2 m q y/(1-m)^2 is left, an exchange of that size in shells of the mean of the lowest
// third. The inverse of y exp(-q y) is y exp(q y) to first order only, which leaves a term of
// order q^2. Nothing is allowed for a curb without an inverse, where these orders mean nothing.
func swappedOrder(m, q float64) float64 {
	if math.IsNaN(q) || math.Abs(q) >= turnsOver {
		return 0
	}
	return (2*math.Abs(m*q) + q*q) / ((1 - m) * (1 - m))
}

// swapError is the standard error of m of the swapped pair less -m/(1-m). The two fits
// share their reflections, so it is found by leaving out a twentieth of them in turn from both
// (the jackknife by groups: Tukey 1958, Ann. Math. Stat. 29:614). Where it exceeds the errors that
// both fits claim, added up, it speaks against these claims and for no agreement: those
// are the ones taken then, unless the axis is weak and its errors known to be too short.
func (r *reading) swapError(ctx context.Context, swapped *difference.Pairs) (float64, error) {
	forth, _, err := r.strengths(r.x.Pairs)
	if err != nil {
		return 0, err
	}
	back, _, err := r.strengths(swapped)
	if err != nil {
		return 0, err
	}
	fit := func(legs []*size.Input, p *difference.Pairs, group int) (float64, error) {
		w := make([]float64, p.Len())
		for i, u := range p.Unique {
			if int(u)%swapGroups != group {
				w[i] = 1
			}
		}
		f, err := size.MomentsCross(legs, w, r.model, r.study.sizeSettings())
		if err == nil && !f.Estimable {
			err = fmt.Errorf("%s", f.Why)
		}
		if err != nil {
			return 0, err
		}
		return f.M.Value, nil
	}
	var list []float64
	for g := range swapGroups {
		if ctx.Err() != nil {
			return 0, ctx.Err()
		}
		a, err := fit(forth, r.x.Pairs, g)
		if err != nil {
			return 0, err
		}
		b, err := fit(back, swapped, g)
		if err != nil {
			return 0, err
		}
		list = append(list, b+a/(1-a))
	}
	mean, sum := 0.0, 0.0
	for _, v := range list {
		mean += v / swapGroups
	}
	for _, v := range list {
		sum += (v - mean) * (v - mean)
	}
	return math.Sqrt(sum * (swapGroups - 1) / swapGroups), nil
}
