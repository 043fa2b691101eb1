package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
)

// Replicas drawn for the noise-only control, short and long; the short form
// thins them out for lists of more than manyObservations.
const (
	shortReplicas    = 100
	longReplicas     = 400
	manyObservations = 20000
	leastReplicas    = 20
)

// noiseControl draws both positions anew from one set of true intensities, so
// that nothing changes with thickness, and reads them like the measured ones. The
// intensities are draws from what the mean of the pair leaves open under Wilson's
// law; what both positions share by way of deviations is in that mean and
// stays; what they do not share is drawn at the fitted b_D; counting noise has
// the variance at the expected intensity. The long form also makes the
// observations pass through scaling.
func (s *Study) noiseControl(ctx context.Context, r *reading) ([]ControlResult, error) {
	const can = "bias of m and too many false alarms from counting noise, weights, merging, the axis and position-specific deviations of the fitted size"
	const cannot = "artefacts that the noise model does not hold: offset, bleed, damage, a wrong ratio of sigmas"
	x := r.x
	name := x.Result.Crystal
	draw, err := s.newNullDraw(x)
	if err != nil {
		return []ControlResult{unread(controlNoise, name, can, cannot, err.Error())}, nil
	}
	n := shortReplicas
	if rows := len(x.thin.I) + len(x.thick.I); rows > manyObservations {
		n = max(leastReplicas, n*manyObservations/rows)
	}
	if s.settings.Long {
		n = longReplicas
	}
	own := *r
	own.flips = 200
	pipeline := draw.pipeline(&own)
	null, err := evidence.Replicate(ctx, n, s.settings.Workers, draw.size(), 0, func(k int, dst []float64) { draw.fill(k, 0, dst) }, pipeline)
	if err != nil {
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		return []ControlResult{unread(controlNoise, name, can, cannot, err.Error())}, nil
	}
	out := []ControlResult{s.nullResult(name, null, r.alarm, draw.through(), can, cannot)}
	limit := null.Detectable(0.8)
	own.flips = 0
	with, err := evidence.Replicate(ctx, n, s.settings.Workers, draw.size(), limit, func(k int, dst []float64) { draw.fill(n+k, limit, dst) }, draw.pipeline(&own))
	switch {
	case ctx.Err() != nil:
		return nil, ctx.Err()
	case err == nil:
		out = append(out, detection(r, draw.through(), limit, with))
	}
	if s.settings.Long {
		scaled, err := s.noiseThroughScaling(ctx, r, draw)
		if err != nil {
			return nil, err
		}
		out = append(out, s.nullResult(name, scaled, r.alarm, "scaling and all that follows", can, cannot))
	}
	return out, nil
}

func (s *Study) nullResult(name string, null *evidence.Replicated, alarm float64, through, can, cannot string) ControlResult {
	x := ControlResult{Control: controlNoise, Crystal: name, M: interval(null.M.Mean, null.M.Lo, null.M.Hi, ""), Q: interval(null.Q.Mean, null.Q.Lo, null.Q.Hi, ""),
		P: math.NaN(), Rejections: null.CurveRejects, Misses: null.Missed, Draws: null.N, Through: through, Can: can, Cannot: cannot}
	x.Why = fmt.Sprintf("mean m of %d replicas %s ± %s; their interval misses 0 in %s", null.N, short(null.M.Mean), short(null.M.MeanSE), percent(null.Missed))
	if !math.IsNaN(null.CurveRejects) {
		x.Why += fmt.Sprintf(", the test of the curve rejects in %s", percent(null.CurveRejects))
	}
	x.Why += fmt.Sprintf(" (5 %% nominal, above %s fails)", percent(null.Allowed(alarm)))
	x.judge(null.Clean(alarm))
	return x
}

