package figure

import "errors"

// Part is one layer of a stacked figure, parallel to At.
type Part struct {
	Name  string
	Share []float64
}

// Shares is a figure of parts that add up, as areas over At (or as bars when At
// has fewer than three places).
type Shares struct {
	Title, Desc   string
	X, Y          Axis
	At            []float64
	Parts         []Part
	Width, Height float64 // CSS pixels; 0 = 720 by 380
}

// Draw draws the layers, the first at the bottom. Shares that are negative or not
// finite count as 0 and are noted. It fails when lengths differ or there is none.
func (s *Shares) Draw() (*Figure, error) { return nil, errors.New("figure: not drawn") }
