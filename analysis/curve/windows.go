package curve

import "thinward/analysis/resample"

// Windows returns rank windows over n elements.
func Windows(n int, share float64, min, grid int) []resample.Window {
	return nil
}
