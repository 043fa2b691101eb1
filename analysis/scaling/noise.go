package scaling

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/parallel"
)

// NoiseSettings steer FitNoise; the zero value and nil mean the defaults.
type NoiseSettings struct {
	Level   float64 // coverage of the intervals; 0 means 0.95
	TailDF  float64 // degrees of freedom of the Student-t likelihood; 0 means estimated, +Inf normal
	MinDF   int     // fewer degrees of freedom from equivalents: not estimable; 0 means 20
	Workers int     // 0 means all processors; the result does not depend on it
}

// PositionNoise is the noise model of one position,
//
//	v = a^2 v' + (b g J)^2,
//
// the squared scale of a Student-t law with TailDF degrees of freedom (its
// variance is v TailDF/(TailDF-2)). b is dimensionless: the share by which
// equivalents scatter beyond counting.
type PositionNoise struct {
	A, ALo, AHi  float64
	B, BLo, BHi  float64
	TailDF       float64
	N            int     // observations with at least one equivalent in this position
	DF           int     // N less the number of their reflections
	Multiplicity float64 // observations a reflection among those
	Estimable    bool    // false: A = 1, B = 0 stand in, intervals are 0 to +Inf
	LogLik       float64
}

// Noise holds one model a position.
type Noise struct {
	Position []PositionNoise
	Level    float64
	Warnings []intensity.Warning
}

// noiseRows caps the observations behind one position's noise model: above it
// every n-th reflection is taken, which leaves intervals honest and narrow enough.
const noiseRows = 50000

// FitNoise fits the noise model of every position to the scatter of symmetry
// equivalents within it, by maximum likelihood of residuals from the mean of each
// reflection in that position. Residuals carry 1 - leverage degrees of freedom
// and the mean its determinant (restricted likelihood: Patterson & Thompson
// 1971), so that a is unbiased at low multiplicity; for a normal law this is
// exact, for Student's law (Lange, Little & Taylor 1989) close to it. Intervals
// are of profile likelihood. A position with too few equivalents is not
// estimable: a = 1, b = 0 and a warning. settings may be nil; in must be the
// Input of fit.
func FitNoise(ctx context.Context, in Input, fit *Fit, settings *NoiseSettings) (*Noise, error) {
	var set NoiseSettings
	if settings != nil {
		set = *settings
	}
	if set.Level == 0 {
		set.Level = 0.95
	}
	if set.MinDF == 0 {
		set.MinDF = 20
	}
	if !(set.Level > 0 && set.Level < 1) {
		return nil, fmt.Errorf("scaling: noise level is %g, must lie between 0 and 1", set.Level)
	}
	if set.TailDF != 0 && !(set.TailDF >= 2) {
		return nil, fmt.Errorf("scaling: noise TailDF is %g, must be at least 2", set.TailDF)
	}
	if fit == nil || len(fit.Scale) != in.Len() || len(fit.order) != in.Len() {
		return nil, fmt.Errorf("scaling: the fit does not belong to this input")
	}
	out := &Noise{Position: make([]PositionNoise, in.Positions), Level: set.Level}
	data := collectEquivalents(&in, fit)
	err := parallel.For(ctx, in.Positions, set.Workers, func(ctx context.Context, p int) error {
		var err error
		out.Position[p], err = data[p].fit(ctx, &set)
		return err
	})
	if err != nil {
		return nil, err
	}
	for p := range out.Position {
		out.Warnings = append(out.Warnings, noiseWarnings(p, &out.Position[p])...)
	}
	return out, nil
}

func noiseWarnings(p int, n *PositionNoise) []intensity.Warning {
	switch {
	case !n.Estimable:
		return []intensity.Warning{{Code: "noise-not-estimable", Where: where(p),
			Text: fmt.Sprintf("%d degrees of freedom from equivalents: the noise model is not estimable, reported variances stand (a = 1, b = 0)", n.DF)}}
	case n.Multiplicity < 2.5 || n.DF < 200:
		return []intensity.Warning{{Code: "low-multiplicity", Where: where(p),
			Text: fmt.Sprintf("noise model from %d observations, %.2g a reflection: a between %.3g and %.3g, b between %.3g and %.3g", n.N, n.Multiplicity, n.ALo, n.AHi, n.BLo, n.BHi)}}
	}
	return nil
}

// Variance returns a^2 v' + (b g J)^2 for every observation, on the scale of I;
// divided by g^2 it is the variance of the scaled intensity I/g. A negative J
// counts as 0.
func (n *Noise) Variance(in Input, fit *Fit) []float64 {
	out := make([]float64, in.Len())
	for i, p := range in.Position {
		m := &n.Position[p]
		x := m.B * fit.Scale[i] * math.Max(fit.J[in.Unique[i]], 0)
		out[i] = m.A*m.A*fit.VarExpected[i] + x*x
	}
	return out
}
