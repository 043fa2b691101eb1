package figure

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// Row is one estimate of a forest plot. A Value that is not finite is written as
// "not estimable"; an end that is infinite is drawn as an arrow. Lead sets the row
// off; Summary draws it as a diamond as wide as its interval.
type Row struct {
	Group, Name   string
	Value, Lo, Hi float64
	Note          string
	Lead, Summary bool
	// Target, when HasTarget is set, is where the value should lie: a dashed tick.
	Target    float64
	HasTarget bool
}

// Forest is a figure of estimates with intervals, one row each, in groups. Zero
// of the axis X draws the line of no effect.
type Forest struct {
	Title, Desc string
	X           Axis
	Rows        []Row
	Width       float64 // CSS pixels; 0 = 720
}

// forestRows bounds the rows of one figure; those beyond it are counted.
const forestRows = 120

const (
	rowHeight   = 21.0
	groupHeight = 25.0
)

// Draw draws the forest. It fails when there is no row.
func (f *Forest) Draw() (*Figure, error) {
	if len(f.Rows) == 0 {
		return nil, fmt.Errorf("figure: %q has no row", f.Title)
	}
	rows := f.Rows[:min(len(f.Rows), forestRows)]
	w := f.Width
	if w <= 0 {
		w = 720
	}
	x := newScaler(f.X, nil, f.bounds(rows))
	var names, values float64
	labels := make([]string, len(rows))
	height, group, places := 14.0, "", decimals(rows)
	for i, r := range rows {
		labels[i] = interval(&r, places)
		st := textStyle
		st.bold = r.Lead || r.Summary
		names, values = max(names, width(st, r.Name)), max(values, width(st, labels[i]))
		if r.Group != group {
			names, height, group = max(names, width(nameStyle, r.Group)), height+groupHeight, r.Group
		}
		height += rowHeight
	}
	names, values = min(names+24, 0.42*w), min(values+28, 0.38*w)
	s := newSheet(w, height+footRoom+4)
	fr := &frame{x0: names, y0: 6, x1: w - values, y1: height, x: x, y: newScaler(Axis{}, nil, nil)}
	f.ground(s, fr)
	f.rows(s, fr, rows, labels)
	svg, err := s.finish(f.Title, f.Desc)
	if err != nil {
		return nil, err
	}
	out := &Figure{Title: f.Title, Desc: f.Desc, SVG: svg, Table: f.table()}
	if more := len(f.Rows) - len(rows); more > 0 {
		out.Notes = append(out.Notes, fmt.Sprintf("Rows not drawn, only in the table: %d.", more))
	}
	return out, nil
}

