package figure

import (
	"image/color"
	"math"
	"sync"

	xfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/font/liberation"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/vgsvg"
)

// sheet is the paper of one figure: lengths in CSS pixels, y downward. It keeps
// what the SVG writer cannot carry: where a text is anchored, and the readers.
type sheet struct {
	w, h    float64
	canvas  *vgsvg.Canvas
	anchors []string
	readers []reader
	notes   []string
}

type pen struct {
	token   int
	opacity float64 // 0 = 1
	width   float64
	dash    []float64
}

type point struct{ x, y float64 }

type style struct {
	size   float64
	bold   bool
	token  int
	anchor string // start, middle or end
}

var faces = sync.OnceValue(func() *font.Cache { return font.NewCache(liberation.Collection()) })

func face(s style) font.Face {
	f := font.Font{Typeface: "Liberation", Variant: "Sans"}
	if s.bold {
		f.Weight = xfont.WeightBold
	}
	return faces().Lookup(f, vg.Points(s.size))
}

func newSheet(w, h float64) *sheet {
	return &sheet{w: w, h: h, canvas: vgsvg.New(vg.Points(w), vg.Points(h))}
}

// near rounds to a tenth of a pixel: finer places only make the file longer.
func near(v float64) float64 { return math.Round(v*10) / 10 }

func (s *sheet) vg(p point) vg.Point {
	return vg.Point{X: vg.Points(near(p.x)), Y: vg.Points(near(s.h - p.y))}
}

func shade(token int, opacity float64) color.Color {
	if opacity == 0 {
		opacity = 1
	}
	return standIn{token, opacity}
}

func (s *sheet) set(p pen) {
	s.canvas.SetColor(shade(p.token, p.opacity))
	s.canvas.SetLineWidth(vg.Points(p.width))
	var d []vg.Length
	for _, v := range p.dash {
		d = append(d, vg.Points(v))
	}
	s.canvas.SetLineDash(d, 0)
}

func (s *sheet) path(parts [][]point, closed bool) vg.Path {
	var out vg.Path
	for _, part := range parts {
		for i, p := range part {
			if i == 0 {
				out.Move(s.vg(p))
			} else {
				out.Line(s.vg(p))
			}
		}
		if closed && len(part) > 0 {
			out.Close()
		}
	}
	return out
}

func (s *sheet) stroke(p pen, parts ...[]point) {
	if path := s.path(parts, false); len(path) > 1 {
		s.set(p)
		s.canvas.Stroke(path)
	}
}

func (s *sheet) line(p pen, x0, y0, x1, y1 float64) { s.stroke(p, []point{{x0, y0}, {x1, y1}}) }

func (s *sheet) fill(token int, opacity float64, parts ...[]point) {
	if path := s.path(parts, true); len(path) > 2 {
		s.canvas.SetColor(shade(token, opacity))
		s.canvas.Fill(path)
	}
}

func (s *sheet) text(st style, x, y float64, str string) {
	if str == "" {
		return
	}
	s.canvas.SetColor(shade(st.token, 1))
	s.canvas.FillString(face(st), s.vg(point{x, y}), str)
	s.anchors = append(s.anchors, st.anchor)
}

// width is the length of a text, a little on the safe side since pages set their
// own fonts.
func width(st style, str string) float64 {
	f := face(st)
	return 1.12 * f.Width(str).Points()
}

// markers belong to the series in turn.
func (s *sheet) marker(i int, at point, r float64, token int) {
	c := draw.NewCanvas(s.canvas, vg.Points(s.w), vg.Points(s.h))
	shapes := [seriesCount]draw.GlyphDrawer{draw.CircleGlyph{}, draw.BoxGlyph{}, draw.PyramidGlyph{}, diamond{}, draw.PlusGlyph{}, draw.CrossGlyph{}}
	s.canvas.SetLineDash(nil, 0)
	c.DrawGlyph(draw.GlyphStyle{Color: shade(token, 1), Radius: vg.Points(r), Shape: shapes[i%seriesCount]}, s.vg(at))
}

type diamond struct{}

// DrawGlyph fills a square that stands on a corner.
func (diamond) DrawGlyph(c *draw.Canvas, sty draw.GlyphStyle, at vg.Point) {
	r := sty.Radius * 1.25
	var p vg.Path
	p.Move(vg.Point{X: at.X, Y: at.Y + r})
	p.Line(vg.Point{X: at.X + r, Y: at.Y})
	p.Line(vg.Point{X: at.X, Y: at.Y - r})
	p.Line(vg.Point{X: at.X - r, Y: at.Y})
	p.Close()
	c.SetColor(sty.Color)
	c.Fill(p)
}
