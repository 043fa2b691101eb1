package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/parallel"
	"thinward/analysis/size"
)

// Names of the controls.
const (
	controlHalves    = "halves of one position"
	controlReplicate = "replicate positions"
	controlSwapped   = "swapped positions"
	controlNoise     = "noise-only replicas"
	controlExchange  = "injected exchange"
	controlCurb      = "injected curb"
	controlDetection = "detection limit"
)

// Effects that are injected to see whether they come back.
const (
	injectedM = 0.05
	injectedQ = 0.02
)

// curbLoss is the share of an injected curb that may be lost: the model is of
// first order in q, and of a curb exp(-q J) with intensities up to ten times the
// unit it reads about three quarters (measured on the demonstration); what is lost
// may show in m.
const curbLoss = 0.35

// Controls runs the pipeline on data where the answer is known, for the primary
// contrast of each crystal: halves of one position, replicate positions,
// swapped positions, noise-only replicas, an injected exchange and curb, and the
// detection limit. Each says what it can and cannot see.
func (s *Study) Controls(ctx context.Context) ([]ControlResult, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.controls != nil {
		return s.controls, nil
	}
	list, err := s.primariesStep(ctx)
	if err != nil {
		return nil, err
	}
	per := make([][]ControlResult, len(list))
	readings := make([]*reading, len(list))
	for i, x := range list {
		readings[i] = s.newReading(x)
		r := readings[i]
		for _, control := range []func(context.Context, *reading) ([]ControlResult, error){
			s.halvesControl, s.replicateControl, s.swappedControl, s.noiseControl,
		} {
			if r.lead == nil || !r.lead.Estimable {
				break
			}
			c, err := control(ctx, r)
			if err != nil {
				return nil, err
			}
			per[i] = append(per[i], c...)
		}
		s.progress("controls", i+1, 2*len(list))
	}
	injected, err := s.injections(ctx, readings)
	if err != nil {
		return nil, err
	}
	out := []ControlResult{}
	for i := range list {
		out = append(out, per[i]...)
		out = append(out, injected[i]...)
	}
	out = append(out, s.seriesControls(readings, out)...)
	s.progress("controls", 2*len(list), 2*len(list))
	s.controls = out
	return out, nil
}

// primariesStep compares the primary contrasts within crystals.
func (s *Study) primariesStep(ctx context.Context) ([]*Compared, error) {
	var out []*Compared
	for _, c := range s.primaryContrasts() {
		x, err := s.compareStep(ctx, c)
		if err != nil {
			return nil, fmt.Errorf("%s: %w", s.Name(c), err)
		}
		out = append(out, x)
	}
	return out, nil
}

// readings of a control that could not be made.
func unread(name, crystal, can, cannot, why string) ControlResult {
	return ControlResult{Control: name, Crystal: crystal, M: none(), Q: none(), Expected: math.NaN(), P: math.NaN(), Rejections: math.NaN(),
		Verdict: VerdictUnknown, Can: can, Cannot: cannot, Why: why}
}

func (c *ControlResult) judge(passed bool) {
	c.Passed, c.Verdict = passed, VerdictFails
	if passed {
		c.Verdict = VerdictFine
	}
}

func intervalOf(e evidence.Estimate) Interval { return interval(e.Value, e.Lo, e.Hi, "") }

// falseAlarm is the two-sided chance at which a single null control that reads
// an effect is called failed. Three crystals have six halves, each with m and the p
// of the curve: at one in a hundred one report in nine would hold a failure by chance.
const falseAlarm = 0.002

// nullPassed says whether an estimate that should be 0 is within the range that
// its error allows at the level of falseAlarm.
func nullPassed(e evidence.Estimate) bool {
	return math.Abs(e.Value) <= zOf(1-falseAlarm)*e.SE
}

func (s *Study) halvesControl(ctx context.Context, r *reading) ([]ControlResult, error) {
	const can = "errors of counting and merging; a wrong variance or a biased weight would show"
	const cannot = "geometry, background, offset, deviations, scale, dose: both halves share them"
	var out []ControlResult
	c := r.x.Contrast
	for _, j := range []int{c.Thin, c.Thick} {
		name := s.Series.Crystals[c.Crystal].Positions[j].Name
		whole, other := r.x.thin, r.x.thick
		if j == c.Thick {
			whole, other = other, whole
		}
		half := *r
		half.flips = s.flipsForControls()
		if half.others == nil {
			half.third = intensity.Merge(r.cat.Len(), other)
		}
		a, b := splitScaled(whole, s.seed(r.x.Result.Crystal, "control halves", name).Stream(0).Uint64())
		v, err := half.of(ctx, a, b, difference.MatchNever)
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		if err != nil {
			out = append(out, unread(controlHalves, r.x.Result.Crystal, can, cannot, name+": "+err.Error()))
			continue
		}
		x := ControlResult{Control: controlHalves, Crystal: r.x.Result.Crystal, M: intervalOf(v.M), Q: intervalOf(v.Q), P: v.P, Rejections: math.NaN(), Draws: 1,
			Through: "merging on", Can: can, Cannot: cannot, Why: "counting noise only; equivalents of position " + name + " in two halves by index"}
		x.judge(nullPassed(v.M) && !(v.P < falseAlarm))
		out = append(out, x)
	}
	return out, nil
}

