package analysis

import (
	"context"
	"math"

	"thinward/analysis/difference"
	"thinward/analysis/size"
)

func (s *Study) sizeSettings() *size.Settings { return &size.Settings{Level: s.settings.Level} }

// correlate asks first whether the positions differ at all.
func (s *Study) correlate(_ context.Context, x *Compared) error {
	r := &x.Result
	c, err := size.TrueCorrelation(x.Halves, nil, s.sizeSettings())
	if err != nil {
		why := err.Error()
		r.Correlation = Correlation{R: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1), Why: why}
		r.MomentRatio = MomentRatio{M: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1), Why: why}
		return nil
	}
	r.Correlation = Correlation{R: c.R.Value, Lo: c.R.Lo, Hi: c.R.Hi, Why: c.Why}
	r.MomentRatio = MomentRatio{M: c.MomentRatio.Value, Lo: c.MomentRatio.Lo, Hi: c.MomentRatio.Hi, Why: c.Why}
	return nil
}

// legs are the inputs that the leading axis estimates from: one, or on a
// bracket the two folds of the thin position's halves, each the axis of the
// other.
func (s *Study) legs(x *Compared) []*size.Input {
	if x.Leading != leadBracket {
		return []*size.Input{x.Input}
	}
	return s.bracketLegs(x, difference.AxisHalfThin)
}

// bracketLegs are the two folds of an axis from halves; nil when the position
// cannot be split.
func (s *Study) bracketLegs(x *Compared, axis difference.Axis) []*size.Input {
	return s.halfLegs(x.Pairs, x.Result.Crystal, axis)
}

func (s *Study) halfLegs(p *difference.Pairs, crystal string, axis difference.Axis) []*size.Input {
	h, err := p.Half(axis, s.seed(crystal, "halves").Stream(0).Uint64())
	if err != nil {
		return nil
	}
	var legs []*size.Input
	for k := range h.Folds {
		f := &h.Folds[k]
		in := &size.Input{Z: f.Z, Thin: over(f.Thin, p.Epsilon), Thick: over(f.Thick, p.Epsilon), Shell: p.Shell, Shells: p.Shells, S2: p.S2}
		in.VarThin, in.VarThick = over2(f.VarThin, p.Epsilon), over2(f.VarThick, p.Epsilon)
		legs = append(legs, in)
	}
	return legs
}

func over(v, by []float64) []float64 {
	out := make([]float64, len(v))
	for i := range v {
		out[i] = v[i] / by[i]
	}
	return out
}

func over2(v, by []float64) []float64 { return over(over(v, by), by) }

// sizes fits exchange, curb and offset and the classes.
func (s *Study) sizes(_ context.Context, x *Compared) error {
	r, set := &x.Result, s.sizeSettings()
	var unled error
	x.Model, _, unled = size.Leads(x.Input, nil)
	s.bracket(x)
	legs := s.legs(x)
	if legs == nil {
		s.noSizes(x, "no other crystal, and no reflection was measured at two equivalent indices, so no strength is independent of the difference")
		return s.classes(x)
	}
	if unled != nil {
		s.noSizes(x, unled.Error())
		return nil
	}
	instrument, err := size.ExchangeCross(legs, nil, set)
	if err != nil {
		s.noSizes(x, err.Error())
		return s.classes(x)
	}
	r.Models = append(r.Models, Model{Model: "instrument", M: interval(instrument.M, instrument.Lo, instrument.Hi, instrument.Why), Q: none(), O: none(), JP: math.NaN(), F: instrument.F})
	for _, model := range []size.Model{size.M, size.MQ, size.MQO} {
		fit, err := size.MomentsCross(legs, nil, model, set)
		if err != nil {
			r.Models = append(r.Models, Model{Model: model.String(), M: noneBecause(err.Error()), Q: none(), O: none(), JP: math.NaN(), F: math.NaN()})
			continue
		}
		r.Models = append(r.Models, modelResult(fit))
		if model == x.Model {
			x.Fit = fit
		}
	}
	if x.Leading == leadBracket {
		s.onlyBracket(x)
		return s.classes(x)
	}
	s.lead(x)
	s.giants(x)
	s.curbForms(x)
	return s.classes(x)
}

// onlyBracket says that no single m is known: the models above are those of the
// thin position's halves, biased by that position's own deviations.
func (s *Study) onlyBracket(x *Compared) {
	s.noSizes(x, "no other crystal says how strong each reflection is: m is known as a bracket only, and the models are those of half of the thin position, which that position's own deviations bias")
	x.Fit = nil
	r := &x.Result
	r.Exchange.Model, r.Exchange.Lo, r.Exchange.Hi = leadBracket, r.Bracket.Lo, r.Bracket.Hi
	if len(r.Models) > 0 {
		r.Exchange.F = r.Models[0].F
	}
}

