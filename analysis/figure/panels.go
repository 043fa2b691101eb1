package figure

import "errors"

// Style is how a curve is drawn.
type Style int

// Styles. Line is solid; Ghost is dashed and grey: what noise alone would draw;
// Marks draws points with error bars and no line; Joined draws points with error
// bars and a thin line.
const (
	Line Style = iota
	Ghost
	Marks
	Joined
)

// Curve is one curve, all slices parallel to X or nil. Lo and Hi are the
// pointwise band (error bars for Marks and Joined), LoSim and HiSim the
// simultaneous one. Points that are not finite break the curve.
type Curve struct {
	Name         string
	X, Y, Lo, Hi []float64
	LoSim, HiSim []float64
	Style        Style
}

// Panel is one small plot with its curves.
type Panel struct {
	Name   string // above the panel, "L1"
	Note   string // beside the name, "p < 0.001"
	Curves []Curve
}

// Panels is a figure of small multiples that share both axes.
type Panels struct {
	Title, Desc   string
	X, Y          Axis
	Panel         []Panel
	Columns       int     // 0 = up to three
	Width, Height float64 // of one panel in CSS pixels; 0 = by the number of columns
}

// Draw draws all panels in one figure. A panel without a point is drawn empty
// and says so. It fails when there is no panel or when slices of a curve differ
// in length.
func (p *Panels) Draw() (*Figure, error) { return nil, errors.New("figure: not drawn") }

// Each draws every panel as a figure of its own, with the axes they would share
// in Draw.
func (p *Panels) Each() ([]*Figure, error) { return nil, errors.New("figure: not drawn") }
