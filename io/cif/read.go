package cif

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

const (
	reasonAbsent     = "status says systematically absent"
	reasonUnreliable = "status says unreliable"
	reasonAmplitude  = "structure amplitude is negative"
	reasonNoSU       = "intensity has no standard uncertainty"
)

// Read returns the data set that sel names. A file that holds more than one, and a
// sel that does not tell which, is an error that lists them. With lists of single
// measurements and of merged ones in one block the former is taken, with a warning.
//
// Rows that cannot be used (null values, sigma <= 0, status - or x, index 0 0 0) are
// counted in SetAside; a list without any uncertainties, of twin components, or
// without a usable row is an error. Amplitudes, where there is nothing better,
// become F squared with sigma 2 F sigma(F), with a warning. Where I+ and I- stand in
// one row and there is no mean, the row becomes two, (h k l) and (-h -k -l).
func (f *File) Read(sel Selection) (*Reflections, error) {
	c, err := f.choose(sel)
	if err != nil {
		return nil, err
	}
	l := c.list
	r := &Reflections{List: l.describe(), Merged: l.merged()}
	r.Warnings = append(r.Warnings, f.Warnings...)
	r.Warnings = append(r.Warnings, c.warnings...)
	r.Warnings = append(r.Warnings, l.warnings()...)
	if err := f.facts(l, r); err != nil {
		return nil, err
	}
	if err := l.cut(c, sel.All, r); err != nil {
		return nil, err
	}
	return r, f.transform(l, r)
}

func (l *list) fault(line int, item, problem, remedy string) error {
	return &Error{File: l.file.Name, Line: line, Block: l.block.Code, Item: item, Problem: problem, Remedy: remedy}
}

func (l *list) usable() error {
	p := l.plan
	switch {
	case l.err != nil:
		return l.err
	case l.twinRow >= 0:
		return l.fault(l.line(l.twinRow), l.item, "the list holds twin components that share one intensity (negative group number)", "supply the list of one component, separated before; an average would be wrong")
	case l.rows == 0:
		return l.fault(0, l.item, "the list has no rows", "look whether the list was cut off")
	case p.item[roleIntensity] == "" && p.item[roleIntensitySU] == "":
		return l.fault(l.line(0), l.names[0], "the list has no measured intensity: its columns are "+strings.Join(l.names, " "), "supply intensity_net, intensity_meas, F_squared_meas or F_meas with its uncertainty")
	case p.item[roleIntensitySU] != "" && l.plainSU == 0:
		return l.fault(l.line(0), p.item[roleIntensitySU], "the list has no uncertainties: there is no sigma column and no value with its s.u. in parentheses", "supply the column of standard uncertainties; none is made up here")
	}
	return nil
}

func (l *list) warnings() []intensity.Warning {
	var w []intensity.Warning
	p := l.plan
	add := func(code, sentence string) {
		w = append(w, intensity.Warning{Code: code, Text: sentence, Where: where(l.file.Name, l.line(0))})
	}
	if l.item != "" {
		w = append(w, l.assumption())
	}
	if p.amplitude {
		add("amplitudes", "the list holds structure amplitudes only: I = F^2 and sigma(I) = 2 F sigma(F) were formed; negative intensities are lost and weak ones are biased")
	}
	w = append(w, l.friedelWarnings()...)
	if len(p.angles) > 0 {
		add("setting-angles", "setting angles ("+strings.Join(p.angles, ", ")+") are there but no scan angle; they were not used, as their convention is not fixed")
	}
	for j, name := range l.names {
		if j < len(p.roles) && p.roles[j] == roleSkip && strings.Contains(strings.ToLower(name), "twin") {
			add("twin-column", "the column "+name+" names twin components and was not used: if there are several, unlike reflections are averaged as equivalents; supply the list of one component, separated before")
		}
	}
	if p.item[roleScaleGroup] != "" && l.raw.Frame != nil {
		add("scale-group-frames", "the scale-group codes were taken as image numbers")
	}
	if p.category.merged && !l.merged() {
		add("merged-name", "the list has the name of a merged one but several scale groups; it was taken as single measurements")
	}
	if l.odd != "" {
		add("status", "a status code is not known and was not acted on: "+l.odd)
	}
	return w
}

