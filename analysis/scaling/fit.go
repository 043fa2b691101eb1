package scaling

import (
	"context"
	"errors"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/intensity"
)

// Fit is the outcome of Estimate. Columns named per observation are in the row
// order of the Input; J, JVar and N are indexed by the unique number and reach to
// the largest one.
type Fit struct {
	Scale       []float64 // g = K exp(-2 B s^2) per observation
	VarExpected []float64 // v', reported variance moved to the expected intensity, per observation, on the scale of I
	Weight      []float64 // nu/(nu+z^2) per observation: 1 at the model, towards 0 for outliers
	J           []float64 // joint intensity of each reflection on the common scale, 0 where N is 0
	JVar        []float64 // its variance, +Inf where N is 0
	N           []int32   // observations behind it

	LnK       [][]float64 // spline coefficients of ln K, one slice a position (one number where constant)
	LnKMean   []float64   // mean of ln K over the observations of each position
	LnKMeanSE []float64   // its standard error, 0 where fixed by the gauge
	B         []float64   // angstrom^2, one a position; 0 where fixed
	BSE       []float64   // standard errors, 0 where fixed

	// Cov is the covariance of all coefficients and B: position by position,
	// first the coefficients of LnK, then B. Fixed parameters have zero rows.
	Cov *mat.SymDense

	WeightA, WeightB []float64 // the noise parameters a and b used inside the weights, per position
	Shared           float64   // share of b^2 that equal raw indices of different positions have in common

	SoftSE        float64 // standard error of ln K along the softest direction of the common curve, NaN if there was none
	Constant      bool    // the common curve was set to a constant because the data do not fix it
	RelativeConst []bool  // the relative curve of this position was set to a constant
	Iterations    int
	Converged     bool
	LargestShift  float64 // last shift over its standard error
	Outliers      []Outlier
	OutlierShare  []float64 // share of listed observations per position
	Warnings      []intensity.Warning
	Settings      Settings // as used, defaults filled in
}

// Outlier is one observation whose relative weight fell below the threshold. It
// still counts, with that weight: nothing is removed.
type Outlier struct {
	Row                   int
	Position, Unique, Raw int32
	S2, Phi               float64 // Phi is NaN without angles
	I, Expected           float64 // Expected is g J
	Sigma                 float64 // standard deviation in the weights
	Z                     float64 // (I - Expected)/Sigma
	Weight                float64
}

// LnKAt returns ln K of position p at angle phi in degrees; beyond the measured
// range the value at its end. It panics when p is no position.
func (f *Fit) LnKAt(p int, phi float64) float64 { return 0 }

// LnKSEAt returns the standard error of LnKAt.
func (f *Fit) LnKSEAt(p int, phi float64) float64 { return 0 }

// Estimate fits the scale of one crystal: separable robust least squares in
// which Gauss-Newton moves K and B while J is eliminated in closed form
// (variable projection: Golub & Pereyra 1973; Kaufman 1975), with the weights of
// a Student-t likelihood (Lange, Little & Taylor 1989). Observations of one raw
// index in several positions share a deviation in the weights, so that relative
// curves d_p rest on matched indices and the common curve c on equivalents at
// other angles. Gauge: position 0 has mean ln K = 0 over its observations and
// B = 0. settings may be nil. Errors: columns of unequal length, values that are
// not finite, variances not positive (with the row), cancellation.
func Estimate(ctx context.Context, in Input, settings *Settings) (*Fit, error) {
	return nil, errors.New("scaling: not built yet")
}

// Variants fits every combination of the given models and anchors, models
// outermost, other settings alike. nil models mean all four, nil anchors all
// five.
func Variants(ctx context.Context, in Input, models []Model, anchors []Anchor, settings *Settings) ([]*Fit, error) {
	return nil, errors.New("scaling: not built yet")
}