func (s *Study) flipsForControls() int {
	if s.settings.Long {
		return s.settings.Flips
	}
	return min(s.settings.Flips, 500)
}

func splitScaled(s *intensity.Scaled, key uint64) (a, b *intensity.Scaled) {
	var rows [2][]int
	for o, h := range intensity.Halves(s, key) {
		rows[h] = append(rows[h], o)
	}
	return scaledRows(s, rows[0]), scaledRows(s, rows[1])
}

func (s *Study) replicateControl(ctx context.Context, r *reading) ([]ControlResult, error) {
	const can = "everything that two places of equal thickness differ by: counting, geometry, background, scale, deviations, bending, time and dose; the only full null"
	const cannot = "what goes with thickness and is not thickness (dose when the order of measurement goes with it)"
	c := &s.Series.Crystals[r.x.Contrast.Crystal]
	var out []ControlResult
	for j := range c.Positions {
		first := c.find(c.Positions[j].ReplicateOf)
		if c.Positions[j].ReplicateOf == "" || first < 0 {
			continue
		}
		positions := s.scaled[r.x.Contrast.Crystal].Positions
		full := *r
		full.flips = s.flipsForControls()
		v, err := full.of(ctx, positions[first], positions[j], difference.MatchAuto)
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		names := c.Positions[first].Name + " against " + c.Positions[j].Name
		if err != nil {
			out = append(out, unread(controlReplicate, c.Name, can, cannot, names+": "+err.Error()))
			continue
		}
		x := ControlResult{Control: controlReplicate, Crystal: c.Name, M: intervalOf(v.M), Q: intervalOf(v.Q), P: v.P, Rejections: math.NaN(), Draws: 1,
			Through: "pairing on, both places on the crystal's one scale", Can: can, Cannot: cannot, Why: names}
		x.judge(nullPassed(v.M) && !(v.P < falseAlarm))
		out = append(out, x)
	}
	return out, nil
}

// swappedControl exchanges the two positions as wholes.
func (s *Study) swappedControl(ctx context.Context, r *reading) ([]ControlResult, error) {
	const can = "whether the estimate treats both sides alike: m of the swapped pair must be -m/(1-m)"
	const cannot = "where a difference comes from: an artefact swaps sign as well"
	m := r.lead.M
	v, err := r.of(ctx, r.x.thick, r.x.thin, difference.MatchAuto)
	if ctx.Err() != nil {
		return nil, ctx.Err()
	}
	if err != nil {
		return []ControlResult{unread(controlSwapped, r.x.Result.Crystal, can, cannot, err.Error())}, nil
	}
	x := ControlResult{Control: controlSwapped, Crystal: r.x.Result.Crystal, M: intervalOf(v.M), Q: intervalOf(v.Q), Expected: -m.Value / (1 - m.Value), P: math.NaN(), Rejections: math.NaN(),
		Draws: 1, Through: "pairing on", Can: can, Cannot: cannot, Why: "whole positions were exchanged, thin for thick"}
	// With a curb in the model the swapped fit squares the other side's
	// intensities, so the two agree within their error and not exactly.
	x.judge(math.Abs(v.M.Value-x.Expected) <= math.Max(v.M.SE, m.SE))
	return []ControlResult{x}, nil
}

// seriesControls are those that need all crystals.
func (s *Study) seriesControls(list []*reading, per []ControlResult) []ControlResult {
	const can = "whether the crystals agree in sign beyond chance, with nothing assumed of errors: whole positions of each crystal are swapped in all 2^k ways"
	const cannot = "anything that all crystals have in common; with few crystals the smallest p is large"
	var out []ControlResult
	var m, back, se []float64
	for _, r := range list {
		for _, c := range per {
			if c.Control == controlSwapped && c.Crystal == r.x.Result.Crystal && !math.IsNaN(c.M.Value) {
				m, back, se = append(m, r.lead.M.Value), append(back, c.M.Value), append(se, r.lead.M.SE)
			}
		}
	}
	if w, err := evidence.Swap(m, back, se); err == nil {
		out = append(out, ControlResult{Control: controlSwapped, M: interval(w.Pooled, math.Inf(-1), math.Inf(1), "no interval: a permutation"), Q: none(), Expected: math.NaN(), P: w.P, Rejections: math.NaN(),
			Draws: w.Ways, Through: "fits of the crystals", Passed: true, Verdict: VerdictFine, Can: can, Cannot: cannot,
			Why: fmt.Sprintf("all %d ways to swap %d crystals; p = %s is the share with a pooled |m| as large as measured, and %s the smallest there can be", w.Ways, len(m), short(w.P), short(w.Smallest))})
	}
	for _, c := range per {
		if c.Control == controlReplicate {
			return out
		}
	}
	return append(out, unread(controlReplicate, "", "everything that two places of equal thickness differ by; the only full null", "",
		"not measured: differences between places of equal thickness are not known"))
}

