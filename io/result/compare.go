package result

import (
	"fmt"
	"math"
	"strconv"

	"thinward/analysis"
)

// Difference is one place where two results do not say the same. A side that has
// no such place is empty. Relative is the difference of two numbers over the
// larger magnitude, +Inf where one side is missing, not a number, infinite or a
// word.
type Difference struct {
	Path     string  `json:"path"`
	First    string  `json:"first"`
	Second   string  `json:"second"`
	Relative float64 `json:"relative"`
	Number   bool    `json:"number"`
}

// String gives place and both sides.
func (d *Difference) String() string {
	side := func(s string) string {
		if s == "" {
			return "(nothing)"
		}
		return s
	}
	s := fmt.Sprintf("%s: %s | %s", d.Path, side(d.First), side(d.Second))
	if d.Number && !math.IsInf(d.Relative, 1) {
		s += fmt.Sprintf("  (relative %.2g)", d.Relative)
	}
	return s
}

// Comparison is what Compare found. Identical says that every number has the
// same bits and every word the same letters; Differences lists what differs by
// more than the tolerance; Largest is the largest relative difference within it.
type Comparison struct {
	Numbers     int
	Words       int
	Identical   bool
	Largest     float64
	Differences []Difference
}

// Compare compares every number and word of two results but environment and
// timing. Numbers agree when |a - b| <= relative max(|a|, |b|); not-a-number
// agrees with itself, and so does an infinity. Entries of lists are told by
// their names, not by their places.
func Compare(a, b *analysis.Result, relative float64) *Comparison {
	c := &Comparison{Identical: true}
	left, right := Leaves(a), Leaves(b)
	at := make(map[string]*Leaf, len(right))
	for i := range right {
		at[right[i].Path] = &right[i]
	}
	for i := range left {
		x := &left[i]
		y := at[x.Path]
		delete(at, x.Path)
		if x.IsNumber {
			c.Numbers++
		} else {
			c.Words++
		}
		c.leaf(x, y, relative)
	}
	for i := range right {
		if y := at[right[i].Path]; y != nil {
			c.Identical = false
			c.Differences = append(c.Differences, Difference{Path: y.Path, Second: y.text(), Relative: math.Inf(1), Number: y.IsNumber})
		}
	}
	return c
}

func (c *Comparison) leaf(x, y *Leaf, relative float64) {
	if y == nil {
		c.Identical = false
		c.Differences = append(c.Differences, Difference{Path: x.Path, First: x.text(), Relative: math.Inf(1), Number: x.IsNumber})
		return
	}
	if !x.IsNumber || !y.IsNumber {
		if x.IsNumber != y.IsNumber || x.Text != y.Text {
			c.Identical = false
			c.Differences = append(c.Differences, Difference{Path: x.Path, First: x.text(), Second: y.text(), Relative: math.Inf(1)})
		}
		return
	}
	r := relativeDifference(x.Number, y.Number)
	if r == 0 {
		return
	}
	c.Identical = false
	if r <= relative {
		c.Largest = math.Max(c.Largest, r)
		return
	}
	c.Differences = append(c.Differences, Difference{Path: x.Path, First: x.text(), Second: y.text(), Relative: r, Number: true})
}

func relativeDifference(a, b float64) float64 {
	switch {
	case a == b || math.IsNaN(a) && math.IsNaN(b):
		return 0
	case math.IsNaN(a) || math.IsNaN(b) || math.IsInf(a, 0) || math.IsInf(b, 0):
		return math.Inf(1)
	}
	return math.Abs(a-b) / math.Max(math.Abs(a), math.Abs(b))
}

func (l *Leaf) text() string {
	switch {
	case !l.IsNumber:
		return strconv.Quote(l.Text)
	case math.IsNaN(l.Number):
		return "not a number"
	}
	return strconv.FormatFloat(l.Number, 'g', -1, 64)
}
