package size

import "errors"

// Class is one class of strength on the axis.
type Class struct {
	Name     string // floor, middle, top
	Lo, Hi   float64
	N        int
	Contrast Value // in eps: thin minus thick over the pooled shell mean
	Strength Value // mean true strength of the class, from the second estimate
	M        Value // -Contrast/(1 - Strength)
	Why      string
}

// Classes gives the contrast of floor (Z < 0.2), middle (0.5 to 1.5) and top
// (Z > 3); second is a strength of every reflection independent of the axis,
// nil for that of the thin position itself.
func Classes(in *Input, second, w []float64, set *Settings) ([]Class, error) {
	return nil, errors.New("size: Classes: to be filled in")
}
