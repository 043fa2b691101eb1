package figure

import (
	"fmt"
	"math"
)

// Style is how a curve is drawn.
type Style int

// Styles. Line is solid; Ghost is dashed and grey: what noise alone would draw;
// Marks draws points with error bars and no line; Joined draws points with error
// bars and a line.
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
// and says so. It fails when there is no panel, when slices of a curve differ in
// length, or when the SVG passes MaxBytes.
func (p *Panels) Draw() (*Figure, error) {
	l, err := p.layout()
	if err != nil {
		return nil, err
	}
	return l.draw(p.Title, p.Desc, p.Panel, l.columns)
}

// Each draws every panel as a figure of its own, with the axes they would share
// in Draw. It fails as Draw does.
func (p *Panels) Each() ([]*Figure, error) {
	l, err := p.layout()
	if err != nil {
		return nil, err
	}
	var out []*Figure
	for _, one := range p.Panel {
		title := p.Title
		if one.Name != "" {
			title += ": " + one.Name
		}
		f, err := l.draw(title, p.Desc, []Panel{one}, 1)
		if err != nil {
			return nil, err
		}
		out = append(out, f)
	}
	return out, nil
}

// layout is what the panels share.
type layout struct {
	p            *Panels
	x, y         *scaler
	columns      int
	w, h         float64
	head, legend float64 // room above the plot
	left         float64
	dotted       bool // points already lie in the plot
}

func (p *Panels) layout() (*layout, error) {
	if len(p.Panel) == 0 {
		return nil, fmt.Errorf("figure: %q has no panel", p.Title)
	}
	for _, one := range p.Panel {
		for _, c := range one.Curves {
			for _, v := range [][]float64{c.Y, c.Lo, c.Hi, c.LoSim, c.HiSim} {
				if v != nil && len(v) != len(c.X) || c.Y == nil && len(c.X) > 0 {
					return nil, fmt.Errorf("figure: curve %q of %q has %d places and %d values", c.Name, p.Title, len(c.X), len(v))
				}
			}
			if (c.Lo == nil) != (c.Hi == nil) || (c.LoSim == nil) != (c.HiSim == nil) {
				return nil, fmt.Errorf("figure: curve %q of %q has half a band", c.Name, p.Title)
			}
		}
	}
	l := &layout{p: p, columns: p.Columns, w: p.Width, h: p.Height}
	if l.columns <= 0 {
		l.columns = min(3, len(p.Panel))
	}
	if l.w <= 0 {
		l.w = [4]float64{0, 720, 360, 310}[min(l.columns, 3)]
	}
	if l.h <= 0 {
		l.h = max(270, 0.52*l.w)
	}
	var xs, ys, bounds [][]float64
	for i := range p.Panel {
		for _, c := range p.Panel[i].Curves {
			xs, ys = append(xs, c.X), append(ys, c.Y)
			bounds = append(bounds, c.Lo, c.Hi, c.LoSim, c.HiSim)
		}
		l.legend = max(l.legend, legendHeight(p.Panel[i].Curves, l.w))
		if p.Panel[i].Name != "" || p.Panel[i].Note != "" {
			l.head = 22
		}
	}
	l.x, l.y = newScaler(p.X, xs, nil), newScaler(p.Y, ys, bounds)
	l.left = p.Y.leftRoom(l.y, l.plotHeight())
	return l, nil
}

func (l *layout) plotHeight() float64 { return l.h - l.top() - footRoom }

func (l *layout) top() float64 {
	top := l.head + l.legend + 10
	if l.p.Y.Label != "" {
		top += 18
	}
	return top
}

func (l *layout) draw(title, desc string, panels []Panel, columns int) (*Figure, error) {
	rows := (len(panels) + columns - 1) / columns
	s := newSheet(float64(columns)*l.w, float64(rows)*l.h)
	for i := range panels {
		l.panel(s, &panels[i], float64(i%columns)*l.w, float64(i/columns)*l.h)
	}
	svg, err := s.finish(title, desc)
	if err != nil {
		return nil, err
	}
	f := &Figure{Title: title, Desc: desc, SVG: svg, Table: l.table(title, panels)}
	for _, n := range []string{l.x.note(l.p.X.name("across")), l.y.note(l.p.Y.name("up"))} {
		if n != "" {
			f.Notes = append(f.Notes, n)
		}
	}
	return f, nil
}

