package figure

import "errors"

// Row is one estimate of a forest plot. A Value that is not finite is written as
// "not estimable"; an end that is infinite is drawn as an arrow. Lead sets the row
// off; Summary draws it as a diamond.
type Row struct {
	Group, Name   string
	Value, Lo, Hi float64
	Note          string
	Lead, Summary bool
}

// Forest is a figure of estimates with intervals, one row each, in groups.
type Forest struct {
	Title, Desc string
	X           Axis
	Rows        []Row
	Width       float64 // CSS pixels; 0 = 720
}

// Draw draws the forest. It fails when there is no row.
func (f *Forest) Draw() (*Figure, error) { return nil, errors.New("figure: not drawn") }
