package figure

import (
	"fmt"
	"math"
)

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

// shadeOf gives neighbouring layers different lightness, so that they are told
// apart in grey.
var shadeOf = [seriesCount]float64{0.85, 0.35, 0.65, 0.2, 0.75, 0.45}

// Draw draws the layers, the first at the bottom. Shares that are negative or not
// finite count as 0 and are noted. It fails when lengths differ or there is none.
func (s *Shares) Draw() (*Figure, error) {
	if len(s.Parts) == 0 || len(s.At) == 0 {
		return nil, fmt.Errorf("figure: %q has no part", s.Title)
	}
	odd := 0
	sums := [][]float64{make([]float64, len(s.At))}
	for _, p := range s.Parts {
		if len(p.Share) != len(s.At) {
			return nil, fmt.Errorf("figure: part %q of %q has %d values for %d places", p.Name, s.Title, len(p.Share), len(s.At))
		}
		next := make([]float64, len(s.At))
		for i, v := range p.Share {
			if !(v >= 0) || v > largest {
				v = 0
				odd++
			}
			next[i] = sums[len(sums)-1][i] + v
		}
		sums = append(sums, next)
	}
	w, h := s.Width, s.Height
	if w <= 0 {
		w = 720
	}
	if h <= 0 {
		h = 380
	}
	yAxis := s.Y
	yAxis.Zero = true
	l := &layout{p: &Panels{X: s.X, Y: yAxis}, columns: 1, w: w, h: h}
	_, l.legend = s.places(w)
	l.x, l.y = newScaler(s.X, [][]float64{s.At}, nil), newScaler(yAxis, sums, nil)
	if len(s.At) > 2 && !(s.X.Lo < s.X.Hi) && l.x.left == 0 {
		l.x.lo, l.x.hi = s.At[0], s.At[0]
		for _, v := range s.At {
			l.x.lo, l.x.hi = min(l.x.lo, v), max(l.x.hi, v)
		}
		if l.x.lo == l.x.hi {
			l.x = newScaler(s.X, [][]float64{s.At}, nil)
		}
	}
	l.left = yAxis.leftRoom(l.y, l.plotHeight())
	sh := newSheet(w, h)
	fr := l.frame(0, 0)
	s.layers(sh, fr, sums)
	s.key(sh, w)
	sh.text(labelY, 0, l.legend+14, s.Y.Label)
	sh.axes(fr, &s.X, &yAxis)
	svg, err := sh.finish(s.Title, s.Desc)
	if err != nil {
		return nil, err
	}
	f := &Figure{Title: s.Title, Desc: s.Desc, SVG: svg, Table: s.table()}
	if odd > 0 {
		f.Notes = append(f.Notes, fmt.Sprintf("Shares that are negative or not finite, drawn as 0: %d.", odd))
	}
	if n := l.x.note(s.X.name("across")); n != "" {
		f.Notes = append(f.Notes, n)
	}
	return f, nil
}

func (s *Shares) layers(sh *sheet, fr *frame, sums [][]float64) {
	for k := range s.Parts {
		var parts [][]point
		if len(s.At) > 2 {
			parts = fr.band(s.At, sums[k], sums[k+1])
		} else {
			half := min(60, (fr.x1-fr.x0)/5)
			for i, x := range s.At {
				a, ok := fr.place(x, sums[k][i])
				if !ok {
					continue
				}
				left, right := max(a.x-half, fr.x0), min(a.x+half, fr.x1)
				top := fr.press(fr.py(sums[k+1][i]))
				bottom := fr.press(a.y)
				parts = append(parts, []point{{left, bottom}, {right, bottom}, {right, top}, {left, top}})
			}
		}
		sh.fill(seriesToken(k), shadeOf[k%seriesCount], parts...)
		for _, p := range parts {
			sh.stroke(pen{token: paper, width: 1}, append(append([]point{}, p...), p[0]))
		}
	}
}

func (s *Shares) places(w float64) ([]point, float64) {
	var c []Curve
	for _, p := range s.Parts {
		c = append(c, Curve{Name: p.Name})
	}
	if len(c) == 1 {
		return nil, 0
	}
	return legendPlaces(c, w)
}

func (s *Shares) key(sh *sheet, w float64) {
	places, _ := s.places(w)
	n := 0
	for k, p := range s.Parts {
		if p.Name == "" || n >= len(places) {
			continue
		}
		x, y := places[n].x, places[n].y+3
		n++
		sh.fill(seriesToken(k), shadeOf[k%seriesCount], []point{{x, y}, {x + 18, y}, {x + 18, y + 12}, {x, y + 12}})
		sh.text(noteStyle, x+legendSample+6, y+10, p.Name)
	}
}

func (s *Shares) table() *Table {
	t := &Table{Caption: s.Title, Head: []string{s.X.name("at")}, Words: []bool{false}}
	for _, p := range s.Parts {
		t.Head, t.Words = append(t.Head, p.Name), append(t.Words, false)
	}
	for _, i := range thin(s.At, tableRows) {
		row := []string{Number(s.At[i])}
		for _, p := range s.Parts {
			v := math.NaN()
			if i < len(p.Share) {
				v = p.Share[i]
			}
			row = append(row, Number(v))
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}
