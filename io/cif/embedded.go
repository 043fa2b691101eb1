package cif

import (
	"bytes"
	"math"
	"strings"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

const (
	layoutFixed = "fixed columns"
	layoutFree  = "blanks"
	nestedCIF   = "_iucr_refine_fcf_details"
)

// holdsList knows the data names whose text field holds a whole measured list: by
// common practice of small-cell files all that end in _hkl_file, and one more.
func holdsList(name string) bool {
	low := strings.ToLower(name)
	return strings.HasSuffix(low, "_hkl_file") || low == "_iucr_refine_reflections_details"
}

// embedded reads the reflection lists inside text fields. A list that cannot be
// read keeps its error until it is asked for, since the rest of the file may serve.
func (f *File) embedded() {
	for _, b := range f.Blocks {
		for i := range b.Items {
			name, s := b.Items[i].Name, b.itemSpans[i]
			switch {
			case s.kind != TextField:
			case holdsList(name):
				f.lists = append(f.lists, f.columnText(b, name, s))
			case strings.EqualFold(name, nestedCIF):
				f.nested(b, name, s)
			}
		}
	}
}

// nested reads a CIF that stands in a text field, in place, so that lines count in
// the outer file.
func (f *File) nested(b *Block, name string, s span) {
	data := f.data[:s.end]
	sub := &File{Name: f.Name, Version: f.Version, data: data}
	cls := class
	if f.Version == "2.0" {
		cls = class2
	}
	p := &parser{file: sub, lexer: lexer{name: f.Name, src: text.NewSource(f.Name, nil), data: data, i: s.start,
		class: cls, version: f.Version, warned: map[string]bool{}}}
	err := p.run()
	if err == nil {
		err = p.singles()
	}
	if err != nil {
		l := &list{file: f, block: b, item: name, err: err, plan: &plan{category: &category{name: name}}, twinRow: -1}
		f.lists = append(f.lists, l)
		return
	}
	sub.settle()
	for _, l := range sub.lists {
		l.parent = b
		f.lists = append(f.lists, l)
	}
	f.Warnings = append(f.Warnings, p.warn...)
}

// columnText reads a list by one of two rules, the same for all its rows: fields of
// 4, 4, 4, 8, 8 and perhaps 4 characters, which may touch; else, when a row does
// not fit that, fields apart by blanks. A row of index 0 0 0 ends it.
func (f *File) columnText(b *Block, name string, s span) *list {
	l := f.readLayout(b, name, s, layoutFixed)
	if l.err == nil {
		return l
	}
	return f.readLayout(b, name, s, layoutFree)
}

func (f *File) readLayout(b *Block, name string, s span, layout string) *list {
	p := &plan{category: &category{name: name}}
	p.item[roleH], p.item[roleK], p.item[roleL] = "h", "k", "l"
	p.item[roleIntensity], p.item[roleSigma] = "intensity", "sigma"
	l := &list{file: f, block: b, item: name, layout: layout, plan: p, twinRow: -1, names: []string{"h", "k", "l", "intensity", "sigma"}}
	split := splitFixed
	if layout == layoutFree {
		split = splitFree
	}
	var groups codes
	for at := s.start; at < s.end; {
		line := f.data[at:s.end]
		next := s.end
		if j := bytes.IndexAny(line, "\r\n"); j >= 0 {
			line, next = line[:j], at+j+1
		}
		if len(bytes.TrimSpace(line)) > 0 {
			end, problem := l.addRow(line, at, split, &groups)
			if problem != "" {
				l.err = &Error{File: f.Name, Line: text.Line(f.data, at), Block: b.Code, Item: name,
					Problem: "a row of the list inside the text field " + problem, Remedy: "rows are h k l in 4 characters each, intensity and sigma in 8 each and perhaps a group in 4, or all are apart by blanks"}
				return l
			}
			if end {
				break
			}
		}
		at = next
	}
	l.rows = len(l.raw.H)
	if len(groups.word) > 1 {
		l.scale = groups
		l.names = append(l.names, "group")
	}
	return l
}

func (l *list) addRow(line []byte, at int, split func([]byte) ([6][]byte, string), groups *codes) (end bool, problem string) {
	field, problem := split(line)
	if problem != "" {
		return false, problem
	}
	var hkl [3]int
	for j := range hkl {
		x, ok := text.ParseIndex(field[j])
		if !ok || x < -math.MaxInt16 || x > math.MaxInt16 {
			return false, "has the index " + text.Shown(field[j])
		}
		hkl[j] = x
	}
	if hkl == [3]int{} {
		return true, ""
	}
	var value [2]float64
	for j := range value {
		x, _, ok := text.ParseNumber(field[3+j])
		if !ok {
			return false, "has the value " + text.Shown(field[3+j]) + ", which is not a number"
		}
		value[j] = x
	}
	group := int32(-1)
	if len(field[5]) > 0 {
		x, ok := text.ParseIndex(field[5])
		if !ok {
			return false, "has the group " + text.Shown(field[5])
		}
		if x < 0 && l.twinRow < 0 {
			l.twinRow = len(l.raw.H)
		}
		group = groups.id(field[5])
	}
	r := &l.raw
	r.H, r.K, r.L = append(r.H, int16(hkl[0])), append(r.K, int16(hkl[1])), append(r.L, int16(hkl[2]))
	r.I, r.Sigma = append(r.I, value[0]), append(r.Sigma, value[1])
	groups.of = append(groups.of, group)
	l.marks = append(l.marks, at)
	return false, ""
}

func splitFixed(line []byte) (field [6][]byte, problem string) {
	at := 0
	for j, width := range [6]int{4, 4, 4, 8, 8, 4} {
		end := min(at+width, len(line))
		if at >= end && j < 5 {
			return field, "is too short for fixed columns"
		}
		if at < end {
			field[j] = bytes.Trim(line[at:end], " ")
		}
		at += width
	}
	return field, ""
}

func splitFree(line []byte) (field [6][]byte, problem string) {
	words := bytes.Fields(line)
	if len(words) != 5 && len(words) != 6 {
		return field, "has fields that fit neither fixed columns nor five or six words: " + text.Shown(line)
	}
	copy(field[:], words)
	return field, ""
}

// assumption says what a list inside a text field leaves open.
func (l *list) assumption() intensity.Warning {
	return intensity.Warning{Code: "list-in-text", Where: where(l.file.Name, l.line(0)),
		Text: "the list stands in the text field " + l.item + " and was read by " + l.layout + "; its values are taken as intensities, which the field itself does not say"}
}
