package analysis

import (
	"context"
	"errors"
	"math"

	"thinward/analysis/curve"
	"thinward/analysis/difference"
	"thinward/analysis/intensity"
	"thinward/analysis/size"
)

// Compared is everything about one contrast.
type Compared struct {
	Contrast Contrast
	Pairs    *difference.Pairs
	// Leading is the axis that answers, Strengths its values at the pairs; on a
	// bracket they are those of the inverse-variance mean, which serve the curve only.
	Leading   string
	Axis      difference.Axis
	Strengths *difference.Strengths
	// Others holds the strengths on every other axis that could be built.
	Others []*difference.Strengths
	Input  *size.Input
	Model  size.Model
	Fit    *size.Fit
	Halves *size.Halves
	Band   *curve.Banded
	Result ContrastResult
	// thin and thick are the positions that were paired, b the B factors that their
	// scale took off.
	thin, thick *intensity.Scaled
	b           [2]float64
}

// Names of the leading axis in results.
const (
	leadCrystals = "crystals"
	leadBracket  = "bracket"
)

// Compare works out one contrast of the series.
func (s *Study) Compare(ctx context.Context, c Contrast) (*Compared, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.compareStep(ctx, c)
}

func (s *Study) compareStep(ctx context.Context, c Contrast) (*Compared, error) {
	if got := s.compared[c]; got != nil {
		return got, nil
	}
	scaled, err := s.scaleStep(ctx)
	if err != nil {
		return nil, err
	}
	x := &Compared{Contrast: c}
	if c.Across() {
		x.thin, x.thick, x.b, err = s.across(ctx, c)
		if err != nil {
			return nil, err
		}
	} else {
		sc := scaled[c.Crystal]
		x.thin, x.thick = sc.Positions[c.Thin], sc.Positions[c.Thick]
		x.b = [2]float64{sc.Fit.B[sc.slot[c.Thin]], sc.Fit.B[sc.slot[c.Thick]]}
	}
	if err := s.pair(ctx, x); err != nil {
		return nil, err
	}
	if err := s.chooseAxis(x); err != nil {
		return nil, err
	}
	if err := x.refit(ctx); err != nil {
		return nil, err
	}
	s.describe(x)
	for _, part := range []func(context.Context, *Compared) error{
		s.correlate, s.sizes, s.curves, s.resolution, s.naive, s.axes,
	} {
		if err := part(ctx, x); err != nil {
			return nil, err
		}
	}
	s.compared[c] = x
	s.progress("differences", len(s.compared), len(s.list))
	return x, nil
}

// across scales two positions of two crystals to each other, angles left out:
// frames and angles of two crystals do not correspond.
func (s *Study) across(ctx context.Context, c Contrast) (thin, thick *intensity.Scaled, b [2]float64, err error) {
	in, err := s.intakeStep(ctx)
	if err != nil {
		return nil, nil, b, err
	}
	var parts []*Accepted
	for _, a := range []*Accepted{&in.Positions[c.Crystal][c.Thin], &in.Positions[c.ThickCrystal][c.Thick]} {
		o := *a.Observations
		o.Phi = nil
		part := *a
		part.Observations = &o
		parts = append(parts, &part)
	}
	sc, err := scaleTogether(ctx, in.Catalogue, parts, &s.settings.Scaling, &s.settings.Noise, s.settings.Workers)
	if err != nil {
		return nil, nil, b, err
	}
	return sc.Positions[0], sc.Positions[1], [2]float64(sc.Fit.B), nil
}

func (s *Study) pair(ctx context.Context, x *Compared) error {
	var err error
	x.Pairs, err = difference.Pair(ctx, x.thin, x.thick, s.intake.Catalogue, s.pairSettings(x.Contrast))
	return err
}

func (s *Study) pairSettings(c Contrast) *difference.Settings {
	set := &difference.Settings{SameCrystal: !c.Across()}
	in := s.intake
	width := math.Max(in.Positions[c.Crystal][c.Thin].Observations.FrameWidth(), in.Positions[c.ThickCrystal][c.Thick].Observations.FrameWidth())
	if width > 0 {
		set.AngleToleranceDeg = width
	}
	return set
}

// others gives the merged positions of every crystal that takes no part in c.
func (s *Study) others(c Contrast) []difference.OtherCrystal {
	var out []difference.OtherCrystal
	n := s.intake.Catalogue.Len()
	for i, sc := range s.scaled {
		if i == c.Crystal || i == c.ThickCrystal {
			continue
		}
		o := difference.OtherCrystal{Name: s.Series.Crystals[i].Name}
		for _, p := range sc.Positions {
			o.Positions = append(o.Positions, intensity.Merge(n, p))
		}
		out = append(out, o)
	}
	return out
}

