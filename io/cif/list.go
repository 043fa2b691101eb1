package cif

import (
	"math"
	"slices"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

const rowsPerMark = 1024

// list is one reflection list in columns. NaN, text.NullIndex and text.NullFrame
// mark nulls.
type list struct {
	file    *File
	block   *Block
	plan    *plan
	names   []string
	rows    int
	raw     intensity.Columns
	status  []uint8
	scale   codes
	dataSet codes
	marks   []int // offset of every rowsPerMark-th row
	nulls   int
	plainSU int               // s.u. read from parentheses
	fold    int               // rows made of one row of the file when not 1
	mate    intensity.Columns // I and Sigma of Friedel mates, until unfold
	count   mateCount
	odd     string

	// Of a list inside a text field:
	item    string
	layout  string
	twinRow int    // row of the first negative group number, -1 for none
	parent  *Block // the block around a CIF inside a text field
	err     error  // why it cannot be read
}

const (
	statusKeep uint8 = iota
	statusAbsent
	statusUnreliable
	statusAmplitude // a negative structure amplitude
	statusRepeated  // a Friedel mate that is the same measurement
)

const noFrame = -1

// codes is a column of words kept as small numbers; -1 is none.
type codes struct {
	of   []int32
	word []string
	at   map[string]int32
	last string
	lid  int32
}

func (c *codes) id(word []byte) int32 {
	if string(word) == c.last && c.at != nil {
		return c.lid
	}
	if c.at == nil {
		c.at = map[string]int32{}
	}
	id, ok := c.at[string(word)]
	if !ok {
		id = int32(len(c.word))
		c.word = append(c.word, string(word))
		c.at[c.word[id]] = id
	}
	c.last, c.lid = c.word[id], id
	return id
}

func (c *codes) sets() []Set {
	if len(c.word) == 0 {
		return nil
	}
	out := make([]Set, len(c.word))
	for i, w := range c.word {
		out[i].Code = w
	}
	for _, id := range c.of {
		if id >= 0 {
			out[id].Rows++
		}
	}
	return out
}

// grow makes room for n rows in every column the plan uses.
func (l *list) grow(n int) {
	has := func(r role) bool { return l.plan.item[r] != "" }
	l.raw.H, l.raw.K, l.raw.L = text.Grown(l.raw.H, n), text.Grown(l.raw.K, n), text.Grown(l.raw.L, n)
	l.raw.I, l.raw.Sigma = text.Grown(l.raw.I, n), text.Grown(l.raw.Sigma, n)
	if has(rolePhi) {
		l.raw.Phi = text.Grown(l.raw.Phi, n)
	}
	if has(rolePartiality) {
		l.raw.Partiality = text.Grown(l.raw.Partiality, n)
	}
	if has(roleFrame) || has(roleScaleGroup) {
		l.raw.Frame = text.Grown(l.raw.Frame, n)
	}
	if has(roleScaleGroup) || has(roleScaleSet) {
		l.scale.of = text.Grown(l.scale.of, n)
	}
	if has(roleDataSet) {
		l.dataSet.of = text.Grown(l.dataSet.of, n)
	}
	if has(roleStatus) || l.plan.amplitude {
		l.status = text.Grown(l.status, n)
	}
	l.growMates(n)
}

// finish cuts the columns to n rows and turns amplitudes into intensities.
func (l *list) finish(n int) {
	l.rows = n
	r := &l.raw
	r.H, r.K, r.L = text.Cut(r.H, n), text.Cut(r.K, n), text.Cut(r.L, n)
	r.I, r.Sigma, r.Phi, r.Partiality = text.Cut(r.I, n), text.Cut(r.Sigma, n), text.Cut(r.Phi, n), text.Cut(r.Partiality, n)
	r.Frame, l.status = text.Cut(r.Frame, n), text.Cut(l.status, n)
	l.scale.of, l.dataSet.of = text.Cut(l.scale.of, n), text.Cut(l.dataSet.of, n)
	l.mate.I, l.mate.Sigma = text.Cut(l.mate.I, n), text.Cut(l.mate.Sigma, n)
	l.unfold()
	if !l.plan.amplitude {
		return
	}
	for i, f := range r.I {
		if f < 0 {
			l.status[i] = statusAmplitude
		}
		r.I[i], r.Sigma[i] = f*f, 2*f*r.Sigma[i]
	}
}

// offset returns where row i begins, from the nearest mark before it.
func (l *list) offset(i int) int {
	i /= max(1, l.fold)
	at := l.marks[i/rowsPerMark]
	x := lexer{name: l.file.Name, src: text.NewSource("", nil), data: l.file.data, i: at, class: class, version: l.file.Version, warned: map[string]bool{}}
	if l.file.Version == "2.0" {
		x.class = class2
	}
	for skip := i % rowsPerMark * len(l.names); ; skip-- {
		t, err := x.next()
		if err != nil {
			return at
		}
		at = t.at
		if skip == 0 {
			return at
		}
	}
}

func (l *list) line(i int) int {
	if l.item != "" {
		return text.Line(l.file.data, l.marks[i])
	}
	return text.Line(l.file.data, l.offset(i))
}

// describe makes the public description.
func (l *list) describe() List {
	p := l.plan
	d := List{Block: l.block.Code, Position: l.block.Position, Category: p.category.name, Merged: l.merged(),
		Rows: l.rows, Columns: append([]string(nil), l.names...), Intensity: p.item[roleIntensity], Sigma: p.item[roleSigma],
		Angle: p.item[rolePhi], Frame: p.item[roleFrame] + p.item[roleScaleGroup], Nulls: l.nulls,
		DiffrnIDs: l.dataSet.sets(), ScaleSets: l.scale.sets()}
	if p.friedel == friedelBoth {
		d.Intensity += " and " + p.item[roleMate]
		d.Sigma += " and " + p.item[roleMateSigma]
	}
	if s := p.item[roleIntensitySU]; s != "" {
		d.Intensity = s
		if l.plainSU > 0 {
			d.Sigma = "(s.u.)"
		}
	}
	if l.item != "" {
		d.Category, d.Layout, d.Twin = l.item, l.layout, l.twinRow >= 0
	}
	if l.err != nil {
		d.Fault = l.err.Error()
	}
	if l.rows == 0 || l.err != nil {
		return d
	}
	d.Line = l.line(0)
	for j, x := range [3][]int16{l.raw.H, l.raw.K, l.raw.L} {
		d.MinHKL[j], d.MaxHKL[j] = indexBounds(x)
	}
	if d.Intensity != "" {
		d.MinIntensity, d.MaxIntensity = bounds(l.raw.I)
	}
	d.MinAngle, d.MaxAngle = bounds(l.raw.Phi)
	d.MinFrame, d.MaxFrame = frameBounds(l.raw.Frame)
	return d
}

// merged: a list of the merged category whose scale-group codes are many is a list
// of single measurements in truth, with the frame as its scale group.
func (l *list) merged() bool {
	if !l.plan.category.merged {
		return false
	}
	lo, hi := frameBounds(l.raw.Frame)
	return lo == hi
}

func indexBounds(x []int16) (low, high int) {
	var lo, hi int16 = math.MaxInt16, math.MinInt16
	for _, v := range x {
		if v < lo && v != text.NullIndex {
			lo = v
		}
		hi = max(hi, v)
	}
	if hi == text.NullIndex {
		return 0, 0
	}
	return int(lo), int(hi)
}

// bounds passes over NaN, which compares with nothing.
func bounds(x []float64) (lo, hi float64) {
	first := slices.IndexFunc(x, func(v float64) bool { return v == v })
	if first < 0 {
		return 0, 0
	}
	lo, hi = x[first], x[first]
	for _, v := range x[first:] {
		if v < lo {
			lo = v
		} else if v > hi {
			hi = v
		}
	}
	return lo, hi
}

func frameBounds(x []int32) (lo, hi int) {
	lo, hi = math.MaxInt32, math.MinInt32
	for _, v := range x {
		if v != text.NullFrame && v != noFrame {
			lo, hi = min(lo, int(v)), max(hi, int(v))
		}
	}
	if lo > hi {
		return 0, 0
	}
	return lo, hi
}

// Lists describes the reflection lists of the file in file order.
func (f *File) Lists() []List {
	out := make([]List, len(f.lists))
	for i, l := range f.lists {
		out[i] = l.describe()
	}
	return out
}