func (a *Axis) name(otherwise string) string {
	if a.Column != "" {
		return a.Column
	}
	if a.Label == "" {
		return otherwise
	}
	return a.Label
}

func (l *layout) frame(x, y float64) *frame {
	return &frame{x0: x + l.left, y0: y + l.top(), x1: x + l.w - 12, y1: y + l.h - footRoom, x: l.x, y: l.y}
}

func (l *layout) panel(s *sheet, p *Panel, x, y float64) {
	f := l.frame(x, y)
	at := y
	if l.head > 0 {
		s.text(nameStyle, x, at+14, p.Name)
		shift := 0.0
		if p.Name != "" {
			shift = width(nameStyle, p.Name) + 10
		}
		s.text(noteStyle, x+shift, at+14, p.Note)
		at += l.head
	}
	s.legend(p.Curves, x, at, l.w)
	s.text(labelY, x, at+l.legend+14, l.p.Y.Label)
	s.axes(f, &l.p.X, &l.p.Y)
	drawn := l.dotted
	for pass := 0; pass < 2; pass++ {
		k := 0
		for i := range p.Curves {
			c := &p.Curves[i]
			t, mark := seriesToken(k), k
			if c.Style == Ghost {
				t = ghostly
			} else {
				k++
			}
			if pass == 0 {
				s.bands(f, c, t)
			} else if s.curve(f, c, t, mark) {
				drawn = true
			}
		}
	}
	if !drawn {
		s.text(style{size: 13, token: muted, anchor: "middle"}, (f.x0+f.x1)/2, (f.y0+f.y1)/2, "nothing to draw")
	}
	s.readers = append(s.readers, reader{f, p.Name, l.p.X.Label, l.p.Y.Label, p.Curves})
}

// bands draws the simultaneous band pale with a fine edge and the pointwise one
// darker, so that both are told apart in grey.
func (s *sheet) bands(f *frame, c *Curve, t int) {
	if c.Style == Marks || c.Style == Joined {
		return
	}
	if c.LoSim != nil {
		outline := f.band(c.X, c.LoSim, c.HiSim)
		s.fill(t, 0.12, outline...)
		s.stroke(pen{token: t, opacity: 0.55, width: 0.8, dash: []float64{1.5, 2}}, f.polyline(c.X, c.LoSim)...)
		s.stroke(pen{token: t, opacity: 0.55, width: 0.8, dash: []float64{1.5, 2}}, f.polyline(c.X, c.HiSim)...)
	}
	if c.Lo != nil {
		s.fill(t, 0.24, f.band(c.X, c.Lo, c.Hi)...)
	}
}

// curve draws line and points; false when no point is inside.
func (s *sheet) curve(f *frame, c *Curve, t, mark int) bool {
	if c.Style != Marks {
		p := pen{token: t, width: 2, dash: dashes[mark%seriesCount]}
		if c.Style == Ghost {
			p = pen{token: t, width: 2, dash: []float64{5, 4}}
		}
		if c.Style == Joined {
			p.width = 1.4
		}
		lines := f.polyline(c.X, c.Y)
		s.stroke(p, lines...)
		if c.Style != Joined {
			return len(lines) > 0
		}
	}
	drawn := false
	for i := range c.X {
		at, ok := f.place(c.X[i], c.Y[i])
		if !ok || !f.holds(at) {
			continue
		}
		drawn = true
		if c.Lo != nil && !math.IsNaN(c.Lo[i]) && !math.IsNaN(c.Hi[i]) {
			a, b := f.py(open(c.Lo[i], -largest)), f.py(open(c.Hi[i], largest))
			if !math.IsNaN(a) && !math.IsNaN(b) {
				s.line(pen{token: t, width: 1.4}, at.x, f.press(a), at.x, f.press(b))
			}
		}
		s.marker(mark, at, 3.6, t)
	}
	return drawn
}
