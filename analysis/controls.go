package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
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
	alarm := s.falseAlarm(list)
	for i, x := range list {
		readings[i] = s.newReading(x)
		r := readings[i]
		r.alarm = alarm
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

// familyError is the chance that any of the controls of a sound series fails. All their
// readings share it evenly (Bonferroni 1936), whatever they have in common.
const familyError = 0.05

// falseAlarm is the chance left to a single reading. A crystal has m and the test of
// the curve of two halves and of each replicate, the swapped m, mean, intervals and test
// of the noise-only replicas, the injected exchange, the injected curb with its q and m,
// and the power at the detection limit.
func (s *Study) falseAlarm(list []*Compared) float64 {
	n := 0
	for _, x := range list {
		n += 2*2 + 1 + 3 + 1 + 2 + 1
		for _, p := range s.Series.Crystals[x.Contrast.Crystal].Positions {
			if p.ReplicateOf != "" {
				n += 2
			}
		}
	}
	return familyError / float64(max(n, 1))
}

// nullPassed says whether an estimate that should be 0, and the p of the curve, are within
// what the chance of a false alarm allows.
func (r *reading) nullPassed(e evidence.Estimate, p float64) bool {
	return math.Abs(e.Value) <= r.deviate()*e.SE && !(p < r.alarm)
}

// threshold says when nullPassed fails.
func (r *reading) threshold() string {
	return fmt.Sprintf("fails at p below %.2g or m beyond %.1f standard errors", r.alarm, r.deviate())
}

// deviate is the normal deviate beyond which, on either side, a reading fails.
func (r *reading) deviate() float64 { return zOf(1 - r.alarm) }

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
		half.flips = r.flipsForControls()
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
			Through: "merging on", Can: can, Cannot: cannot, Why: "counting noise only; equivalents of position " + name + " in two halves by index; " + r.threshold()}
		x.judge(r.nullPassed(v.M, v.P))
		out = append(out, x)
	}
	return out, nil
}

// flipsForControls are enough that a p below the chance of a false alarm can come out.
func (r *reading) flipsForControls() int {
	n := r.study.settings.Flips
	if !r.study.settings.Long {
		n = min(n, 500)
	}
	return max(n, int(math.Ceil(2/r.alarm)))
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
		full.flips = r.flipsForControls()
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
			Through: "pairing on, both places on the crystal's one scale", Can: can, Cannot: cannot, Why: names + "; " + r.threshold()}
		x.judge(r.nullPassed(v.M, v.P))
		out = append(out, x)
	}
	return out, nil
}

// seriesControls are those that need all crystals.
func (s *Study) seriesControls(list []*reading, per []ControlResult) []ControlResult {
	const can = "whether the crystals agree in sign beyond chance, with nothing assumed of errors: whole positions of each crystal are swapped in every combination (2 to the power of the number of crystals)"
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
			Why: fmt.Sprintf("no verdict is possible: all %d ways to swap %d crystals; p = %s is the share with a pooled |m| as large as measured, and %s the smallest there can be", w.Ways, len(m), short(w.P), short(w.Smallest))})
	}
	for _, c := range per {
		if c.Control == controlReplicate {
			return out
		}
	}
	return append(out, unread(controlReplicate, "", "everything that two places of equal thickness differ by; the only full null", "",
		"not measured: differences between places of equal thickness are not known"))
}
