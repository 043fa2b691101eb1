package curve

import (
	"context"
	"errors"

	"thinward/analysis/intensity"
	"thinward/analysis/resample"
)

// Settings steer ByStrength and ByResolution. nil and zero fields mean the defaults.
type Settings struct {
	// Share, Min and Grid are those of Windows; 0 = 0.05, 50, 200.
	Share     float64
	Min, Grid int
	// Local draws a local line (tricube) instead of the moving mean.
	Local bool
	// Plain draws the unweighted mean; the weights then serve the test alone.
	Plain bool
	// S2, parallel to the strengths, adds windows along the resolution to the flip
	// test, with the same flips; nil = strength alone.
	S2 []float64
	// NoTest leaves out the flip test.
	NoTest bool
	// Shells is the number of equal-count shells of ByResolution; 0 = 12.
	Shells int
	// Resample are the settings of the bootstrap and of the flips.
	Resample resample.Settings
}

// Banded is a curve with its bands, one entry a grid point. Grid is the strength
// at the middle of each window.
type Banded struct {
	Grid, Mean, SE                 []float64
	Lo, Hi, LoSim, HiSim           []float64
	N                              []int
	Windows                        []resample.Window
	Level, Multiplier, AchievedSim float64
	// P is the p-value of the flip test, NaN without one; Flip its details.
	P    float64
	Flip *resample.FlipResult
	// Used and Unavailable count the pairs with and without a strength on this axis.
	Used, Unavailable int
	Warnings          []intensity.Warning
}

// ByStrength draws y (in eps units) against strength with weights w.
func ByStrength(ctx context.Context, strength, y, w []float64, o *Settings) (*Banded, error) {
	return nil, errors.New("curve: ByStrength has no body yet")
}

// Shells is the curve by resolution.
type Shells struct {
	S2Lo, S2Hi, S2 []float64 // edges and mean of sin^2(theta)/lambda^2 in each shell, 1/angstrom^2
	N              []int
	// LnRatio is ln(<thick>/<thin>) of each shell, with its bands.
	LnRatio, SE, Lo, Hi, LoSim, HiSim []float64
	// DeltaB is B_thick - B_thin (angstrom^2) of the line LnRatio = a - 2 DeltaB s^2,
	// Share the share of the variation between shells that the line takes.
	DeltaB, DeltaBSE, DeltaBLo, DeltaBHi float64
	Intercept, Share                     float64
	// Rest is what B does not explain, with its bands; Chi2 of Rest on DF degrees of
	// freedom and its tail P.
	Rest, RestLo, RestHi, RestLoSim, RestHiSim []float64
	Chi2                                       float64
	DF                                         int
	P                                          float64
	Level, Multiplier                          float64
	Warnings                                   []intensity.Warning
}

// ByResolution draws ln(<thick>/<thin>) by shell.
func ByResolution(ctx context.Context, s2, thin, thick []float64, o *Settings) (*Shells, error) {
	return nil, errors.New("curve: ByResolution has no body yet")
}
