package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/difference"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/parallel"
	"thinward/analysis/scaling"
	"thinward/analysis/size"
)

// Specification repeats m and q of every primary contrast under other choices,
// one at a time from the leading ones: strength axis, model, scale, anchor of the
// scale, strongest reflections, what is left out, Friedel mates. Scales of the
// crystal are fitted again where the choice concerns them; the other crystals,
// and the noise model, stay. A choice that cannot be made has no interval and
// says why.
func (s *Study) Specification(ctx context.Context) ([]Specification, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.spec != nil {
		return s.spec, nil
	}
	list, err := s.primariesStep(ctx)
	if err != nil {
		return nil, err
	}
	apart, err := s.otherFriedel()
	if err != nil {
		return nil, err
	}
	var tasks []variant
	for _, x := range list {
		if r := s.newReading(x); r.lead != nil {
			tasks = append(tasks, s.variants(r, apart)...)
		}
	}
	out := make([]Specification, len(tasks))
	err = parallel.For(ctx, len(tasks), s.settings.Workers, func(ctx context.Context, k int) error {
		t := &tasks[k]
		out[k] = Specification{Crystal: t.crystal, Choice: t.choice, Level: t.level, M: none(), Q: none(), Leading: t.leading}
		fit, err := t.fit(ctx)
		switch {
		case ctx.Err() != nil:
			return ctx.Err()
		case err != nil:
			out[k].M, out[k].Q = noneBecause(err.Error()), noneBecause(err.Error())
		case !fit.Estimable:
			out[k].M, out[k].Q = noneBecause(fit.Why), noneBecause(fit.Why)
		default:
			out[k].M = interval(fit.M.Value, fit.M.Lo, fit.M.Hi, fit.Why)
			if fit.Model >= size.MQ {
				out[k].Q = interval(fit.Q.Value, fit.Q.Lo, fit.Q.Hi, fit.Why)
			}
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	s.spec = out
	return out, nil
}

// variant is one row of the table.
type variant struct {
	crystal, choice, level string
	leading                bool
	fit                    func(context.Context) (*size.Fit, error)
}

// Names of the choices.
const (
	choiceLeading = "leading"
	choiceAxis    = "axis"
	choiceModel   = "model"
	choiceScale   = "scale"
	choiceAnchor  = "anchor"
	choiceGiants  = "strongest left out"
	choiceLeave   = "left out"
	choiceFriedel = "Friedel mates"
)

func (s *Study) variants(r *reading, other *friedel) []variant {
	x := r.x
	name := x.Result.Crystal
	var out []variant
	add := func(choice, level string, fit func(context.Context) (*size.Fit, error)) {
		out = append(out, variant{crystal: name, choice: choice, level: level, fit: fit})
	}
	out = append(out, variant{crystal: name, choice: choiceLeading, level: fmt.Sprintf("axis %s, model %s, scale %s, anchor %s", x.Leading, x.Model, s.settings.Scaling.Model, s.settings.Scaling.Anchor),
		leading: true, fit: func(context.Context) (*size.Fit, error) { return r.lead, nil }})
	s.axisVariants(x, add)
	for _, m := range []size.Model{size.M, size.MQ, size.MQO} {
		if m != x.Model {
			add(choiceModel, m.String(), func(context.Context) (*size.Fit, error) {
				return size.MomentsCross(s.legs(x), nil, m, s.sizeSettings())
			})
		}
	}
	s.scaleVariants(r, add)
	for _, above := range []float64{10, 6, 4} {
		add(choiceGiants, fmt.Sprintf("above %g local means", above), func(context.Context) (*size.Fit, error) {
			return r.withoutGiants(s.legs(x), above)
		})
	}
	s.leaveVariants(r, add)
	if other != nil {
		add(choiceFriedel, other.level, func(ctx context.Context) (*size.Fit, error) { return other.fit(ctx, r) })
	}
	return out
}

type addVariant func(choice, level string, fit func(context.Context) (*size.Fit, error))

func (s *Study) axisVariants(x *Compared, add addVariant) {
	one := func(st *difference.Strengths) func(context.Context) (*size.Fit, error) {
		return func(context.Context) (*size.Fit, error) {
			return size.MomentsCross([]*size.Input{input(x.Pairs, st.Z)}, nil, x.Model, s.sizeSettings())
		}
	}
	for _, axis := range []difference.Axis{difference.AxisHalfThin, difference.AxisHalfThick} {
		if x.Leading == leadBracket && axis == difference.AxisHalfThin {
			continue
		}
		add(choiceAxis, axis.String(), func(context.Context) (*size.Fit, error) {
			legs := s.bracketLegs(x, axis)
			if legs == nil {
				return nil, fmt.Errorf("no reflection was measured at two equivalent indices")
			}
			return size.MomentsCross(legs, nil, x.Model, s.sizeSettings())
		})
	}
	if third := s.third(x); third != nil && x.Leading != difference.AxisThird.String() {
		add(choiceAxis, difference.AxisThird.String(), one(third))
	}
	if x.Leading != difference.AxisInverseVariance.String() {
		add(choiceAxis, difference.AxisInverseVariance.String(), one(x.Pairs.InverseVariance(0)))
	}
	for _, axis := range []difference.Axis{difference.AxisThin, difference.AxisThick, difference.AxisMean} {
		if x.Leading != axis.String() {
			add(choiceAxis, axis.String()+" (naive)", one(x.Pairs.Naive(axis)))
		}
	}
}

func (s *Study) scaleVariants(r *reading, add addVariant) {
	c := r.x.Contrast
	again := func(set scaling.Settings) func(context.Context) (*size.Fit, error) {
		return func(ctx context.Context) (*size.Fit, error) {
			positions, err := s.rescaled(ctx, c.Crystal, nil, &set, 1)
			if err != nil {
				return nil, err
			}
			return r.fit(ctx, positions[c.Thin], positions[c.Thick])
		}
	}
	lead := s.settings.Scaling
	for _, m := range []scaling.Model{scaling.Full, scaling.PhiOnly, scaling.BOnly, scaling.Constant} {
		if m != lead.Model {
			set := lead
			set.Model = m
			add(choiceScale, m.String(), again(set))
		}
	}
	for _, a := range []scaling.Anchor{scaling.AnchorAll, scaling.AnchorWeak, scaling.AnchorStrong, scaling.AnchorLow, scaling.AnchorHigh} {
		if a != lead.Anchor {
			set := lead
			set.Anchor = a
			add(choiceAnchor, a.String(), again(set))
		}
	}
}

// nearAxisShare is the share of observations nearest the rotation axis that is
// left out in one variant: there the crossing is long and the scale least sure
// (common practice, no source).
const nearAxisShare = 0.2

func (s *Study) leaveVariants(r *reading, add addVariant) {
	cat, p := r.cat, r.x.Pairs
	ice := func(u int32) bool { return !inIce(1 / (2 * math.Sqrt(cat.S2[u]))) }
	if slices.ContainsFunc(p.Unique, func(u int32) bool { return !ice(u) }) {
		add(choiceLeave, "ice rings", func(ctx context.Context) (*size.Fit, error) {
			own := *r
			own.keep = ice
			return own.fit(ctx, r.x.thin, r.x.thick)
		})
	}
	if p.Shells > 1 {
		lowest := 0.0
		for i, k := range p.Shell {
			if k == 0 {
				lowest = math.Max(lowest, p.S2[i])
			}
		}
		add(choiceLeave, "lowest-resolution shell", func(ctx context.Context) (*size.Fit, error) {
			own := *r
			own.keep = func(u int32) bool { return cat.S2[u] > lowest }
			return own.fit(ctx, r.x.thin, r.x.thick)
		})
	}
	if thin, thick := s.awayFromAxis(r.x, true), s.awayFromAxis(r.x, false); thin != nil && thick != nil {
		add(choiceLeave, "20 % of observations nearest the rotation axis", func(ctx context.Context) (*size.Fit, error) {
			return r.fit(ctx, thin, thick)
		})
	}
}

// awayFromAxis gives one position of a contrast without the observations nearest
// the rotation axis; nil when angles are missing or do not tell the axis.
func (s *Study) awayFromAxis(x *Compared, thin bool) *intensity.Scaled {
	c := x.Contrast
	a, scaled := &s.intake.Positions[c.Crystal][c.Thin], x.thin
	if !thin {
		a, scaled = &s.intake.Positions[c.ThickCrystal][c.Thick], x.thick
	}
	if scaled.Phi == nil {
		return nil
	}
	vectors := s.scatteringVectors(a.Observations)
	axis, err := evidence.RotationAxis(vectors, scaled.Phi)
	if err != nil || axis.ResidualDeg > 3 {
		return nil
	}
	angle := make([]float64, len(vectors))
	for o, v := range vectors {
		angle[o] = axis.AngleDeg(v)
	}
	sorted := slices.Clone(angle)
	slices.Sort(sorted)
	limit := sorted[int(nearAxisShare*float64(len(sorted)))]
	var rows []int
	for o := range angle {
		if angle[o] >= limit {
			rows = append(rows, o)
		}
	}
	return scaledRows(scaled, rows)
}

// scatteringVectors are Cartesian, in 1/angstrom, in a frame fixed to the crystal.
func (s *Study) scatteringVectors(c *intensity.Columns) [][3]float64 {
	m := s.Series.Cell.Reciprocal().Orthogonal()
	out := make([][3]float64, c.Len())
	for o := range out {
		h := [3]float64{float64(c.H[o]), float64(c.K[o]), float64(c.L[o])}
		for a := range 3 {
			out[o][a] = m[a][0]*h[0] + m[a][1]*h[1] + m[a][2]*h[2]
		}
	}
	return out
}

// withoutGiants fits without the reflections that are stronger than above on the
// axis; they stay in the shell means, which the exchange is with.
func (r *reading) withoutGiants(legs []*size.Input, above float64) (*size.Fit, error) {
	for k, leg := range legs {
		own := *leg
		own.Z = slices.Clone(leg.Z)
		for i, z := range own.Z {
			if z > above {
				own.Z[i] = math.NaN()
			}
		}
		legs[k] = &own
	}
	return size.MomentsCross(legs, nil, r.model, r.study.sizeSettings())
}

// fit pairs two positions and fits the leading model on the leading axis.
func (r *reading) fit(ctx context.Context, thin, thick *intensity.Scaled) (*size.Fit, error) {
	p, err := r.pair(ctx, thin, thick, difference.MatchAuto)
	if err != nil {
		return nil, err
	}
	legs, _, err := r.strengths(p)
	if err != nil {
		return nil, err
	}
	return size.MomentsCross(legs, nil, r.model, r.study.sizeSettings())
}

// friedel is the series with Friedel mates the other way: apart when they lead
// together, together when they lead apart.
type friedel struct {
	level  string
	study  *Study
	cat    *intensity.Catalogue
	unique [][][]int32
}

// Levels of the treatment of Friedel mates.
const (
	friedelApart    = "apart"
	friedelTogether = "together"
)

// otherFriedel numbers the observations the other way; nil for a
// centrosymmetric group, whose mates are equivalent anyway.
func (s *Study) otherFriedel() (*friedel, error) {
	if s.Series.Group.Centrosymmetric() {
		return nil, nil
	}
	var sets []*intensity.Columns
	for i := range s.intake.Positions {
		for j := range s.intake.Positions[i] {
			sets = append(sets, s.intake.Positions[i][j].Observations)
		}
	}
	f := &friedel{level: friedelApart, study: s, unique: make([][][]int32, len(s.intake.Positions))}
	build := intensity.NewCatalogueApart
	if s.Series.FriedelApart {
		f.level, build = friedelTogether, intensity.NewCatalogue
	}
	var err error
	if f.cat, err = build(s.Series.Cell, s.Series.Group, sets...); err != nil {
		return nil, err
	}
	for i := range s.intake.Positions {
		f.unique[i] = make([][]int32, len(s.intake.Positions[i]))
		for j := range s.intake.Positions[i] {
			if f.unique[i][j], err = f.cat.Assign(s.intake.Positions[i][j].Observations); err != nil {
				return nil, err
			}
		}
	}
	return f, nil
}

func (f *friedel) position(i, j int) *intensity.Scaled {
	out := *f.study.scaled[i].Positions[j]
	out.Unique = f.unique[i][j]
	return &out
}

func (f *friedel) fit(ctx context.Context, r *reading) (*size.Fit, error) {
	own := *r
	own.cat = f.cat
	c := r.x.Contrast
	if r.others != nil {
		own.others = nil
		for i := range f.unique {
			if i == c.Crystal || i == c.ThickCrystal {
				continue
			}
			o := difference.OtherCrystal{Name: f.study.Series.Crystals[i].Name}
			for j := range f.unique[i] {
				o.Positions = append(o.Positions, intensity.Merge(f.cat.Len(), f.position(i, j)))
			}
			own.others = append(own.others, o)
		}
	}
	if r.third != nil {
		own.third = intensity.Merge(f.cat.Len(), f.position(c.Crystal, f.study.thirdOf(c)))
	}
	return own.fit(ctx, f.position(c.Crystal, c.Thin), f.position(c.ThickCrystal, c.Thick))
}
