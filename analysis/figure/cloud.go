package figure

import "errors"

// CloudPoints is the number of points above which a cloud is drawn as hexagons
// of counts.
const CloudPoints = 2000

// Cloud is a figure of many points, each point up to CloudPoints of them and
// hexagons shaded by the logarithm of their count above. Over lies on top.
type Cloud struct {
	Title, Desc   string
	X, Y          Axis
	PX, PY        []float64
	Over          []Curve
	Width, Height float64 // CSS pixels; 0 = 720 by 420
}

// Draw draws the cloud. It fails when PX and PY differ in length.
func (c *Cloud) Draw() (*Figure, error) { return nil, errors.New("figure: not drawn") }
