package delimited

import (
	"bytes"
	"fmt"
	"strings"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

const (
	firstRoom   = 2048
	rowsPerMark = 1024
)

type reader struct {
	name      string
	src       *text.Source
	data      []byte
	i         int
	o         Options
	roles     []role
	order     []string
	delimiter byte // 0 for fixed widths
	edges     []int
	raw       intensity.Columns
	rows      int
	marks     []int
	warn      []intensity.Warning
}

func read(name string, src *text.Source, o *Options) (*Reflections, error) {
	r := &reader{name: name, src: src, data: src.Bytes()}
	if o != nil {
		r.o = *o
	}
	roles, item, problem, remedy := r.o.check()
	if problem != "" {
		return nil, &Error{File: name, Item: item, Problem: problem, Remedy: remedy}
	}
	r.roles, r.order = roles, r.o.Order
	for _, step := range []func() error{r.begin, r.layout, r.header, r.body} {
		if err := step(); err != nil {
			return nil, err
		}
	}
	out := &Reflections{Rows: r.rows, Layout: r.layoutName(), Order: append([]string(nil), r.order...), Warnings: r.warn}
	out.Columns, out.SetAside = text.Sift(&r.raw, nil, r.line)
	if out.Columns.Len() == 0 {
		return nil, r.fault(len(r.data), "", fmt.Sprintf("no row of %d can be used%s", r.rows, reasons(out.SetAside)), "look whether the columns are declared right")
	}
	return out, nil
}

func reasons(asides []Aside) string {
	var s strings.Builder
	for _, a := range asides {
		fmt.Fprintf(&s, ": %s (%d, first on line %d)", a.Reason, a.Count, a.FirstLine)
	}
	return s.String()
}

func (r *reader) fault(off int, item, problem, remedy string) error {
	if err := r.src.Err(); err != nil {
		return err
	}
	return &Error{File: r.name, Line: text.Line(r.data, off), Item: item, Problem: problem, Remedy: remedy}
}

func (r *reader) warning(off int, code, sentence string) {
	r.warn = append(r.warn, intensity.Warning{Code: code, Text: sentence, Where: fmt.Sprintf("%s:%d", r.name, text.Line(r.data, off))})
}

// column names column j in errors.
func (r *reader) column(j int) string {
	return fmt.Sprintf("column %d (%s)", j+1, r.order[j])
}

func (r *reader) more(i int) bool {
	for i >= len(r.data) {
		if !r.src.More() {
			return false
		}
		r.data = r.src.Bytes()
	}
	return true
}

func (r *reader) begin() error {
	r.more(15)
	d := r.data
	if problem, remedy := text.Foreign(d); problem != "" {
		return r.fault(0, "", problem, remedy)
	}
	if len(d) == 0 {
		return r.fault(0, "", "the file is empty", "look whether it was cut off or never written")
	}
	if bytes.HasPrefix(d, []byte("\xef\xbb\xbf")) {
		r.i = 3
		r.warning(0, "byte-order-mark", "the file begins with a byte-order mark; it was skipped")
	}
	return nil
}

// lineAt returns the line that begins at i, without its end, and the offset of the
// next one.
func (r *reader) lineAt(i int) (line []byte, next int) {
	for from := i; ; {
		if j := bytes.IndexAny(r.data[from:], "\r\n"); j >= 0 {
			end := from + j
			next = end + 1
			if r.data[end] == '\r' && r.more(next) && r.data[next] == '\n' {
				next++
			}
			return r.data[i:end], next
		}
		from = len(r.data)
		if !r.more(from) {
			return r.data[i:], len(r.data)
		}
	}
}

// firstLine moves to the first line that is neither blank nor a comment. A comment
// that names the needed columns is the header when no order is declared.
func (r *reader) firstLine() (line []byte, next int, header []string, ok bool) {
	for r.more(r.i) {
		line, next = r.lineAt(r.i)
		trimmed := bytes.TrimSpace(line)
		switch {
		case len(trimmed) == 0:
		case !comment(trimmed[0]):
			return line, next, header, true
		case len(r.o.Order) == 0 && header == nil:
			if names := namesIn(string(trimmed[1:])); names != nil {
				header = names
			}
		}
		r.i = next
	}
	return nil, 0, header, false
}

func namesIn(line string) []string {
	words := strings.FieldsFunc(line, func(c rune) bool { return strings.ContainsRune(" \t,;", c) })
	known := words[:0:0]
	for _, w := range words {
		if _, ok := roleOf(w); ok {
			known = append(known, w)
		}
	}
	if _, _, problem := rolesOf(known); problem != "" {
		return nil
	}
	return words
}

func comment(c byte) bool { return c == '#' || c == '!' || c == ';' }

// layout settles how fields are told apart.
func (r *reader) layout() error {
	line, _, header, ok := r.firstLine()
	if !ok {
		return r.fault(len(r.data), "", "the file holds no rows", "look whether it was cut off")
	}
	if header != nil {
		r.setHeader(header)
	}
	if len(r.o.Widths) > 0 {
		r.edges = []int{0}
		for _, w := range r.o.Widths {
			r.edges = append(r.edges, r.edges[len(r.edges)-1]+w)
		}
		return nil
	}
	if r.delimiter = r.o.Delimiter; r.delimiter != 0 {
		return nil
	}
	r.delimiter = ' '
	for _, c := range []byte{'\t', ';', ','} {
		if bytes.IndexByte(line, c) >= 0 && !looksBlank(line, c) {
			r.delimiter = c
			break
		}
	}
	return nil
}

// looksBlank: fields that hold numbers apart by blanks mean that c is not what
// separates them, but a decimal comma or a tab used as a blank.
func looksBlank(line []byte, c byte) bool {
	for _, field := range bytes.Split(line, []byte{c}) {
		if len(bytes.Fields(field)) > 1 {
			return true
		}
	}
	return false
}

func (r *reader) layoutName() string {
	switch r.delimiter {
	case ',':
		return "comma"
	case '\t':
		return "tab"
	case ';':
		return "semicolon"
	case ' ':
		return "blanks"
	}
	return "fixed widths"
}

// setHeader takes names that are known to hold the needed columns.
func (r *reader) setHeader(names []string) {
	r.order, r.roles = nil, nil
	for _, name := range names {
		got, ok := roleOf(name)
		if !ok {
			r.warning(r.i, "column-skipped", fmt.Sprintf("the column %q of the header has no meaning here and was skipped", name))
		}
		r.order, r.roles = append(r.order, strings.TrimSpace(name)), append(r.roles, got)
	}
}

// header reads the header line, where there is one.
func (r *reader) header() error {
	line, next := r.lineAt(r.i)
	fields := r.split(line)
	for _, f := range fields {
		if _, _, ok := text.ParseNumber(f); ok || null(f) && len(f) > 0 {
			if len(r.roles) == 0 {
				return r.fault(r.i, "", "the columns are not declared: there is no header line with their names", "declare the order of the columns in the manifest, [columns] order = [\"h\", \"k\", \"l\", \"intensity\", \"sigma\", \"phi\"], by the names "+knownNames)
			}
			return nil
		}
	}
	names := make([]string, len(fields))
	for j, f := range fields {
		names[j] = string(f)
	}
	if len(r.roles) > 0 {
		for j, name := range names {
			if got, ok := roleOf(name); ok && (j >= len(r.roles) || got != r.roles[j] && r.roles[j] != roleSkip) {
				return r.fault(r.i, "column "+fmt.Sprint(j+1), fmt.Sprintf("the header calls the column %q, which contradicts the declared order", name), "correct the order, or leave it out so that the header counts")
			}
		}
		for j, f := range fields {
			if decimalComma(f) && j < len(r.roles) && r.roles[j] != roleSkip {
				return nil
			}
		}
		r.warning(r.i, "header-skipped", "the first line holds no numbers and was taken as a header")
		r.i = next
		return nil
	}
	known := names[:0:0]
	for _, name := range names {
		if _, ok := roleOf(name); ok {
			known = append(known, name)
		}
	}
	if _, _, problem := rolesOf(known); problem != "" {
		return r.fault(r.i, "header", "the header does not name the columns: "+problem, "use the names "+knownNames+", or declare the order in the manifest, [columns] order = [...]")
	}
	r.setHeader(names)
	r.i = next
	return nil
}

// split cuts a line into fields; a field in double quotes may hold the delimiter.
func (r *reader) split(line []byte) [][]byte {
	if r.delimiter == 0 {
		var out [][]byte
		for j := 1; j < len(r.edges) && r.edges[j-1] < len(line); j++ {
			out = append(out, bytes.TrimSpace(line[r.edges[j-1]:min(r.edges[j], len(line))]))
		}
		return out
	}
	var out [][]byte
	for i := 0; ; {
		for i < len(line) && (line[i] == ' ' || line[i] == '\t' && r.delimiter != '\t') {
			i++
		}
		if r.delimiter == ' ' && i == len(line) {
			return out
		}
		start, end := i, i
		if i < len(line) && line[i] == '"' {
			if j := bytes.IndexByte(line[i+1:], '"'); j >= 0 {
				start, end = i+1, i+1+j
				i = end + 1
			}
		}
		for i < len(line) && !r.ends(line[i]) {
			i++
		}
		if start == end || line[end] != '"' {
			end = i
		}
		out = append(out, bytes.TrimSpace(line[start:end]))
		if i == len(line) {
			return out
		}
		i++
	}
}

func (r *reader) ends(c byte) bool {
	return c == r.delimiter || r.delimiter == ' ' && c == '\t'
}

// line returns the line of a row, counted from the nearest mark.
func (r *reader) line(row int) int {
	i := r.marks[row/rowsPerMark]
	for skip := row % rowsPerMark; i < len(r.data); {
		line, next := r.lineAt(i)
		if trimmed := bytes.TrimSpace(line); len(trimmed) > 0 && !comment(trimmed[0]) {
			if skip == 0 {
				break
			}
			skip--
		}
		i = next
	}
	return text.Line(r.data, i)
}
