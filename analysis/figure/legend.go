package figure

const (
	legendRow    = 18.0
	legendSample = 24.0
)

// named lists the curves that a legend tells apart: none when there is but one.
func named(curves []Curve) []int {
	var out []int
	for i, c := range curves {
		if c.Name != "" {
			out = append(out, i)
		}
	}
	if len(curves) < 2 {
		return nil
	}
	return out
}

// legendPlaces sets the entries in rows of at most w pixels.
func legendPlaces(curves []Curve, w float64) (places []point, height float64) {
	x, y := 0.0, 0.0
	for _, i := range named(curves) {
		need := legendSample + 6 + width(noteStyle, curves[i].Name) + 16
		if x > 0 && x+need > w {
			x, y = 0, y+legendRow
		}
		places = append(places, point{x, y})
		x += need
	}
	if len(places) == 0 {
		return nil, 0
	}
	return places, y + legendRow
}

func legendHeight(curves []Curve, w float64) float64 {
	_, h := legendPlaces(curves, w)
	return h
}

func (s *sheet) legend(curves []Curve, x, y, w float64) {
	places, _ := legendPlaces(curves, w)
	tokens := make([]int, len(curves))
	marks := make([]int, len(curves))
	k := 0
	for i := range curves {
		tokens[i], marks[i] = seriesToken(k), k
		if curves[i].Style == Ghost {
			tokens[i] = ghostly
		} else {
			k++
		}
	}
	for n, i := range named(curves) {
		at := point{x + places[n].x, y + places[n].y + 9}
		c := &curves[i]
		p := pen{token: tokens[i], width: 2, dash: dashes[marks[i]%seriesCount]}
		if c.Style == Ghost {
			p.dash = []float64{5, 4}
		}
		if c.Style != Marks {
			s.line(p, at.x, at.y, at.x+legendSample, at.y)
		}
		if c.Style == Marks || c.Style == Joined {
			s.marker(marks[i], point{at.x + legendSample/2, at.y}, 3.6, tokens[i])
		}
		s.text(noteStyle, at.x+legendSample+6, at.y+4, c.Name)
	}
}