func detection(r *reading, through string, limit float64, with *evidence.Replicated) ControlResult {
	const can = "the smallest exchange that would have been seen in this crystal with 80 % power, by replicas with the noise and deviations of these data"
	const cannot = "what an artefact would add or hide"
	x := ControlResult{Control: controlDetection, Crystal: r.x.Result.Crystal, M: interval(with.M.Mean, with.M.Lo, with.M.Hi, ""), Q: none(), Expected: limit, P: math.NaN(), Rejections: with.Power(), Draws: with.N,
		Through: through, Can: can, Cannot: cannot}
	x.Why = fmt.Sprintf("m = %s is the limit; put into other replicas it is seen in %s and comes back as %s on the mean", short(limit), percent(with.Power()), short(with.M.Mean))
	// Other draws than those that gave the limit: the power varies by the binomial law with
	// these and with those.
	x.judge(math.Abs(with.Power()-0.8) <= r.deviate()*math.Sqrt(2*0.8*0.2/float64(with.N)))
	return x
}

func percent(share float64) string { return fmt.Sprintf("%.0f %%", 100*share) }

// nullDraw draws intensities of the observations of one contrast, thin first.
type nullDraw struct {
	study       *Study
	x           *Compared
	thin, thick *intensity.Scaled
	place       []int32 // index into the pairs of each reflection, -1 outside
	shrunk      *evidence.Shrunk
	spread      float64   // sd of the difference of ln deviation
	calm        []float64 // factor on the noise where pairs scatter less than their variances
	local       []float64
}

func (s *Study) newNullDraw(x *Compared) (*nullDraw, error) {
	p := x.Pairs
	d := &nullDraw{study: s, x: x, thin: x.thin, thick: x.thick, place: make([]int32, s.intake.Catalogue.Len()), spread: math.Max(p.ExtraD, 0), calm: make([]float64, p.Len()), local: s.localMeans(x)}
	for u := range d.place {
		d.place[u] = -1
	}
	j, v, local := make([]float64, p.Len()), make([]float64, p.Len()), make([]float64, p.Len())
	for i, u := range p.Unique {
		d.place[u] = int32(i)
		w1, w2 := 1/p.VarThin[i], 1/p.VarThick[i]
		j[i], v[i], local[i] = (w1*p.Thin[i]+w2*p.Thick[i])/(w1+w2), 1/(w1+w2), p.MeanPooled[i]
		d.calm[i] = math.Min(1, math.Sqrt(p.VarD[i]/(p.VarThin[i]+p.VarThick[i])))
	}
	var err error
	d.shrunk, err = evidence.NewShrunk(j, v, local, p.Centric)
	return d, err
}

// byPair reports whether replicas are drawn as pairs: the axis then takes nothing
// from the pair's own observations, and averages of normal noise are normal, so
// that drawing each observation would say the same at a tenth of the speed.
func (d *nullDraw) byPair() bool { return d.x.Leading != leadBracket }

func (d *nullDraw) through() string {
	if d.byPair() {
		return "pairs on: axis, model and curve"
	}
	return "scaled observations on: pairing, axis, model and curve"
}

func (d *nullDraw) size() int {
	if d.byPair() {
		return 2 * d.x.Pairs.Len()
	}
	return len(d.thin.I) + len(d.thick.I)
}

// fill draws replica k with an exchange m in the thick position. Observations of
// reflections outside the pairs keep what was measured.
func (d *nullDraw) fill(k int, m float64, dst []float64) {
	thin, thick := d.truths(k, m)
	r := d.study.seed(d.x.Result.Crystal, "noise-only", "counting").Stream(k)
	if d.byPair() {
		p := d.x.Pairs
		for i := range thin {
			dst[i] = thin[i] + float64(d.calm[i]*math.Sqrt(p.VarThin[i])*r.Normal())
			dst[len(thin)+i] = thick[i] + float64(d.calm[i]*math.Sqrt(p.VarThick[i])*r.Normal())
		}
		return
	}
	at := 0
	for side, s := range []*intensity.Scaled{d.thin, d.thick} {
		truth := [][]float64{thin, thick}[side]
		for o, u := range s.Unique {
			dst[at] = s.I[o]
			if i := d.place[u]; i >= 0 {
				dst[at] = truth[i]
				if !math.IsInf(s.Var[o], 1) {
					dst[at] += float64(d.calm[i] * math.Sqrt(s.Var[o]) * r.Normal())
				}
			}
			at++
		}
	}
}