// chooseAxis takes the other crystals where they agree, else a bracket from
// halves of the pair's own positions.
func (s *Study) chooseAxis(x *Compared) error {
	x.Result.AxisAgreement = math.NaN()
	x.Leading, x.Axis = leadBracket, difference.AxisInverseVariance
	wanted := s.settings.Axis
	if others := s.others(x.Contrast); len(others) > 0 && (wanted == "" || wanted == leadCrystals) {
		strengths, err := x.Pairs.Crystals(others)
		var refused *difference.RefusedError
		switch {
		case err == nil:
			x.Leading, x.Axis, x.Strengths = leadCrystals, difference.AxisCrystals, strengths
			x.Result.AxisAgreement = strengths.Correlation
			return nil
		case errors.As(err, &refused):
			x.Result.AxisAgreement = refused.Correlation
			x.warn("axis-refused", "the axis of the other crystals is refused: "+refused.Error())
		default:
			x.warn("axis-missing", "no axis from other crystals: "+err.Error())
		}
	} else if wanted == leadCrystals {
		return errors.New("the axis crystals needs a crystal that takes no part in the contrast")
	}
	switch wanted {
	case "", leadBracket, leadCrystals, difference.AxisInverseVariance.String():
		if wanted == difference.AxisInverseVariance.String() {
			x.Leading = wanted
		}
		x.Strengths = x.Pairs.InverseVariance(0)
		return nil
	case difference.AxisThird.String():
		third := s.third(x)
		if third == nil {
			return errors.New("the axis third needs a third position on the crystal")
		}
		x.Leading, x.Axis, x.Strengths = wanted, difference.AxisThird, third
		return nil
	case difference.AxisThin.String(), difference.AxisThick.String(), difference.AxisMean.String():
		axis, err := difference.ParseAxis(wanted)
		if err != nil {
			return err
		}
		x.Leading, x.Axis, x.Strengths = wanted, axis, x.Pairs.Naive(axis)
		return nil
	}
	return s.settings.CheckAxis()
}

// refit gives the differences the variance at the strength that the other
// crystals say, so that no weight shares the noise of the pair.
func (x *Compared) refit(ctx context.Context) error {
	if x.Leading != leadCrystals {
		return nil
	}
	return refit(ctx, x.Pairs, x.Strengths.Z, true)
}

// refit takes the variance of the differences at the strengths z, or, when those are not
// the other crystals', at the mean of each pair.
func refit(ctx context.Context, p *difference.Pairs, z []float64, others bool) error {
	if !others {
		return p.RefitVarD(ctx, nil)
	}
	expected := make([]float64, p.Len())
	for i, v := range z {
		if math.IsNaN(v) {
			v = 1
		}
		expected[i] = v * p.MeanPooled[i]
	}
	return p.RefitVarD(ctx, expected)
}

// third gives the strengths in the position of the same crystal whose thickness
// lies nearest the middle of the pair, nil when there is none.
func (s *Study) third(x *Compared) *difference.Strengths {
	c := x.Contrast
	best := s.thirdOf(c)
	if best < 0 {
		return nil
	}
	strengths, err := x.Pairs.Third(intensity.Merge(s.intake.Catalogue.Len(), s.scaled[c.Crystal].Positions[best]))
	if err != nil {
		x.warn("third-missing", "no axis from a third position: "+err.Error())
		return nil
	}
	return strengths
}

func (x *Compared) warn(code, text string) {
	x.Result.Warnings = append(x.Result.Warnings, WarningResult{Code: code, Text: text})
}

func (s *Study) describe(x *Compared) {
	c, r := x.Contrast, &x.Result
	a, b := &s.Series.Crystals[c.Crystal], &s.Series.Crystals[c.ThickCrystal]
	r.Crystal, r.Thin, r.Thick = a.Name, a.Positions[c.Thin].Name, b.Positions[c.Thick].Name
	if c.Across() {
		r.ThickCrystal = b.Name
		x.warn("between-crystals", "the two positions lie on two crystals: what differs may be the crystals (mosaicity, bending, orientation, radiation history) and not their thickness")
	}
	r.ThicknessNM = [2]float64{a.Positions[c.Thin].ThicknessNM, b.Positions[c.Thick].ThicknessNM}
	r.Primary, r.Pairs, r.Matched = c.Primary, x.Pairs.Len(), x.Pairs.Matched
	r.StrengthAxis, r.PairNoise = x.Leading, x.Pairs.ExtraD
	for _, w := range x.Pairs.Warnings {
		x.warn(w.Code, w.Text)
	}
	for _, w := range x.Strengths.Warnings {
		x.warn(w.Code, w.Text)
	}
	x.Input = input(x.Pairs, x.Strengths.Z)
	x.Halves = s.halves(x)
	x.Input.ThinA, x.Input.ThinB = nil, nil
}

// input brings pairs to what size takes: epsilon divided out.
func input(p *difference.Pairs, z []float64) *size.Input {
	n := p.Len()
	in := &size.Input{
		Z: z, Thin: make([]float64, n), Thick: make([]float64, n), VarThin: make([]float64, n), VarThick: make([]float64, n),
		Shell: p.Shell, Shells: p.Shells, S2: p.S2,
	}
	for i, e := range p.Epsilon {
		in.Thin[i], in.Thick[i] = p.Thin[i]/e, p.Thick[i]/e
		in.VarThin[i], in.VarThick[i] = p.VarThin[i]/(e*e), p.VarThick[i]/(e*e)
	}
	return in
}

// halves splits both positions by raw index, with one key, so that a matched
// index falls into the same half of both.
func (s *Study) halves(x *Compared) *size.Halves {
	key := s.seed(x.Result.Crystal, "halves").Stream(0).Uint64()
	n := s.intake.Catalogue.Len()
	ta, tb := intensity.MergeHalves(n, x.thin, key)
	ka, kb := intensity.MergeHalves(n, x.thick, key)
	h := &size.Halves{Shell: x.Pairs.Shell, Shells: x.Pairs.Shells}
	at := func(m *intensity.Merged, i int) float64 {
		u := x.Pairs.Unique[i]
		if m.N[u] == 0 {
			return math.NaN()
		}
		return m.J[u] / x.Pairs.Epsilon[i]
	}
	for i := range x.Pairs.Unique {
		h.ThinA, h.ThinB = append(h.ThinA, at(ta, i)), append(h.ThinB, at(tb, i))
		h.ThickA, h.ThickB = append(h.ThickA, at(ka, i)), append(h.ThickB, at(kb, i))
	}
	return h
}
