package cif

import (
	"bufio"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
)

// Num is x as CIF writes it, shortest digits that read back the same; NaN becomes
// a bare ?. An infinity has no form in CIF: a Writer refuses it.
func Num(x float64) Value {
	if math.IsNaN(x) {
		return Value{Kind: Unknown, Text: "?"}
	}
	return Value{Kind: Word, Text: strconv.FormatFloat(x, 'g', -1, 64)}
}

// Int is n as CIF writes it.
func Int(n int) Value { return Value{Kind: Word, Text: strconv.Itoa(n)} }

// Str is s as text: quoted or put into a text field where it needs to be, so that it
// reads back as the same text and never as a number or a null.
func Str(s string) Value { return Value{Kind: Quoted, Text: s} }

// NotKnown is a bare ?, NotApplicable a bare point.
func NotKnown() Value      { return Value{Kind: Unknown, Text: "?"} }
func NotApplicable() Value { return Value{Kind: Inapplicable, Text: "."} }

// Writer writes CIF 1.1. The first error is kept and returned by every later call.
// What cannot be written so that it reads back the same is an error: non-ASCII
// text, a line that begins with a semicolon inside text of several lines, an
// infinity, a name twice in a block.
type Writer struct {
	out    *bufio.Writer
	err    error
	block  string
	blocks map[string]bool
	names  map[string]bool
	loop   int // names of the open loop
	rows   int // its rows so far
	line   []byte
}

// NewWriter begins a file on w with the version line. Close must be called.
func NewWriter(w io.Writer) *Writer {
	x := &Writer{out: bufio.NewWriterSize(w, 1<<16), blocks: map[string]bool{}}
	x.write(`#\#CIF_1.1` + "\n")
	return x
}

func (w *Writer) write(s string) {
	if w.err == nil {
		_, w.err = w.out.WriteString(s)
	}
}

func (w *Writer) fail(format string, a ...any) error {
	if w.err == nil {
		w.err = fmt.Errorf("cif: block %s: "+format, append([]any{w.block}, a...)...)
	}
	return w.err
}

// Close ends the file and writes out what is still held; it does not close the
// underlying writer.
func (w *Writer) Close() error {
	w.endLoop()
	if w.err == nil {
		w.err = w.out.Flush()
	}
	return w.err
}

// Block begins a data block. Codes are printable ASCII without blanks, at most 75
// characters, and differ within the file in more than case.
func (w *Writer) Block(code string) error {
	w.endLoop()
	if code == "" || len(code) > longestName || !printable(code) {
		return w.fail("%q cannot be a block code", code)
	}
	if w.blocks[strings.ToLower(code)] {
		return w.fail("the block code %q is used twice", code)
	}
	w.blocks[strings.ToLower(code)] = true
	w.block, w.names = code, map[string]bool{}
	w.write("\ndata_" + code + "\n")
	return w.err
}

// Comment writes s as comment lines.
func (w *Writer) Comment(s string) error {
	if w.loop > 0 {
		return w.fail("a comment stands inside a loop")
	}
	for _, line := range strings.Split(s, "\n") {
		for _, c := range []byte(line) {
			if class[c] == illegal || c == '\r' {
				return w.fail("a comment holds the character %q", c)
			}
		}
		w.write("# " + line + "\n")
	}
	return w.err
}

func (w *Writer) declare(name string) bool {
	switch {
	case w.block == "":
		w.fail("the item %s stands before the first block", name)
	case len(name) < 2 || name[0] != '_' || len(name) > longestName || !printable(name):
		w.fail("%q cannot be a data name", name)
	case w.names[strings.ToLower(name)]:
		w.fail("the data name %s is used twice", name)
	default:
		w.names[strings.ToLower(name)] = true
	}
	return w.err == nil
}

func printable(s string) bool {
	for i := 0; i < len(s); i++ {
		if s[i] <= 32 || s[i] > 126 {
			return false
		}
	}
	return true
}

// Item writes one name with its value.
func (w *Writer) Item(name string, v Value) error {
	w.endLoop()
	if !w.declare(name) {
		return w.err
	}
	form, err := w.form(name, v)
	if err != nil {
		return err
	}
	switch {
	case form[0] == '\n':
		w.write(name + form)
	case len(name)+1+len(form) > longestLine:
		w.write(name + "\n" + form + "\n")
	default:
		w.write(name + strings.Repeat(" ", max(1, 34-len(name))) + form + "\n")
	}
	return w.err
}

// Loop begins a loop of the columns named; Row must follow at least once.
func (w *Writer) Loop(names []string) error {
	w.endLoop()
	if len(names) == 0 {
		return w.fail("a loop has no names")
	}
	w.write("loop_\n")
	for _, name := range names {
		if !w.declare(name) {
			return w.err
		}
		w.write(name + "\n")
	}
	w.loop, w.rows = len(names), 0
	return w.err
}

