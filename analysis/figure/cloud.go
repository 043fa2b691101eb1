package figure

import (
	"fmt"
	"math"
)

// CloudPoints is the number of points above which a cloud is drawn as hexagons
// of counts.
const CloudPoints = 2000

// Cloud is a figure of many points, each point up to CloudPoints of them and
// hexagons shaded by the logarithm of their count above. Over lies on top. Points
// outside fixed ends of an axis are left out and counted.
type Cloud struct {
	Title, Desc   string
	Name, Note    string
	X, Y          Axis
	PX, PY        []float64
	Over          []Curve
	Width, Height float64 // CSS pixels; 0 = 720 by 420
}

// Place is where a point of a cloud was drawn, in pixels of the figure.
type Place struct{ X, Y float64 }

// Draw draws the cloud. It fails when PX and PY differ in length.
func (c *Cloud) Draw() (*Figure, error) {
	f, _, err := c.DrawPlaces()
	return f, err
}

// DrawPlaces draws the cloud and tells where each point lies; NaN for a point
// that is not drawn.
func (c *Cloud) DrawPlaces() (*Figure, []Place, error) {
	if len(c.PX) != len(c.PY) {
		return nil, nil, fmt.Errorf("figure: cloud %q has %d and %d coordinates", c.Title, len(c.PX), len(c.PY))
	}
	w, h := c.Width, c.Height
	if w <= 0 {
		w = 720
	}
	if h <= 0 {
		h = 420
	}
	p := &Panels{Title: c.Title, Desc: c.Desc, X: c.X, Y: c.Y, Panel: []Panel{{Name: c.Name, Note: c.Note, Curves: c.Over}}, Columns: 1, Width: w, Height: h}
	l, err := p.layout()
	if err != nil {
		return nil, nil, err
	}
	xs, ys := [][]float64{c.PX}, [][]float64{c.PY}
	for _, o := range c.Over {
		xs, ys = append(xs, o.X), append(ys, o.Y)
	}
	l.x, l.y = newScaler(c.X, xs, nil), newScaler(c.Y, ys, nil)
	l.left = c.Y.leftRoom(l.y, l.plotHeight())
	s := newSheet(w, h)
	fr := l.frame(0, 0)
	places := make([]Place, len(c.PX))
	var inside []point
	for i := range c.PX {
		at, ok := fr.place(c.PX[i], c.PY[i])
		if !ok || !fr.holds(at) {
			places[i] = Place{math.NaN(), math.NaN()}
			continue
		}
		places[i] = Place{near(at.x), near(at.y)}
		inside = append(inside, at)
	}
	legend := l.under(s, fr, inside)
	l.panel(s, &p.Panel[0], 0, 0)
	svg, err := s.finish(c.Title, c.Desc)
	if err != nil {
		return nil, nil, err
	}
	f := &Figure{Title: c.Title, Desc: c.Desc, SVG: svg, Table: l.table(c.Title, p.Panel)}
	if out := len(c.PX) - len(inside); out > 0 {
		f.Notes = append(f.Notes, fmt.Sprintf("Points outside the axes or without a place on them, not drawn: %d of %d.", out, len(c.PX)))
	}
	if legend != "" {
		f.Notes = append(f.Notes, legend)
	}
	return f, places, nil
}

// under draws the points below everything else; for hexagons it returns what the
// shades mean.
func (l *layout) under(s *sheet, f *frame, points []point) string {
	l.dotted = len(points) > 0
	if len(points) > CloudPoints {
		return s.hexagons(f, points)
	}
	var dots [][]point
	for _, p := range points {
		dots = append(dots, []point{{p.x - 1.1, p.y}, {p.x + 1.1, p.y}})
	}
	s.stroke(pen{token: ghostly, opacity: 0.75, width: 2.2}, dots...)
	return ""
}

// hexLevels is the number of shades.
const hexLevels = 5

// hexagons counts points in hexagons of a fixed size and shades by the logarithm
// of the count (Carr, Littlefield, Nicholson and Littlefield, 1987).
func (s *sheet) hexagons(f *frame, points []point) string {
	const r = 5.5 // from centre to corner, pixels
	dx, dy := math.Sqrt(3)*r, 1.5*r
	counts := map[[2]int]int{}
	top := 0
	for _, p := range points {
		key := hexOf(p.x-f.x0, p.y-f.y0, dx, dy)
		counts[key]++
		top = max(top, counts[key])
	}
	rows, columns := int((f.y1-f.y0)/dy)+2, int((f.x1-f.x0)/dx)+2
	edges := make([]int, hexLevels+1)
	for k := range edges {
		edges[k] = int(math.Ceil(math.Pow(float64(top+1), float64(k)/hexLevels) - 1e-9))
	}
	text := "Shades of the hexagons, points each:"
	var ranges []string
	for k := 0; k < hexLevels; k++ {
		var parts [][]point
		for j := -1; j <= rows; j++ {
			for i := -1; i <= columns; i++ {
				n := counts[[2]int{i, j}]
				if n == 0 || n < edges[k] || n >= edges[k+1] {
					continue
				}
				parts = append(parts, hexagon(f, i, j, dx, dy, r))
			}
		}
		s.fill(ghostly, 0.16+0.84*float64(k)/(hexLevels-1), parts...)
		if edges[k+1] > edges[k] {
			ranges = append(ranges, fmt.Sprintf(" %d to %d", edges[k], edges[k+1]-1))
		}
	}
	for i, g := range ranges {
		if i > 0 {
			text += ","
		}
		text += g
	}
	return text + " (pale to dark)."
}

// hexOf finds the hexagon whose centre is nearest.
func hexOf(x, y, dx, dy float64) [2]int {
	best, at := math.Inf(1), [2]int{}
	j0 := int(math.Floor(y / dy))
	for j := j0; j <= j0+1; j++ {
		shift := 0.0
		if j%2 != 0 {
			shift = dx / 2
		}
		i := int(math.Round((x - shift) / dx))
		cx, cy := float64(i)*dx+shift, float64(j)*dy
		if d := (x-cx)*(x-cx) + (y-cy)*(y-cy); d < best {
			best, at = d, [2]int{i, j}
		}
	}
	return at
}

func hexagon(f *frame, i, j int, dx, dy, r float64) []point {
	x, y := f.x0+float64(i)*dx, f.y0+float64(j)*dy
	if j%2 != 0 {
		x += dx / 2
	}
	out := make([]point, 6)
	for k := range out {
		sin, cos := math.Sincos(math.Pi/6 + float64(k)*math.Pi/3)
		out[k] = point{min(max(x+r*cos, f.x0), f.x1), f.press(y + r*sin)}
	}
	return out
}
