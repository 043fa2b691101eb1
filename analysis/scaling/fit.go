package scaling

import (
	"fmt"
	"math"

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

	curve []curveAxis
	covAt []int // start of each position in Cov
	order []int32
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

// LnKAt returns ln K of position p at angle phi in degrees (at the frame number
// where frames stand for the angle); beyond the measured range the value at its
// end. It panics when p is no position.
func (f *Fit) LnKAt(p int, phi float64) float64 {
	at, b := f.basisAt(p, phi)
	sum := 0.0
	for i, x := range b {
		sum += x * f.LnK[p][at+i]
	}
	return sum
}

// LnKSEAt returns the standard error of LnKAt, 0 where the gauge fixes it.
func (f *Fit) LnKSEAt(p int, phi float64) float64 {
	at, b := f.basisAt(p, phi)
	at += f.covAt[p]
	sum := 0.0
	for i, x := range b {
		for j, y := range b {
			sum += x * y * f.Cov.At(at+i, at+j)
		}
	}
	return math.Sqrt(math.Max(sum, 0))
}

func (f *Fit) basisAt(p int, phi float64) (at int, b []float64) {
	if p < 0 || p >= len(f.curve) {
		panic(fmt.Sprintf("scaling: LnKAt: position %d of %d", p, len(f.curve)))
	}
	c := f.curve[p]
	if c.flat {
		return 0, []float64{1}
	}
	at, u := c.locate(phi)
	b0, b1, b2, b3 := cubicBasis(u)
	return at, []float64{b0, b1, b2, b3}
}
