package analysis

import (
	"errors"
	"fmt"
	"slices"
	"strings"

	"thinward/analysis/difference"
)

// leadAxes are the words that Settings.Axis takes, beside "".
var leadAxes = []string{
	leadCrystals, leadBracket, difference.AxisThird.String(), difference.AxisInverseVariance.String(),
	difference.AxisThin.String(), difference.AxisThick.String(), difference.AxisMean.String(),
}

// CheckAxis returns an error when Axis is none of the words that its comment lists, nil
// for nil settings. Whether a series has what the axis needs is not looked at.
func (s *Settings) CheckAxis() error {
	if s == nil || s.Axis == "" || slices.Contains(leadAxes, s.Axis) {
		return nil
	}
	return fmt.Errorf("axis %q is not known: use %s or %s", s.Axis, strings.Join(leadAxes[:len(leadAxes)-1], ", "), leadAxes[len(leadAxes)-1])
}

// checkAxis refuses an axis that no contrast of the series can have.
func (s *Series) checkAxis(set *Settings) error {
	if err := set.CheckAxis(); err != nil {
		return err
	}
	if set != nil && set.Axis == leadCrystals && len(s.Crystals) < 2 {
		return errors.New("the axis crystals needs a second crystal: leave axis empty, or use bracket")
	}
	return nil
}
