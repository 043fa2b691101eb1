package simulate

import (
	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// Series is an invented series with its truth. Plan is the plan with all
// defaults filled in.
type Series struct {
	Plan       Plan
	Group      *crystal.Group
	Wavelength float64 // angstrom
	Truth      Truth
	Specimens  []Specimen
}

// Truth holds one entry for every unique reflection to DMin, absent ones
// included, in order of rising s^2.
type Truth struct {
	HKL     []crystal.HKL // representative under the Laue class
	S2      []float64     // sin^2(theta)/lambda^2
	J       []float64     // kinematic; the mean of the allowed lowest third in s^2 is 1
	Epsilon []int8
	Centric []bool
	Absent  []bool
	Shell   []int32   // shell of the local mean
	Local   []float64 // mean J of the allowed reflections of that shell; with Plan.Population the mean expected
	Atoms   []Atom    // of the asymmetric unit; empty for Wilson intensities

	expected []float64 // J by Wilson's law, with Plan.Population
}

// Specimen is one crystal of the series.
type Specimen struct {
	Name        string
	Orientation [3][3]float64 // reciprocal Cartesian to laboratory, at rotation angle 0
	Positions   []Measured
}

// Measured is one position: its rows and what lies behind them.
type Measured struct {
	Plan Position // filled
	// Rows are in order of true index, then angle; copies follow each other. Phi is the
	// angle of crossing (of copies: shifted by whole frames with their frames), frames
	// count from 1 at the lowest tilt, intensities are in reported units. Partiality is nil.
	Rows *intensity.Columns
	// Unique is the entry of Truth of each row; Observation its number before
	// copying (rows of equal number are copies).
	Unique, Observation []int32
	// Expected is the noise-free value of each row in reported units, after
	// fresh errors, before counting.
	Expected []float64
	// Law is the intensity of each unique reflection by curb and exchange at
	// TiltZeroDeg, before deviations; LnDeviation the part of ln deviation common
	// to equivalents. Both parallel Truth. Law is nil with Plan.Law.
	Law, LnDeviation []float64
	// Orientation is that of this position, misorientation included.
	Orientation [3][3]float64
	// AngleDeg and LnK sample ln of the reported value of unit intensity at
	// s = 0 (counts, gain and K(phi) together), every 0.5 degrees.
	AngleDeg, LnK []float64
	// B is the total B of the position, dose included.
	B float64
	// Removed counts observations taken out by CutBelow.
	Removed int
}