// cut takes the chosen data set out of the list.
func (l *list) cut(c *choice, all bool, r *Reflections) error {
	inside := func(i int) bool {
		return (c.dataSet < 0 || l.dataSet.of[i] == c.dataSet) && (c.scaleSet < 0 || l.scale.of[i] == c.scaleSet)
	}
	skip := func(i int) string {
		if !inside(i) {
			return text.OtherSet
		}
		r.Rows++
		if l.status != nil {
			switch l.status[i] {
			case statusAbsent:
				return reasonAbsent
			case statusUnreliable:
				return reasonUnreliable
			case statusAmplitude:
				return reasonAmplitude
			case statusRepeated:
				return reasonRepeated
			}
		}
		if l.plainSU > 0 && !math.IsNaN(l.raw.I[i]) && math.IsNaN(l.raw.Sigma[i]) {
			return reasonNoSU
		}
		return ""
	}
	raw := l.raw
	raw.Phi, raw.Partiality = l.within(raw.Phi, inside), l.within(raw.Partiality, inside)
	if !l.hasFrames(inside) {
		raw.Frame = nil
	}
	if c.dataSet < 0 && c.scaleSet < 0 && l.status == nil && l.plainSU == 0 {
		r.Rows, skip = l.rows, nil
	}
	r.Columns, r.SetAside = text.Sift(&raw, skip, l.line)
	if r.Columns.Len() == 0 {
		return l.fault(l.line(0), l.plan.item[roleIntensity], fmt.Sprintf("no row of %d can be used: %s", r.Rows, reasons(r.SetAside)), "look at the columns of the list with peek")
	}
	return nil
}

func reasons(asides []Aside) string {
	out := make([]string, len(asides))
	for i, a := range asides {
		out[i] = a.Reason + " (" + strconv.Itoa(a.Count) + ", first on line " + strconv.Itoa(a.FirstLine) + ")"
	}
	return strings.Join(out, ", ")
}

// within returns x, or nil when none of the rows chosen has a value in it.
func (l *list) within(x []float64, inside func(int) bool) []float64 {
	for i, v := range x {
		if !math.IsNaN(v) && inside(i) {
			return x
		}
	}
	return nil
}

func (l *list) hasFrames(inside func(int) bool) bool {
	for i, v := range l.raw.Frame {
		if v >= 0 && inside(i) {
			return true
		}
	}
	return false
}

// transform applies _diffrn_reflns_transf_matrix, which leads from the indices of
// the list of single measurements to those of the cell reported: (h k l) as a row
// times the matrix (core dictionary; the side from memory).
func (f *File) transform(l *list, r *Reflections) error {
	if l.plan.category.merged || l.item != "" {
		return nil
	}
	m, any, err := f.transformMatrix(l)
	if err != nil || !any || m == [3][3]float64{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}} {
		return err
	}
	c := *r.Columns
	h, k, n := make([]int16, c.Len()), make([]int16, c.Len()), make([]int16, c.Len())
	for i := range h {
		var out [3]int16
		for j := range out {
			x := float64(c.H[i])*m[0][j] + float64(c.K[i])*m[1][j] + float64(c.L[i])*m[2][j]
			near := math.Round(x)
			if math.Abs(x-near) > 0.01 || math.Abs(near) > math.MaxInt16 {
				return l.fault(l.line(0), "_diffrn_reflns_transf_matrix_11", fmt.Sprintf("the index transformation makes %d %d %d a fraction", c.H[i], c.K[i], c.L[i]), "correct the matrix, or remove it and transform the indices before")
			}
			out[j] = int16(near)
		}
		h[i], k[i], n[i] = out[0], out[1], out[2]
	}
	c.H, c.K, c.L = h, k, n
	r.Columns = &c
	r.Warnings = append(r.Warnings, intensity.Warning{Code: "index-transformation", Where: f.Name,
		Text: fmt.Sprintf("the indices were transformed to the reported cell by _diffrn_reflns_transf_matrix %v", m)})
	return nil
}
