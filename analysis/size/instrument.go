package size

import "errors"

// Instrument is the exchange found by the axis as an instrument.
//
// M is NaN with a Why when it is not estimable. Lo and Hi are the ends of
// Region, which is the Anderson-Rubin set when AndersonRubin is true, else the
// Student interval.
type Instrument struct {
	M, SE, Lo, Hi float64
	Level         float64
	F             float64 // first stage: squared covariance of axis and thin over its variance
	N             float64 // sum of weights of the reflections used
	DF            float64 // of the Student interval
	AndersonRubin bool
	Region        Region
	Estimable     bool
	Why           string
}

// GiantVariant is the exchange with the strongest reflections on the axis left out.
type GiantVariant struct {
	Above      float64 // left out where Z exceeds this; +Inf is the full set
	LeftOut    int
	Instrument *Instrument
}

// Exchange estimates m with default settings.
func Exchange(in *Input, w []float64) (*Instrument, error) { return ExchangeWith(in, w, nil) }

// ExchangeWith is Exchange with settings.
func ExchangeWith(in *Input, w []float64, set *Settings) (*Instrument, error) {
	return nil, errors.New("size: Exchange: to be filled in")
}

// Giants repeats the exchange without the reflections above 4, 6 and 10 on the axis.
func Giants(in *Input, w []float64, set *Settings) ([]GiantVariant, error) {
	return nil, errors.New("size: Giants: to be filled in")
}