func modelResult(f *size.Fit) Model {
	m := Model{Model: f.Model.String(), M: interval(f.M.Value, f.M.Lo, f.M.Hi, f.Why), Q: none(), O: none(), JP: f.JP, F: f.F}
	if f.Model >= size.MQ {
		m.Q = interval(f.Q.Value, f.Q.Lo, f.Q.Hi, f.Why)
	}
	if f.Model == size.MQO {
		m.O = interval(f.O.Value, f.O.Lo, f.O.Hi, f.Why)
	}
	return m
}

// lead writes the model that leads into the result.
func (s *Study) lead(x *Compared) {
	r, f := &x.Result, x.Fit
	if f == nil {
		s.noSizes(x, "the model "+x.Model.String()+" cannot be fitted")
		return
	}
	r.Exchange = Exchange{M: f.M.Value, Lo: f.M.Lo, Hi: f.M.Hi, SE: f.M.SE, Model: f.Model.String(), F: f.F, Why: f.Why}
	r.Curb, r.Offset = Curb{Q: math.NaN(), Why: "not part of the model"}, Offset{O: math.NaN(), Why: "not part of the model"}
	if f.Model >= size.MQ {
		r.Curb = Curb{Q: f.Q.Value, Lo: f.Q.Lo, Hi: f.Q.Hi, Why: f.Why}
	}
	if f.Model == size.MQO {
		r.Offset = Offset{O: f.O.Value, Lo: f.O.Lo, Hi: f.O.Hi, Why: f.Why}
	}
	r.OverIdent = OverIdent{J: f.J, DF: f.JDF, P: f.JP}
	r.MinimumM = size.MinimumVisible(f.M.SE, s.settings.Level, 0.8)
	if f.F < firmF {
		// The error of a weak axis is too short, and so is what it says would show.
		lo, hi, _ := widened(r)
		r.MinimumM = math.Max(r.MinimumM, size.MinimumVisible((hi-lo)/2/zOf(s.settings.Level), s.settings.Level, 0.8))
	}
}

func (s *Study) noSizes(x *Compared, why string) {
	r := &x.Result
	inf := math.Inf(1)
	r.Exchange = Exchange{M: math.NaN(), Lo: -inf, Hi: inf, SE: math.NaN(), Model: x.Model.String(), F: math.NaN(), Why: why}
	r.Curb = Curb{Q: math.NaN(), Lo: -inf, Hi: inf, Why: why}
	r.Offset = Offset{O: math.NaN(), Lo: -inf, Hi: inf, Why: why}
	r.OverIdent = OverIdent{J: math.NaN(), P: math.NaN()}
	r.MinimumM = inf
}

// bracket gives m from halves of either position, with one crystal the only
// honest answer and with several a check: by the leading model and by one slope. It is the
// hull of all four, since either pair alone misses the truth somewhere. One slope
// is moved off by a curb of 0.02 or an offset of 1 %, where deviations are few. The leading
// model takes those up, but of deviations of 30 % that positions do not share it makes
// a curb and reads m = 0.1 as 0.087 and 0.078, too low from either half. On a weak axis
// the intervals of one slope are those of Anderson and Rubin.
func (s *Study) bracket(x *Compared) {
	r, set := &x.Result, s.sizeSettings()
	r.Bracket = Bracket{Lo: math.Inf(-1), Hi: math.Inf(1), Thin: none(), Thick: none(), ThinSlope: none(), ThickSlope: none()}
	ends := []struct {
		axis        difference.Axis
		into, slope *Interval
	}{{difference.AxisHalfThin, &r.Bracket.Thin, &r.Bracket.ThinSlope}, {difference.AxisHalfThick, &r.Bracket.Thick, &r.Bracket.ThickSlope}}
	for _, e := range ends {
		legs := s.bracketLegs(x, e.axis)
		if legs == nil {
			*e.into = noneBecause("no reflection was measured at two equivalent indices")
			r.Bracket.Why = e.into.Why
			continue
		}
		fit, err := size.MomentsCross(legs, nil, x.Model, set)
		if err != nil {
			*e.into = noneBecause(err.Error())
			r.Bracket.Why = err.Error()
			continue
		}
		*e.into = interval(fit.M.Value, fit.M.Lo, fit.M.Hi, fit.Why)
		m, err := size.ExchangeCross(legs, nil, set)
		if err != nil {
			continue
		}
		*e.slope = interval(m.M, m.Lo, m.Hi, m.Why)
		if fit.F < firmF {
			e.into.Lo, e.into.Hi = math.Min(e.into.Lo, m.Lo), math.Max(e.into.Hi, m.Hi)
		}
	}
	if b := &r.Bracket; b.Why == "" {
		b.Lo = min(b.Thin.Lo, b.Thick.Lo, b.ThinSlope.Lo, b.ThickSlope.Lo)
		b.Hi = max(b.Thin.Hi, b.Thick.Hi, b.ThinSlope.Hi, b.ThickSlope.Hi)
	}
}