// injections adds a known exchange, and a known curb, to the thick position of
// each crystal and pushes the observations through scaling and all that follows.
func (s *Study) injections(ctx context.Context, readings []*reading) ([][]ControlResult, error) {
	kinds := []struct {
		name string
		m, q float64
	}{{controlExchange, injectedM, 0}, {controlCurb, 0, injectedQ}}
	out := make([][]ControlResult, len(readings))
	for i := range out {
		out[i] = make([]ControlResult, len(kinds))
	}
	err := parallel.For(ctx, len(readings)*len(kinds), s.settings.Workers, func(ctx context.Context, k int) error {
		r, kind := readings[k/len(kinds)], kinds[k%len(kinds)]
		var err error
		out[k/len(kinds)][k%len(kinds)], err = s.inject(ctx, r, kind.name, kind.m, kind.q)
		return err
	})
	return out, err
}

func (s *Study) inject(ctx context.Context, r *reading, name string, m, q float64) (ControlResult, error) {
	const can = "whether scaling, merging, pairing or the model swallow or invent a part of an effect of this size"
	const cannot = "effects of another shape; artefacts that look like it"
	x := r.x
	if r.lead == nil || !r.lead.Estimable {
		return unread(name, x.Result.Crystal, can, cannot, "m is not estimable"), nil
	}
	sc := s.scaled[x.Contrast.Crystal]
	before := evidence.Summary{P: math.NaN(), M: evidence.Estimate(r.lead.M), Q: evidence.Estimate(r.lead.Q)}
	rec, err := evidence.Recover(ctx, before, s.injection(r, m, q), sc.Input.I, s.throughScaling(r))
	if ctx.Err() != nil {
		return ControlResult{}, ctx.Err()
	}
	if err != nil {
		return unread(name, x.Result.Crystal, can, cannot, err.Error()), nil
	}
	out := ControlResult{Control: name, Crystal: x.Result.Crystal, M: intervalOf(rec.M), Q: intervalOf(rec.Q), Expected: m, P: math.NaN(), Rejections: math.NaN(), Draws: 1,
		Through: "scaling and all that follows", Can: can, Cannot: cannot}
	switch {
	case q == 0:
		out.Why = fmt.Sprintf("m = %s was added to the thick position; %s came back beyond what was there", short(m), short(rec.M.Value))
		out.judge(evidence.Found(rec.M, m))
	case r.lead.Model < size.MQ:
		return unread(name, x.Result.Crystal, can, cannot, "the model has no curb"), nil
	default:
		out.ExpectedQ = q
		out.Why = fmt.Sprintf("q = %s was added to the thick position; %s came back beyond what was there, and m moved by %s", short(q), short(rec.Q.Value), short(rec.M.Value))
		out.judge(math.Abs(rec.Q.Value-q) <= math.Max(curbLoss*q, 0.25*rec.Q.SE) && math.Abs(rec.M.Value) <= math.Max(curbLoss*q, 0.5*rec.M.SE))
	}
	return out, nil
}

// throughScaling is the pipeline from intensities of one crystal's observations.
func (s *Study) throughScaling(r *reading) evidence.Pipeline {
	c := r.x.Contrast
	return func(ctx context.Context, intensities []float64) (evidence.Summary, error) {
		positions, err := s.rescaled(ctx, c.Crystal, intensities, nil, 1)
		if err != nil {
			return evidence.Summary{}, err
		}
		return r.of(ctx, positions[c.Thin], positions[c.Thick], difference.MatchAuto)
	}
}

// injection prepares an effect in the thick position, parallel to the rows of
// the crystal's scaling input.
func (s *Study) injection(r *reading, m, q float64) *evidence.Injection {
	x := r.x
	sc := s.scaled[x.Contrast.Crystal]
	n := sc.Input.Len()
	out := &evidence.Injection{M: m, Q: q, Thick: make([]bool, n), Local: make([]float64, n), Expected: make([]float64, n), Unit: make([]float64, n)}
	local := s.localMeans(x)
	slot := int32(sc.slot[x.Contrast.Thick])
	for o, p := range sc.Input.Position {
		u := sc.Input.Unique[o]
		out.Thick[o] = p == slot
		g := sc.Fit.Scale[o]
		e := float64(s.intake.Catalogue.Epsilon[u])
		out.Local[o] = g * local[u]
		out.Expected[o] = g * sc.Fit.J[u]
		out.Unit[o] = g * e * r.lead.Reference
	}
	return out
}

// localMeans gives, for every reflection of the catalogue, the mean intensity of
// the thick position in the shell of the pairs that it falls into, times its
// epsilon.
func (s *Study) localMeans(x *Compared) []float64 {
	cat := s.intake.Catalogue
	p := x.Pairs
	mean, top := make([]float64, p.Shells), make([]float64, p.Shells)
	for i, k := range p.Shell {
		mean[k] = p.MeanThick[i] / p.Epsilon[i]
		top[k] = math.Max(top[k], p.S2[i])
	}
	out := make([]float64, cat.Len())
	for u, s2 := range cat.S2 {
		k := 0
		for k < len(top)-1 && s2 > top[k] {
			k++
		}
		out[u] = mean[k] * float64(cat.Epsilon[u])
	}
	return out
}
