package figure

// Text of a figure, in CSS pixels.
var (
	nameStyle  = style{size: 13, bold: true, token: ink, anchor: "start"}
	noteStyle  = style{size: 12, token: muted, anchor: "start"}
	tickStyleX = style{size: 12, token: muted, anchor: "middle"}
	tickStyleY = style{size: 12, token: muted, anchor: "end"}
	labelX     = style{size: 12, token: ink, anchor: "end"}
	labelY     = style{size: 12, token: ink, anchor: "start"}
	textStyle  = style{size: 12, token: ink, anchor: "start"}
)

const (
	tickGap  = 92.0 // pixels between marks along x
	tickRise = 34.0 // and along y
	footRoom = 40.0 // below a plot: marks and label of x
)

// marks gives the ticks of an axis: its own when it has any.
func (a *Axis) marks(s *scaler, length, spacing float64) []Mark {
	if a.Marks == nil {
		return s.ticks(length, spacing)
	}
	var out []Mark
	for _, m := range a.Marks {
		if s.within(m.At) {
			out = append(out, m)
		}
	}
	return out
}

// leftRoom is what the labels of the y axis take.
func (a *Axis) leftRoom(s *scaler, length float64) float64 {
	room := 0.0
	for _, m := range a.marks(s, length, tickRise) {
		room = max(room, width(tickStyleY, m.Label))
	}
	return room + 10
}

// axes draws rules, marks and labels of both axes. The label of y stands above
// the plot, where it is read without turning the head.
func (s *sheet) axes(f *frame, x, y *Axis) {
	for _, m := range y.marks(f.y, f.y1-f.y0, tickRise) {
		at := f.py(m.At)
		s.line(pen{token: rule, width: 1}, f.x0, at, f.x1, at)
		s.text(tickStyleY, f.x0-7, at+4, m.Label)
	}
	spacing := tickGap
	if f.x1-f.x0 < 400 {
		spacing = 44
	}
	for _, m := range x.marks(f.x, f.x1-f.x0, spacing) {
		at := f.px(m.At)
		s.line(pen{token: muted, width: 1}, at, f.y1, at, f.y1+5)
		s.text(tickStyleX, at, f.y1+18, m.Label)
	}
	s.line(pen{token: muted, width: 1}, f.x0, f.y1, f.x1, f.y1)
	if y.Zero && f.y.within(0) {
		s.line(pen{token: ink, width: 1.1}, f.x0, f.py(0), f.x1, f.py(0))
	}
	if x.Zero && f.x.within(0) {
		s.line(pen{token: ink, width: 1.1}, f.px(0), f.y0, f.px(0), f.y1)
	}
	s.text(labelX, f.x1, f.y1+34, x.Label)
}
