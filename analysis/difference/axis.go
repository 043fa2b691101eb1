package difference

import "fmt"

// Axis names a way of saying how strong a reflection is.
type Axis int

const (
	// AxisCrystals is the merged strength in the other crystals of the series:
	// it shares no noise with the difference, and no geometry unless the crystals lay
	// alike.
	AxisCrystals Axis = iota
	// AxisHalfThin is half of the thin position, by raw index, with the
	// difference taken from the other half; the slope read off it errs upward where the
	// position's deviations are its own.
	AxisHalfThin
	// AxisHalfThick is the same with the thick position; its slope errs downward.
	AxisHalfThick
	// AxisThird is another position of the same crystal; it shares the crystal's
	// own deviations.
	AxisThird
	// AxisInverseVariance is the inverse-variance mean of the pair, safe only
	// when the ratio of the two variances is right.
	AxisInverseVariance
	// AxisThin is the thin intensity itself.
	AxisThin
	// AxisThick is the thick intensity itself.
	AxisThick
	// AxisMean is the plain mean of both.
	AxisMean
)

var axisNames = [...]string{"crystals", "half-thin", "half-thick", "third", "inverse-variance", "thin", "thick", "mean"}

// String returns the word used in files and reports.
func (a Axis) String() string {
	if a < 0 || int(a) >= len(axisNames) {
		return fmt.Sprintf("Axis(%d)", int(a))
	}
	return axisNames[a]
}

// ParseAxis reads what String writes.
func ParseAxis(word string) (Axis, error) {
	for a, name := range axisNames {
		if name == word {
			return Axis(a), nil
		}
	}
	return 0, fmt.Errorf("axis %q is none of %q", word, axisNames)
}

// Naive reports whether noise of the difference enters the axis.
func (a Axis) Naive() bool { return a == AxisThin || a == AxisThick || a == AxisMean }