// truths draws the true intensities of the pairs in both positions.
func (d *nullDraw) truths(k int, m float64) (thin, thick []float64) {
	r := d.study.seed(d.x.Result.Crystal, "noise-only", "truth").Stream(k)
	n := d.x.Pairs.Len()
	thin, thick = make([]float64, n), make([]float64, n)
	local, count := make([]float64, d.x.Pairs.Shells), make([]float64, d.x.Pairs.Shells)
	for i := range thin {
		j := d.shrunk.Draw(i, r)
		half := d.spread * r.Normal() / 2
		thin[i], thick[i] = j*math.Exp(half-d.spread*d.spread/8), j*math.Exp(-half-d.spread*d.spread/8)
		local[d.x.Pairs.Shell[i]] += j / d.x.Pairs.Epsilon[i]
		count[d.x.Pairs.Shell[i]]++
	}
	if m != 0 {
		for i, e := range d.x.Pairs.Epsilon {
			s := d.x.Pairs.Shell[i]
			thick[i] = float64((1-m)*thick[i]) + float64(m*e*local[s]/count[s])
		}
	}
	return thin, thick
}

func (d *nullDraw) pipeline(r *reading) evidence.Pipeline {
	if d.byPair() {
		return func(ctx context.Context, v []float64) (evidence.Summary, error) {
			p, err := withIntensities(d.x.Pairs, v)
			if err != nil {
				return evidence.Summary{}, err
			}
			return r.ofPairs(ctx, p)
		}
	}
	return func(ctx context.Context, v []float64) (evidence.Summary, error) {
		thin, thick := *d.thin, *d.thick
		thin.I, thick.I = v[:len(thin.I)], v[len(thin.I):]
		how := difference.MatchNever
		if r.x.Pairs.Matched {
			how = difference.MatchAuto
		}
		return r.of(ctx, &thin, &thick, how)
	}
}

// withIntensities is p with other intensities, thin first, and its local means
// taken anew.
func withIntensities(p *difference.Pairs, v []float64) (*difference.Pairs, error) {
	out := *p
	n := p.Len()
	out.Thin, out.Thick = v[:n], v[n:]
	out.MeanThin, out.MeanThick, out.MeanPooled = make([]float64, n), make([]float64, n), make([]float64, n)
	thin, thick, count := make([]float64, p.Shells), make([]float64, p.Shells), make([]float64, p.Shells)
	for i, k := range p.Shell {
		thin[k] += out.Thin[i] / p.Epsilon[i]
		thick[k] += out.Thick[i] / p.Epsilon[i]
		count[k]++
	}
	for i, k := range p.Shell {
		out.MeanThin[i], out.MeanThick[i] = p.Epsilon[i]*thin[k]/count[k], p.Epsilon[i]*thick[k]/count[k]
		out.MeanPooled[i] = (out.MeanThin[i] + out.MeanThick[i]) / 2
		if !(out.MeanThin[i] > 0 && out.MeanThick[i] > 0) {
			return nil, fmt.Errorf("shell %d has no positive mean", k)
		}
	}
	return &out, nil
}

// noiseThroughScaling draws the observations of all positions of the crystal,
// those outside the contrast with its thin intensities, and scales them again.
func (s *Study) noiseThroughScaling(ctx context.Context, r *reading, d *nullDraw) (*evidence.Replicated, error) {
	sc := s.scaled[r.x.Contrast.Crystal]
	variance := sc.Noise.Variance(sc.Input, sc.Fit)
	thickSlot := int32(sc.slot[r.x.Contrast.Thick])
	fill := func(k int, dst []float64) {
		thin, thick := d.truths(k, 0)
		rnd := s.seed(r.x.Result.Crystal, "noise-only", "scaling").Stream(k)
		for o, p := range sc.Input.Position {
			dst[o] = sc.Input.I[o]
			i := d.place[sc.Input.Unique[o]]
			if i < 0 {
				continue
			}
			truth := thin[i]
			if p == thickSlot {
				truth = thick[i]
			}
			dst[o] = sc.Fit.Scale[o]*truth + d.calm[i]*math.Sqrt(variance[o])*rnd.Normal()
		}
	}
	return evidence.Replicate(ctx, shortReplicas, s.settings.Workers, sc.Input.Len(), 0, fill, s.throughScaling(r))
}
