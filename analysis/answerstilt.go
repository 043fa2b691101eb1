package analysis

import (
	"fmt"
	"math"
)

// tiltNote says what stands in the lines of withinTilt.
const tiltNote = " Last, per 100 nm of path and thicknesses taken as exact: by tilt within the thick position (one slope), and from the thin to the thick position (leading model)."

// withinTilt says, one line a crystal, what a longer way through one position does by its
// tilt, beside what a thicker position does; nil when it is known nowhere. A crystal in
// which the longer way does less, by more than three standard errors of the difference, is
// said to.
func withinTilt(list []TiltSlope) []string {
	var lines []string
	for i := range list {
		x := &list[i]
		if math.IsNaN(x.Slope.Value) {
			continue
		}
		line := fmt.Sprintf("%s by tilt %s; from thin to thick %s", x.Crystal, span(x.Slope.Value, x.Slope.Lo, x.Slope.Hi), span(x.Between.Value, x.Between.Lo, x.Between.Hi))
		// Half widths are 1.96 standard errors.
		if x.Between.Value-x.Slope.Value > 3*math.Hypot(x.Slope.Hi-x.Slope.Lo, x.Between.Hi-x.Between.Lo)/2/zOf(0.95) {
			line += ". The longer way does less than the thicker place: dose, background or bending may have a part in that"
		}
		lines = append(lines, line)
	}
	return lines
}