// bounds are the values and ends that set the range; an end further from the
// values than four times their spread would press everything together and is
// drawn as an arrow instead.
func (f *Forest) bounds(rows []Row) [][]float64 {
	var values []float64
	for _, r := range rows {
		if !math.IsNaN(r.Value) && !math.IsInf(r.Value, 0) {
			values = append(values, r.Value)
		}
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for _, v := range values {
		lo, hi = min(lo, v), max(hi, v)
	}
	narrow := math.Inf(1)
	for _, r := range rows {
		if w := r.Hi - r.Lo; w > 0 {
			narrow = min(narrow, w)
		}
	}
	reach := 4*(hi-lo) + 6*narrow
	var ends, targets []float64
	for _, r := range rows {
		if r.HasTarget {
			targets = append(targets, r.Target)
		}
		for _, e := range []float64{r.Lo, r.Hi} {
			if e > lo-reach && e < hi+reach {
				ends = append(ends, e)
			}
		}
	}
	return [][]float64{values, ends, targets}
}

func (f *Forest) ground(s *sheet, fr *frame) {
	for _, m := range f.X.marks(fr.x, fr.x1-fr.x0, 64) {
		at := fr.px(m.At)
		s.line(pen{token: rule, width: 1}, at, fr.y0, at, fr.y1)
		s.text(tickStyleX, at, fr.y1+18, m.Label)
	}
	s.line(pen{token: muted, width: 1}, fr.x0, fr.y1, fr.x1, fr.y1)
	if f.X.Zero && fr.x.within(0) {
		s.line(pen{token: ink, width: 1.1}, fr.px(0), fr.y0, fr.px(0), fr.y1)
	}
	s.text(labelX, fr.x1, fr.y1+35, f.X.Label)
}

func (f *Forest) rows(s *sheet, fr *frame, rows []Row, labels []string) {
	y, group := 14.0, ""
	for i, r := range rows {
		if r.Group != group {
			group = r.Group
			y += groupHeight
			s.text(nameStyle, 0, y-8, group)
		}
		y += rowHeight
		mid := y - rowHeight/2
		st := textStyle
		t := seriesToken(0)
		if r.Lead || r.Summary {
			st.bold = true
			t = seriesToken(1)
		}
		s.text(st, 8, mid+4, fit(st, r.Name, fr.x0-16))
		st.anchor = "end"
		s.text(st, s.w-1, mid+4, labels[i])
		if math.IsNaN(fr.px(r.Value)) {
			continue
		}
		if r.HasTarget && fr.x.within(r.Target) {
			at := fr.px(r.Target)
			s.line(pen{token: ink, width: 1.4, dash: []float64{3, 2}}, at, mid-9, at, mid+9)
		}
		s.estimate(fr, &r, mid, t)
	}
}

// estimate draws one interval with its value. Lead and Summary differ from the
// others in shape as well as in colour.
func (s *sheet) estimate(fr *frame, r *Row, y float64, t int) {
	press := func(v float64) float64 { return min(max(v, fr.x0), fr.x1) }
	at := press(fr.px(r.Value))
	lo, hi := at, at
	if !math.IsNaN(r.Lo) && !math.IsNaN(r.Hi) {
		lo, hi = fr.px(open(r.Lo, -largest)), fr.px(open(r.Hi, largest))
	}
	if math.IsNaN(lo) || math.IsNaN(hi) {
		lo, hi = at, at
	}
	if r.Summary {
		lo, hi = press(lo), press(hi)
		s.fill(t, 1, []point{{lo, y}, {at, y - 6}, {hi, y}, {at, y + 6}})
		return
	}
	p := pen{token: t, width: 1.6}
	s.line(p, press(lo), y, press(hi), y)
	for _, end := range []struct{ v, sign float64 }{{lo, -1}, {hi, 1}} {
		x := press(end.v)
		if x != end.v {
			s.stroke(p, []point{{x - 4*end.sign, y - 4}, {x, y}, {x - 4*end.sign, y + 4}})
		} else if lo != hi {
			s.line(p, x, y-3, x, y+3)
		}
	}
	mark := 0
	if r.Lead {
		mark = 1
	}
	s.marker(mark, point{at, y}, 4, t)
}

// fit shortens a text to a length in pixels.
func fit(st style, text string, room float64) string {
	if width(st, text) <= room {
		return text
	}
	runes := []rune(text)
	for n := len(runes) - 1; n > 0; n-- {
		if short := string(runes[:n]) + "\u2026"; width(st, short) <= room {
			return short
		}
	}
	return ""
}

// decimals gives the narrowest interval two digits that matter.
func decimals(rows []Row) int {
	narrow := math.Inf(1)
	for _, r := range rows {
		if w := r.Hi - r.Lo; w > 0 {
			narrow = min(narrow, w)
		}
	}
	if math.IsInf(narrow, 1) {
		return 3
	}
	return min(max(1-int(math.Floor(math.Log10(narrow))), 0), 6)
}

func interval(r *Row, places int) string {
	if math.IsNaN(r.Value) || math.IsInf(r.Value, 0) {
		return "not estimable"
	}
	if math.IsNaN(r.Lo) || math.IsNaN(r.Hi) {
		return fixed(r.Value, places)
	}
	return fixed(r.Value, places) + " (" + fixed(r.Lo, places) + " to " + fixed(r.Hi, places) + ")"
}

func fixed(v float64, places int) string {
	if math.IsInf(v, 0) || math.Abs(v) >= 1e6 {
		return Number(v)
	}
	t := strconv.FormatFloat(v, 'f', places, 64)
	if strings.Trim(t, "-0.") == "" {
		t = strings.TrimPrefix(t, "-")
	}
	return minus(t)
}

func (f *Forest) table() *Table {
	t := &Table{Caption: f.Title, Head: []string{"group", "row", f.X.name("value"), "low", "high", "remark"}, Words: []bool{true, true, false, false, false, true}}
	for _, r := range f.Rows {
		t.Rows = append(t.Rows, []string{r.Group, r.Name, Number(r.Value), Number(r.Lo), Number(r.Hi), r.Note})
	}
	return t
}
