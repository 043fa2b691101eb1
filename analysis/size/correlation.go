package size

import "errors"

// Halves holds two independent halves of each position, parallel by
// reflection; NaN where a half is missing.
type Halves struct {
	ThinA, ThinB, ThickA, ThickB []float64
	Shell                        []int32
	Shells                       int
}

// Correlation is the true correlation between two positions.
type Correlation struct {
	R           Value // C / sqrt(VThin VThick)
	MomentRatio Value // 1 - sqrt(VThick/VThin)
	VThin       Value
	VThick      Value
	C           Value
	N           float64
	Level       float64
	Estimable   bool
	Why         string
}

// TrueCorrelation finds r and the moment ratio from products of halves.
func TrueCorrelation(h *Halves, w []float64, set *Settings) (*Correlation, error) {
	return nil, errors.New("size: TrueCorrelation: to be filled in")
}
