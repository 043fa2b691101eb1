package cif

import (
	"strconv"
	"strings"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

// Error is a fault of an input file: file, line, block, item, problem, remedy.
type Error = text.Error

// Aside counts the rows of a list that were not used, by reason, with the line of
// the first.
type Aside = text.Aside

// Kind tells how a value stands in a file; the four cases ?, '?', . and '.' differ.
type Kind uint8

const (
	Unknown      Kind = iota // a bare ?
	Inapplicable             // a bare .
	Word                     // an unquoted word, numbers among them
	Quoted                   // in single or double quotes, of CIF 2.0 also triple
	TextField                // between semicolons at the start of a line
	Compound                 // a list or table of CIF 2.0
)

// Value is one value. Text is its content without quotes or semicolons, line ends
// of text fields as a single LF, folded lines joined; it is "?" or "." for nulls and
// the whole, brackets included, for a list or table.
type Value struct {
	Kind   Kind
	Text   string
	offset int
}

// Null reports whether the value is a bare ? or a bare point.
func (v Value) Null() bool { return v.Kind == Unknown || v.Kind == Inapplicable }

// Number returns the value as a number with its standard uncertainty, NaN where
// none is given. ok is false for nulls, text fields and whatever is no CIF number
// (NaN, Inf, 0x10, 1_000, 1,5). A quoted number counts, as macromolecular files
// need it.
func (v Value) Number() (x, su float64, ok bool) {
	if v.Null() || v.Kind == TextField {
		return 0, 0, false
	}
	return text.ParseNumber([]byte(v.Text))
}

// Item is one data name with its value, the name spelled as in the file.
type Item struct {
	Name  string
	Value Value
}

// Loop is one loop_. A loop of reflections is held in columns, not as values:
// Reflections is true, Rows counts them and At panics.
type Loop struct {
	Names       []string
	Rows        int
	Reflections bool
	block       *Block
	spans       []span
}

// At returns the value in row i, column j, both from 0.
func (l *Loop) At(i, j int) Value {
	if l.Reflections {
		panic("cif: Loop.At: a loop of reflections holds no values; use File.Read")
	}
	return l.block.file.value(l.spans[i*len(l.Names)+j])
}

// Block is one data block, or one save frame within Frames. Position counts blocks
// from 1 and keeps blocks of the same code apart.
type Block struct {
	Code      string
	Position  int
	Line      int
	Items     []Item
	Loops     []*Loop
	Frames    []*Block
	file      *File
	names     map[string]place
	itemSpans []span
}

// place says where a name of a block stands: a pair when loop < 0.
type place struct{ loop, column int }

// Values returns all values under name, compared without case: one for a pair, one
// a row for a loop, nil when the block has no such name or it is a column of
// reflections.
func (b *Block) Values(name string) []Value {
	p, ok := b.names[strings.ToLower(name)]
	if !ok {
		return nil
	}
	if p.loop < 0 {
		return []Value{b.Items[p.column].Value}
	}
	l := b.Loops[p.loop]
	if l.Reflections {
		return nil
	}
	out := make([]Value, l.Rows)
	for i := range out {
		out[i] = l.At(i, p.column)
	}
	return out
}

// Has reports whether the block holds name, as a pair or in a loop.
func (b *Block) Has(name string) bool {
	_, ok := b.names[strings.ToLower(name)]
	return ok
}

// String is the code with the position, as selections take it: "native (#2)".
func (b *Block) String() string { return b.Code + " (#" + strconv.Itoa(b.Position) + ")" }

// File is one file as read. Version is "1.1" or "2.0". The text stays in memory
// until the File is dropped; what Read returns does not hold on to it.
type File struct {
	Name     string
	Version  string
	Blocks   []*Block
	Warnings []intensity.Warning
	data     []byte
	lists    []*list
}

// ReadFile reads the file at path, plain or gzip.
func ReadFile(path string) (*File, error) {
	src, err := text.OpenSource(path)
	if err != nil {
		return nil, err
	}
	return parse(path, src)
}

// Parse reads data, plain or gzip; name stands in errors. data must not change
// while the File is in use.
func Parse(name string, data []byte) (*File, error) {
	return parse(name, text.NewSource(name, data))
}

// LineOf returns the line on which a value begins.
func (f *File) LineOf(v Value) int { return text.Line(f.data, v.offset) }
