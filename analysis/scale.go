package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/intensity"
	"thinward/analysis/scaling"
)

// ScaledCrystal is one crystal with its positions on one scale.
type ScaledCrystal struct {
	Input scaling.Input
	Fit   *scaling.Fit
	Noise *scaling.Noise
	// Order gives the position of the Series behind each position of the fit, from
	// thin to thick, replicates last.
	Order []int
	// Positions is indexed as in the Series.
	Positions []*intensity.Scaled
	// slot is the inverse of Order, first the row in Input where each position of
	// the fit begins.
	slot, first []int
}

// Scale fits the scale of every crystal and its noise model.
func (s *Study) Scale(ctx context.Context) ([]*ScaledCrystal, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.scaleStep(ctx)
}

func (s *Study) scaleStep(ctx context.Context) ([]*ScaledCrystal, error) {
	if s.scaled != nil {
		return s.scaled, nil
	}
	in, err := s.intakeStep(ctx)
	if err != nil {
		return nil, err
	}
	out := make([]*ScaledCrystal, len(s.Series.Crystals))
	var warnings []intensity.Warning
	for i := range s.Series.Crystals {
		out[i], err = s.scaleCrystal(ctx, in, i, &s.settings.Scaling)
		if err != nil {
			return nil, fmt.Errorf("crystal %s: %w", s.Series.Crystals[i].Name, err)
		}
		warnings = append(warnings, s.located(out[i].Fit.Warnings, i, out[i].Order)...)
		warnings = append(warnings, s.located(out[i].Noise.Warnings, i, out[i].Order)...)
		s.progress("scaling", i+1, len(out))
	}
	s.warnings = append(s.warnings, warnings...)
	s.scaled = out
	return out, nil
}

// located puts the crystal's name before what a warning of its fit names.
func (s *Study) located(list []intensity.Warning, i int, order []int) []intensity.Warning {
	out := make([]intensity.Warning, len(list))
	for k, w := range list {
		name := s.Series.Crystals[i].Name
		var p int
		if n, err := fmt.Sscanf(w.Where, "position %d", &p); n == 1 && err == nil && p >= 0 && p < len(order) {
			w.Where = s.place(i, order[p])
		} else if w.Where != "" {
			w.Where = name + ", " + w.Where
		} else {
			w.Where = name
		}
		out[k] = w
	}
	return out
}

func (s *Study) scaleCrystal(ctx context.Context, in *Intake, i int, set *scaling.Settings) (*ScaledCrystal, error) {
	c := &s.Series.Crystals[i]
	order := c.byThickness()
	for j := range c.Positions {
		if c.Positions[j].ReplicateOf != "" {
			order = append(order, j)
		}
	}
	var parts []*Accepted
	for _, j := range order {
		parts = append(parts, &in.Positions[i][j])
	}
	sc, err := scaleTogether(ctx, in.Catalogue, parts, set, &s.settings.Noise, s.settings.Workers)
	if err != nil {
		return nil, err
	}
	sc.Order = order
	sc.slot = make([]int, len(order))
	positions := make([]*intensity.Scaled, len(order))
	for k, j := range order {
		sc.slot[j] = k
		positions[j] = sc.Positions[k]
	}
	sc.Positions = positions
	return sc, nil
}

// scaleTogether puts positions on the scale of the first. Positions of the
// result stand in the order given.
func scaleTogether(ctx context.Context, cat *intensity.Catalogue, parts []*Accepted, set *scaling.Settings, noise *scaling.NoiseSettings, workers int) (*ScaledCrystal, error) {
	sc := &ScaledCrystal{Input: scaling.Input{Positions: len(parts), HasAngle: make([]bool, len(parts))}}
	in := &sc.Input
	total, angles := 0, false
	for p, a := range parts {
		total += a.Observations.Len()
		in.HasAngle[p] = a.Observations.Phi != nil
		angles = angles || in.HasAngle[p]
	}
	in.S2, in.I, in.Var = make([]float64, 0, total), make([]float64, 0, total), make([]float64, 0, total)
	in.Unique, in.Raw, in.Position = make([]int32, 0, total), make([]int32, 0, total), make([]int32, 0, total)
	for p, a := range parts {
		sc.first = append(sc.first, len(in.I))
		for r, u := range a.Unique {
			in.S2 = append(in.S2, cat.S2[u])
			in.Var = append(in.Var, a.Observations.Sigma[r]*a.Observations.Sigma[r])
			in.Position = append(in.Position, int32(p))
		}
		in.I = append(in.I, a.Observations.I...)
		in.Unique = append(in.Unique, a.Unique...)
		in.Raw = append(in.Raw, a.Raw...)
		switch {
		case in.HasAngle[p]:
			in.Phi = append(in.Phi, a.Observations.Phi...)
		case angles:
			in.Phi = append(in.Phi, make([]float64, a.Observations.Len())...)
		}
	}
	fitSet := *set
	fitSet.Workers = workers
	var err error
	if sc.Fit, err = scaling.Estimate(ctx, *in, &fitSet); err != nil {
		return nil, err
	}
	noiseSet := *noise
	noiseSet.Workers = workers
	if sc.Noise, err = scaling.FitNoise(ctx, *in, sc.Fit, &noiseSet); err != nil {
		return nil, err
	}
	variance := sc.Noise.Variance(*in, sc.Fit)
	for p, a := range parts {
		sc.Positions = append(sc.Positions, sc.position(p, a, in, sc.Fit, variance))
	}
	return sc, nil
}

