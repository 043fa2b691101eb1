package scaling

import (
	"context"
	"errors"

	"thinward/analysis/intensity"
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

// FitNoise fits the noise model of every position to the scatter of symmetry
// equivalents within it.
func FitNoise(ctx context.Context, in Input, fit *Fit, settings *NoiseSettings) (*Noise, error) {
	return nil, errors.New("scaling: not built yet")
}

// Variance returns a^2 v' + (b g J)^2 for every observation, on the scale of I;
// divided by g^2 it is the variance of the scaled intensity I/g.
func (n *Noise) Variance(in Input, fit *Fit) []float64 { return nil }
