package resample

import (
	"context"
	"errors"

	"thinward/analysis/intensity"
)

// BandSet holds bootstrap bands of an averaged curve, one entry a window.
type BandSet struct {
	// Mean is the (weighted) mean of each window, SE its bootstrap standard error.
	Mean, SE []float64
	// Lo and Hi are the pointwise percentile band, LoSim and HiSim the simultaneous
	// band Mean -+ Multiplier*SE. An interval that the data cannot support is -Inf, +Inf.
	Lo, Hi, LoSim, HiSim []float64
	// N is the number of elements, Units the number of resampled units in each window.
	N, Units []int
	// Multiplier is the max-t multiplier, AchievedSim the share of draws within it
	// everywhere; Achieved is the share of draws within the pointwise band, by window.
	Multiplier, AchievedSim float64
	Achieved                []float64
	Level                   float64
	Replicates              int
	Scheme                  Scheme
	Warnings                []intensity.Warning
}

// Bands bootstraps the means of y over windows.
func Bands(ctx context.Context, y, w []float64, windows []Window, o *Settings) (*BandSet, error) {
	return nil, errors.New("resample: Bands has no body yet")
}
