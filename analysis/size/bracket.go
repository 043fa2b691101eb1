package size

import "errors"

// BracketEnds holds m by halves of one crystal's own positions.
type BracketEnds struct {
	FromThin  *Instrument // axis: halves of the thin position, errs upward
	FromThick *Instrument // axis: halves of the thick position, errs downward
	Lo, Hi    float64     // lower end of FromThick and upper end of FromThin
}

// Bracket estimates m with each half as the axis of the other, cross-fitted.
func Bracket(h *Halves, thin, thick []float64, w []float64, set *Settings) (*BracketEnds, error) {
	return nil, errors.New("size: Bracket: to be filled in")
}
