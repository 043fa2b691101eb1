package delimited

import (
	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

// Error is a fault of an input file: file, line, column, problem, remedy. The
// column stands in Item as "column 4 (intensity)"; Block is empty.
type Error = text.Error

// Aside counts rows that were not used, by reason, with the line of the first.
type Aside = text.Aside

// Options declares the columns. nil and the zero value mean: names in a header
// line, delimiter found from the first line.
type Options struct {
	// Order names the columns from left to right: h, k, l, intensity, sigma, phi
	// (degrees), frame, partiality, and skip for one that is not used. The first
	// five are needed. Empty means that the first line is a header that uses these
	// names; header names that are not among them are skipped with a warning.
	Order []string
	// Widths makes the text fixed-width: one width in bytes for each column of
	// Order. Fields may touch.
	Widths []int
	// Delimiter is ',', '\t', ';' or ' ' (any run of blanks and tabs). 0 means the
	// first of tab, semicolon and comma that occurs in the first line that is no
	// comment, else blanks. Not used with Widths.
	Delimiter byte
}

// Reflections is a list as read: the usable rows in file order and what was set
// aside.
type Reflections struct {
	Columns  *intensity.Columns
	Rows     int     // in the file, used or not, the end row 0 0 0 not counted
	SetAside []Aside // rows that were not used, by reason
	Layout   string  // "comma", "tab", "semicolon", "blanks" or "fixed widths"
	Order    []string
	Warnings []intensity.Warning
}

// ReadFile reads the file at path, plain or gzip.
func ReadFile(path string, o *Options) (*Reflections, error) {
	src, err := text.OpenSource(path)
	if err != nil {
		return nil, err
	}
	defer src.Close()
	return read(path, src, o)
}

// Parse reads data, plain or gzip; name stands in errors.
func Parse(name string, data []byte, o *Options) (*Reflections, error) {
	src := text.NewSource(name, data)
	defer src.Close()
	return read(name, src, o)
}