func (s *Study) giants(x *Compared) {
	variants, err := size.Giants(x.Input, nil, s.sizeSettings())
	if err != nil {
		x.warn("giants", "m without the strongest reflections: "+err.Error())
		return
	}
	for _, v := range variants {
		i := v.Instrument
		x.Result.Giants = append(x.Result.Giants, Giant{Above: v.Above, N: v.LeftOut, M: interval(i.M, i.Lo, i.Hi, i.Why)})
	}
}

// curbForms fits the curb in its forms side by side. The count rate is that of the
// mean scale of a reflection's observations in the thick position.
func (s *Study) curbForms(x *Compared) {
	in := *x.Input
	in.Exposure = s.exposure(x)
	cmp, err := size.CompareCurbs(&in, nil, max(x.Model, size.MQ), s.sizeSettings())
	if err != nil {
		x.warn("curb-forms", "the forms of the curb cannot be compared: "+err.Error())
		return
	}
	for _, rival := range cmp.Rivals {
		f := CurbForm{Form: rival.Form.String(), J: rival.J, Q: none(), Refused: rival.Refused}
		if rival.Fit != nil {
			f.Q = interval(rival.Fit.Q.Value, rival.Fit.Q.Lo, rival.Fit.Q.Hi, rival.Fit.Why)
		}
		switch {
		case rival.Refused:
			f.Why = "fits worse than the best form"
		case rival.Form == cmp.Best && cmp.Told:
			f.Why = "the data tell it from the others"
		default:
			f.Why = "the data cannot tell it from the best form"
		}
		x.Result.CurbForms = append(x.Result.CurbForms, f)
	}
}

// exposure gives, pair by pair, the mean scale at which the thick position recorded
// the reflection, epsilon included; nil between crystals.
func (s *Study) exposure(x *Compared) []float64 {
	if x.Contrast.Across() {
		return nil
	}
	sc := s.scaled[x.Contrast.Crystal]
	first := sc.first[sc.slot[x.Contrast.Thick]]
	sum, n := make([]float64, s.intake.Catalogue.Len()), make([]float64, s.intake.Catalogue.Len())
	for o, u := range x.thick.Unique {
		sum[u] += sc.Fit.Scale[first+o]
		n[u]++
	}
	out := make([]float64, x.Pairs.Len())
	for i, u := range x.Pairs.Unique {
		out[i] = x.Pairs.Epsilon[i] * sum[u] / n[u]
	}
	return out
}

func (s *Study) classes(x *Compared) error {
	list, err := size.Classes(x.Input, nil, nil, s.sizeSettings())
	if err != nil {
		x.warn("classes", "the classes of strength cannot be compared: "+err.Error())
		nan := Class{Strength: math.NaN(), Eps: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1), M: math.NaN(), MLo: math.Inf(-1), MHi: math.Inf(1), Why: err.Error()}
		x.Result.Classes = Classes{nan, nan, nan}
		return nil
	}
	into := map[string]*Class{"floor": &x.Result.Classes.Floor, "middle": &x.Result.Classes.Middle, "top": &x.Result.Classes.Top}
	for _, c := range list {
		*into[c.Name] = Class{
			N: c.N, Strength: c.Strength.Value, Eps: c.Contrast.Value, Lo: c.Contrast.Lo, Hi: c.Contrast.Hi,
			M: c.M.Value, MLo: c.M.Lo, MHi: c.M.Hi, Why: c.Why,
		}
	}
	return nil
}

func interval(v, lo, hi float64, why string) Interval { return Interval{v, lo, hi, why} }

func none() Interval { return Interval{Value: math.NaN(), Lo: math.Inf(-1), Hi: math.Inf(1)} }

func noneBecause(why string) Interval {
	i := none()
	i.Why = why
	return i
}
