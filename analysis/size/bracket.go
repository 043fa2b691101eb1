package size

import (
	"fmt"
	"math"
)

// BracketEnds holds m by halves of one crystal's own positions, read by one slope (the
// instrument). Lo and Hi reach from the lower end of FromThick to the upper end of
// FromThin, whichever is farther.
//
// With C(p, q) the covariance of the deviations of two positions from any law of strength
// and V the variance of the strengths, the slope from halves of position p lies off m
// by -[C(p, thick) - (1-m) C(p, thin)]/(V + C(p, thin)). Unrelated deviations therefore
// take FromThin up and FromThick down, and the two bracket the truth. Where deviations
// grow with thickness and neighbours share them, as within one wedge, FromThin can
// lie below it too. A curb and an offset, which one slope reads as exchange, raise both. The
// directions are those of one slope: a model with a curb reads the deviations as curb.
type BracketEnds struct {
	FromThin  *Instrument // axis: halves of the thin position; errs upward by its own deviations
	FromThick *Instrument // axis: halves of the thick position; errs downward by its own
	Lo, Hi    float64
}

// Bracket estimates m with each half as the axis, cross-fitted: half A of the
// thin position is the axis for half B against the whole thick position and the
// reverse, and likewise with the halves of the thick position. Thin and thick
// are whole positions on the common scale, NaN where there is none; a
// reflection without a half takes no part where it is needed. Errors as in
// ExchangeWith.
func Bracket(h *Halves, thin, thick []float64, w []float64, set *Settings) (*BracketEnds, error) {
	if _, err := h.check("Bracket", w); err != nil {
		return nil, err
	}
	if len(thin) != len(h.Shell) || len(thick) != len(h.Shell) {
		panic(fmt.Sprintf("size: Bracket: thin has length %d, thick %d, halves %d", len(thin), len(thick), len(h.Shell)))
	}
	leg := func(z, thin, thick []float64) *Input {
		return &Input{Z: z, Thin: absentWithout(z, thin), Thick: thick, Shell: h.Shell, Shells: h.Shells}
	}
	var out BracketEnds
	var err error
	if out.FromThin, err = ExchangeCross([]*Input{leg(h.ThinA, h.ThinB, thick), leg(h.ThinB, h.ThinA, thick)}, w, set); err != nil {
		return nil, fmt.Errorf("axis from halves of the thin position: %w", err)
	}
	if out.FromThick, err = ExchangeCross([]*Input{leg(h.ThickA, thin, h.ThickB), leg(h.ThickB, thin, h.ThickA)}, w, set); err != nil {
		return nil, fmt.Errorf("axis from halves of the thick position: %w", err)
	}
	out.Lo = math.Min(out.FromThick.Lo, out.FromThin.Lo)
	out.Hi = math.Max(out.FromThick.Hi, out.FromThin.Hi)
	return &out, nil
}

// absentWithout marks as absent what has no axis, so that a reflection of a
// single half has the same weight, none, in the shell means of both legs.
func absentWithout(z, v []float64) []float64 {
	out := append([]float64(nil), v...)
	for i := range out {
		if math.IsNaN(z[i]) {
			out[i] = math.NaN()
		}
	}
	return out
}
