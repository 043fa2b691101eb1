package resample

import (
	"context"
	"errors"

	"thinward/analysis/intensity"
)

// ScalarBoot is the bootstrap of K scalar statistics, every slice of length K.
type ScalarBoot struct {
	Estimate, Bias, SE []float64
	// Lo and Hi are the percentile interval, LoBCa and HiBCa the BCa interval (nil
	// with NoBCa). An interval the data cannot support is -Inf, +Inf.
	Lo, Hi, LoBCa, HiBCa []float64
	// Z0 and Accel are the bias correction and the acceleration of BCa; JackSE and
	// JackBias the jackknife's own error and bias.
	Z0, Accel, JackSE, JackBias []float64
	// Cov is the covariance of the draws, Cov[i][j].
	Cov [][]float64
	// Draws[r] are the statistics of replicate r, nil where the statistic failed.
	// Prob[r] is its probability when the resamples were enumerated, else nil.
	Draws [][]float64
	Prob  []float64
	// Achieved is the share of draws inside [Lo, Hi].
	Achieved   []float64
	Level      float64
	Replicates int
	Failed     int
	Units      int
	Scheme     Scheme
	Warnings   []intensity.Warning
}

// Scalars bootstraps stat, a function of n element weights. weights must not be
// kept or changed; stat is called from several goroutines at once. An error or a
// NaN from stat at the plain weights is returned; in a replicate it makes that
// replicate a failed one.
func Scalars(ctx context.Context, n int, stat func(weights []float64) ([]float64, error), o *Settings) (*ScalarBoot, error) {
	return nil, errors.New("resample: Scalars has no body yet")
}

// BandsOf makes pointwise and simultaneous bands of a curve from the draws of
// Scalars.
func BandsOf(b *ScalarBoot) (*BandSet, error) {
	return nil, errors.New("resample: BandsOf has no body yet")
}

// PoissonWeights fills dst with bootstrap weights of mean and variance exactly 1.
func PoissonWeights(s *Stream, dst []float64) {
}