// position brings the observations of position p of a fit to the common scale.
func (sc *ScaledCrystal) position(p int, a *Accepted, in *scaling.Input, fit *scaling.Fit, variance []float64) *intensity.Scaled {
	out := &intensity.Scaled{Unique: a.Unique, Raw: a.Raw, I: make([]float64, len(a.Unique)), Var: make([]float64, len(a.Unique))}
	if in.HasAngle[p] {
		out.Phi = a.Observations.Phi
	}
	for r := range out.I {
		o := sc.first[p] + r
		g := fit.Scale[o]
		out.I[r] = in.I[o] / g
		out.Var[r] = variance[o] / (g * g)
	}
	return out
}

// scalingResults describes the fits, crystal by crystal, positions as in the
// Series.
func (s *Study) scalingResults() []ScalingResult {
	var out []ScalingResult
	for i, sc := range s.scaled {
		rejected := make([]int, len(sc.Order))
		for _, o := range sc.Fit.Outliers {
			rejected[o.Position]++
		}
		for j := range s.Series.Crystals[i].Positions {
			p := sc.slot[j]
			n := sc.Noise.Position[p]
			r := ScalingResult{
				Crystal: s.Series.Crystals[i].Name, Position: s.Series.Crystals[i].Positions[j].Name,
				B: sc.Fit.B[p], BSE: sc.Fit.BSE[p], LnK: sc.Fit.LnKMean[p],
				A: n.A, ALo: n.ALo, AHi: n.AHi, BNoise: n.B, BNoiseLo: n.BLo, BNoiseHi: n.BHi,
				Rejected: rejected[p], Constant: sc.Fit.Constant || len(sc.Fit.LnK[p]) == 1,
			}
			if !n.Estimable {
				r.Why = "no symmetry equivalents enough to estimate the noise model: a = 1 and b = 0 stand in"
			}
			r.ChiBefore, r.ChiAfter = sc.chi2(p)
			if !r.Constant {
				r.CurveDeg, r.CurveLnK = sc.sampleCurve(p)
			}
			out = append(out, r)
		}
	}
	return out
}

// chi2 returns the mean squared residual from the joint intensity, over the
// variance as reported and as modelled.
func (sc *ScaledCrystal) chi2(p int) (before, after float64) {
	variance := sc.Noise.Variance(sc.Input, sc.Fit)
	end := len(sc.Input.I)
	if p+1 < len(sc.first) {
		end = sc.first[p+1]
	}
	n := 0.0
	for o := sc.first[p]; o < end; o++ {
		u := sc.Input.Unique[o]
		if sc.Fit.N[u] < 2 {
			continue
		}
		d := sc.Input.I[o] - sc.Fit.Scale[o]*sc.Fit.J[u]
		free := 1 - 1/float64(sc.Fit.N[u])
		before += d * d / sc.Input.Var[o]
		after += d * d / variance[o]
		n += free
	}
	if n == 0 {
		return math.NaN(), math.NaN()
	}
	return before / n, after / n
}

func (sc *ScaledCrystal) sampleCurve(p int) (deg, lnK []float64) {
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, phi := range sc.Positions[sc.Order[p]].Phi {
		lo, hi = math.Min(lo, phi), math.Max(hi, phi)
	}
	const points = 61
	for k := range points {
		x := lo + (hi-lo)*float64(k)/(points-1)
		deg = append(deg, x)
		lnK = append(lnK, sc.Fit.LnKAt(p, x))
	}
	return deg, lnK
}
