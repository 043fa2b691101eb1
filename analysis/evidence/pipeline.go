package evidence

import "context"

// Estimate is a value with its standard error and interval; NaN and infinite
// ends where it is not estimable.
type Estimate struct{ Value, SE, Lo, Hi float64 }

// Summary is what a pipeline says of one set of intensities: the exchange M, the
// curb Q, and P, the p value of the test of the curve (NaN when none was made).
type Summary struct {
	M, Q Estimate
	P    float64
}

// Pipeline works a set of intensities out to a Summary. Intensities are parallel
// to those that were measured, in an order that the maker of the pipeline fixes;
// they are not kept and not changed. It may be called from several goroutines at
// once.
type Pipeline func(ctx context.Context, intensity []float64) (Summary, error)
