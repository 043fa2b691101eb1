package figure

import (
	"fmt"
	"math"
)

// ForestColumn is one column of estimates, such as those of one crystal. Rows of the
// same Group and Name stand on one line in all columns.
type ForestColumn struct {
	Name string
	Rows []Row
}

// ForestColumns is a small multiple of forests: the names of the rows once, then an
// axis a column, all of one range. The interval of the first Lead row of a column is
// drawn pale behind all its rows, so that one sees which of them leave it.
type ForestColumns struct {
	Title, Desc string
	X           Axis
	Columns     []ForestColumn
	Width       float64 // CSS pixels; 0 = 250 and 220 a column
}

// line is one row of all columns: an index into each column's rows, -1 for none.
type line struct {
	group, name string
	at          []int
	lead        bool
}

// lines lists the rows of all columns, each group where its first row stands.
func (f *ForestColumns) lines() []line {
	var order []string
	groups := map[string][]*line{}
	for c := range f.Columns {
		for i := range f.Columns[c].Rows {
			r := &f.Columns[c].Rows[i]
			if _, ok := groups[r.Group]; !ok {
				order = append(order, r.Group)
			}
			// The first line of this name that the column does not fill yet.
			var l *line
			for _, one := range groups[r.Group] {
				if one.name == r.Name && one.at[c] < 0 {
					l = one
					break
				}
			}
			if l == nil {
				l = &line{group: r.Group, name: r.Name, at: make([]int, len(f.Columns))}
				for k := range l.at {
					l.at[k] = -1
				}
				groups[r.Group] = append(groups[r.Group], l)
			}
			l.at[c] = i
			l.lead = l.lead || r.Lead
		}
	}
	var out []line
	for _, g := range order {
		for _, l := range groups[g] {
			out = append(out, *l)
		}
	}
	return out
}

// Draw draws the columns. It fails when no column has a row.
func (f *ForestColumns) Draw() (*Figure, error) {
	lines := f.lines()
	if len(lines) == 0 {
		return nil, fmt.Errorf("figure: %q has no row", f.Title)
	}
	kept := lines[:min(len(lines), forestRows)]
	w := f.Width
	if w <= 0 {
		w = 250 + 220*float64(len(f.Columns))
	}
	var all []Row
	for _, c := range f.Columns {
		all = append(all, c.Rows...)
	}
	one := &Forest{X: f.X}
	x := newScaler(f.X, nil, one.bounds(all))
	places, names, values := decimals(all), 0.0, 0.0
	height, group := 36.0, ""
	for _, l := range kept {
		names = max(names, width(textStyle, l.name))
		if l.group != group {
			names, height, group = max(names, width(nameStyle, l.group)), height+groupHeight, l.group
		}
		height += rowHeight
	}
	for i := range all {
		values = max(values, width(textStyle, valueAlone(&all[i], places)))
	}
	names = min(names+24, 0.4*w)
	each := (w - names) / float64(len(f.Columns))
	s := newSheet(w, height+footRoom+4)
	for c := range f.Columns {
		x0 := names + float64(c)*each
		fr := &frame{x0: x0, y0: 28, x1: x0 + each - values - 24, y1: height, x: x, y: newScaler(Axis{}, nil, nil)}
		s.text(nameStyle, x0, 14, f.Columns[c].Name)
		one.ground(s, fr)
		f.column(s, fr, c, kept, places, x0+each-16)
	}
	y, group := 36.0, ""
	for _, l := range kept {
		if l.group != group {
			group = l.group
			y += groupHeight
			s.text(nameStyle, 0, y-8, group)
		}
		y += rowHeight
		st := textStyle
		st.bold = l.lead
		s.text(st, 8, y-rowHeight/2+4, fit(st, l.name, names-16))
	}
	svg, err := s.finish(f.Title, f.Desc)
	if err != nil {
		return nil, err
	}
	out := &Figure{Title: f.Title, Desc: f.Desc, SVG: svg, Table: f.table()}
	if more := len(lines) - len(kept); more > 0 {
		out.Notes = append(out.Notes, fmt.Sprintf("Rows not drawn, only in the table: %d.", more))
	}
	return out, nil
}

// column draws the estimates of one column, with their values to the left of right.
func (f *ForestColumns) column(s *sheet, fr *frame, c int, lines []line, places int, right float64) {
	rows := f.Columns[c].Rows
	for i := range rows {
		if r := &rows[i]; r.Lead {
			lo, hi := fr.px(open(r.Lo, -largest)), fr.px(open(r.Hi, largest))
			if lo < hi {
				lo, hi = min(max(lo, fr.x0), fr.x1), min(max(hi, fr.x0), fr.x1)
				s.fill(ghostly, 0.16, []point{{lo, fr.y0}, {hi, fr.y0}, {hi, fr.y1}, {lo, fr.y1}})
			}
			break
		}
	}
	y, group := 36.0, ""
	for _, l := range lines {
		if l.group != group {
			group = l.group
			y += groupHeight
		}
		y += rowHeight
		if l.at[c] < 0 {
			continue
		}
		r := &rows[l.at[c]]
		st, t := textStyle, seriesToken(0)
		if r.Lead || r.Summary {
			st.bold, t = true, seriesToken(1)
		}
		st.anchor = "end"
		s.text(st, right, y-rowHeight/2+4, valueAlone(r, places))
		if !math.IsNaN(fr.px(r.Value)) {
			s.estimate(fr, r, y-rowHeight/2, t)
		}
	}
}

// valueAlone is the value alone.
func valueAlone(r *Row, places int) string {
	if math.IsNaN(r.Value) || math.IsInf(r.Value, 0) {
		return "\u2013"
	}
	return fixed(r.Value, places)
}

func (f *ForestColumns) table() *Table {
	t := &Table{Caption: f.Title, Head: []string{"column", "group", "row", f.X.name("value"), "low", "high", "remark"}, Words: []bool{true, true, true, false, false, false, true}}
	for _, c := range f.Columns {
		for _, r := range c.Rows {
			t.Rows = append(t.Rows, []string{c.Name, r.Group, r.Name, Number(r.Value), Number(r.Lo), Number(r.Hi), r.Note})
		}
	}
	return t
}