// Row writes one row of the open loop, a value a name.
func (w *Writer) Row(values []Value) error {
	if w.err != nil {
		return w.err
	}
	if w.loop == 0 || len(values) != w.loop {
		return w.fail("a row has %d values for %d names", len(values), w.loop)
	}
	w.line = w.line[:0]
	width := 0
	for _, v := range values {
		form, err := w.form("a row", v)
		if err != nil {
			return err
		}
		switch {
		case form[0] == '\n':
			width = 0
		case width > 0 && width+1+len(form) > longestLine:
			w.line = append(w.line, '\n')
			width = len(form)
		case width > 0:
			w.line = append(w.line, ' ')
			width += 1 + len(form)
		default:
			width = len(form)
		}
		w.line = append(w.line, form...)
	}
	if width > 0 {
		w.line = append(w.line, '\n')
	}
	w.rows++
	if w.err == nil {
		_, w.err = w.out.Write(w.line)
	}
	return w.err
}

func (w *Writer) endLoop() {
	if w.loop > 0 && w.rows == 0 {
		w.fail("a loop has no rows")
	}
	w.loop = 0
}

// form returns v as it stands in the file; a text field begins and ends with a line
// end.
func (w *Writer) form(item string, v Value) (string, error) {
	switch v.Kind {
	case Unknown:
		return "?", nil
	case Inapplicable:
		return ".", nil
	}
	if v.Kind == Compound {
		return "", w.fail("%s: a CIF 2.0 list or table cannot be written", item)
	}
	s := v.Text
	for i := 0; i < len(s); i++ {
		if class[s[i]] == illegal || s[i] == '\r' {
			return "", w.fail("%s: the character %q cannot be written; use a backslash code or LF line ends", item, s[i])
		}
	}
	if v.Kind == Word {
		if !bare(s) {
			return "", w.fail("%s: %q cannot stand without quotes", item, s)
		}
		if low := strings.ToLower(strings.TrimLeft(s, "+-")); low == "inf" || low == "nan" {
			return "", w.fail("%s: %s is not a CIF number", item, s)
		}
		return s, nil
	}
	if !strings.Contains(s, "\n") && len(s) <= longestLine-80 {
		if _, _, number := (Value{Kind: Word, Text: s}).Number(); bare(s) && !number && s != "?" && s != "." {
			return s, nil
		}
		for _, q := range []string{"'", `"`} {
			if !strings.Contains(s+" ", q+" ") && !strings.Contains(s, q+"\t") {
				return q + s + q, nil
			}
		}
	}
	return w.textField(item, s)
}

// bare reports whether s can stand as an unquoted word anywhere in a line.
func bare(s string) bool {
	if s == "" || !printable(s) || strings.IndexByte("\"#$'_[];", s[0]) >= 0 {
		return false
	}
	low := strings.ToLower(s)
	for _, r := range []string{"data_", "save_", "loop_", "stop_", "global_"} {
		if strings.HasPrefix(low, r) {
			return false
		}
	}
	return true
}

// textField folds where a line is too long or the text would be taken as folded.
func (w *Writer) textField(item, s string) (string, error) {
	lines := strings.Split(s, "\n")
	for i, line := range lines {
		if i > 0 && strings.HasPrefix(line, ";") {
			return "", w.fail("%s: a line of the text begins with a semicolon, which would end the text field; put a blank before it", item)
		}
	}
	fold := strings.TrimRight(lines[0], " \t") == `\`
	for _, line := range lines {
		fold = fold || len(line) >= longestLine
	}
	if !fold {
		return "\n;" + s + "\n;\n", nil
	}
	var b strings.Builder
	b.WriteString("\n;\\\n")
	for i, line := range lines {
		if i > 0 {
			b.WriteByte('\n')
		}
		if !foldLine(&b, line) {
			return "", w.fail("%s: the text cannot be folded, as its pieces would begin with a semicolon", item)
		}
	}
	b.WriteString("\n;\n")
	return b.String(), nil
}

// foldLine breaks line into pieces that end in a backslash; a piece may not begin
// with a semicolon. A line that itself ends in a backslash, blanks behind it or not,
// takes one more and an empty piece.
func foldLine(b *strings.Builder, line string) bool {
	if strings.HasPrefix(line, ";") {
		return false
	}
	const piece = longestLine - 48
	for len(line) > piece {
		n := piece
		for n > 0 && line[n] == ';' {
			n--
		}
		if n == 0 {
			return false
		}
		b.WriteString(line[:n] + "\\\n")
		line = line[n:]
	}
	b.WriteString(line)
	if strings.HasSuffix(strings.TrimRight(line, " \t"), `\`) {
		b.WriteString("\\\n")
	}
	return true
}
