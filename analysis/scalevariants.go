package analysis

import (
	"context"

	"thinward/analysis/difference"
	"thinward/analysis/internal/parallel"
	"thinward/analysis/scaling"
	"thinward/analysis/size"
)

// ScaleVariant is one primary contrast with its crystal under another scale:
// another model with the anchor of the study, or another anchor with its model.
// Exchange, curb and offset are those of the leading model on the leading axis (on
// a bracket of the halves of the thin position, whose own deviations bias all
// variants alike). Values that
// are not estimable are NaN with a Why.
type ScaleVariant struct {
	Crystal, Model, Anchor string
	Leading                bool
	M, Q, O                Interval
	Floor, Middle, Top     Interval // contrast of the class, in eps
}

// ScaleVariants fits the scale of every crystal with a primary contrast anew
// under each model (phi and B; phi; B; constant) and each anchor (all, weak half,
// strong half, low and high resolution), one changed at a time, and reads the
// contrast again. The other crystals and the noise model stay.
func (s *Study) ScaleVariants(ctx context.Context) ([]ScaleVariant, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	list, err := s.primariesStep(ctx)
	if err != nil {
		return nil, err
	}
	type task struct {
		r       *reading
		set     scaling.Settings
		leading bool
	}
	var tasks []task
	for _, x := range list {
		r, lead := s.newReading(x), s.settings.Scaling
		tasks = append(tasks, task{r, lead, true})
		for _, m := range []scaling.Model{scaling.Full, scaling.PhiOnly, scaling.BOnly, scaling.Constant} {
			if set := lead; m != lead.Model {
				set.Model = m
				tasks = append(tasks, task{r, set, false})
			}
		}
		for _, a := range []scaling.Anchor{scaling.AnchorAll, scaling.AnchorWeak, scaling.AnchorStrong, scaling.AnchorLow, scaling.AnchorHigh} {
			if set := lead; a != lead.Anchor {
				set.Anchor = a
				tasks = append(tasks, task{r, set, false})
			}
		}
	}
	out := make([]ScaleVariant, len(tasks))
	err = parallel.For(ctx, len(tasks), s.settings.Workers, func(ctx context.Context, k int) error {
		t := &tasks[k]
		v := &out[k]
		*v = ScaleVariant{Crystal: t.r.x.Result.Crystal, Model: t.set.Model.String(), Anchor: t.set.Anchor.String(), Leading: t.leading}
		if err := t.r.variant(ctx, &t.set, v); err != nil {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			n := noneBecause(err.Error())
			v.M, v.Q, v.O, v.Floor, v.Middle, v.Top = n, n, n, n, n, n
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	return out, nil
}

// variant reads the contrast under another scale.
func (r *reading) variant(ctx context.Context, set *scaling.Settings, v *ScaleVariant) error {
	c := r.x.Contrast
	positions, err := r.study.rescaled(ctx, c.Crystal, nil, set, 1)
	if err != nil {
		return err
	}
	p, err := r.pair(ctx, positions[c.Thin], positions[c.Thick], difference.MatchAuto)
	if err != nil {
		return err
	}
	legs, z, err := r.strengths(p)
	if err != nil {
		return err
	}
	sizes := r.study.sizeSettings()
	fit, err := size.MomentsCross(legs, nil, r.model, sizes)
	if err != nil {
		return err
	}
	m := modelResult(fit)
	v.M, v.Q, v.O = m.M, m.Q, m.O
	v.Floor, v.Middle, v.Top = none(), none(), none()
	classes, err := size.Classes(input(p, z), nil, nil, sizes)
	if err != nil {
		n := noneBecause(err.Error())
		v.Floor, v.Middle, v.Top = n, n, n
		return nil
	}
	into := map[string]*Interval{"floor": &v.Floor, "middle": &v.Middle, "top": &v.Top}
	for _, k := range classes {
		*into[k.Name] = interval(k.Contrast.Value, k.Contrast.Lo, k.Contrast.Hi, k.Why)
	}
	return nil
}
