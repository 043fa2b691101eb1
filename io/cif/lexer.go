package cif

import (
	"strings"
	"unicode/utf8"

	"thinward/analysis/intensity"
	"thinward/io/internal/text"
)

const (
	ordinary = iota
	blank
	illegal
)

// class of a byte outside comments: CIF 1.1 knows tab, LF, CR and 32 to 126.
var class = classes(illegal)

// class2 is class for CIF 2.0, where UTF-8 is at home.
var class2 = classes(ordinary)

func classes(high uint8) *[256]uint8 {
	var t [256]uint8
	for c := range t {
		switch {
		case c == ' ' || c == '\t' || c == '\n' || c == '\r':
			t[c] = blank
		case c < 32 || c == 127:
			t[c] = illegal
		case c > 127:
			t[c] = high
		}
	}
	return &t
}

type tokenKind uint8

const (
	tokEnd tokenKind = iota
	tokData
	tokLoop
	tokFrame    // save_CODE
	tokFrameEnd // save_
	tokName
	tokValue
)

// span is a value in the text: its content without quotes or semicolons.
type span struct {
	start, end int
	kind       Kind
}

type token struct {
	kind tokenKind
	span
	at int // offset of the first character, quotes and semicolons included
}

type lexer struct {
	name    string
	src     *text.Source
	data    []byte
	i       int
	class   *[256]uint8
	version string
	block   string // for errors
	item    string
	inside  int // open brackets of a CIF 2.0 list or table
	warned  map[string]bool
	warn    []intensity.Warning
}

// fill waits for more text and reports whether there is any.
func (l *lexer) fill() bool {
	if !l.src.More() {
		return false
	}
	l.data = l.src.Bytes()
	return true
}

// more reports whether there is a byte at offset i, waiting for it if need be.
func (l *lexer) more(i int) bool {
	for i >= len(l.data) {
		if !l.fill() {
			return false
		}
	}
	return true
}

// fault makes the error at offset off; a failure of the source comes first, since
// it explains whatever else is missing.
func (l *lexer) fault(off int, problem, remedy string) error {
	if err := l.src.Err(); err != nil {
		return err
	}
	return &Error{File: l.name, Line: text.Line(l.data, off), Block: l.block, Item: l.item, Problem: problem, Remedy: remedy}
}

func (l *lexer) once(code, sentence string, off int) {
	if l.warned[code] {
		return
	}
	l.warned[code] = true
	l.warn = append(l.warn, intensity.Warning{Code: code, Text: sentence, Where: where(l.name, text.Line(l.data, off))})
}

// begin looks at the first bytes: byte-order marks and the version line.
func (l *lexer) begin() error {
	for len(l.data) < 16 && l.fill() {
	}
	d := l.data
	if problem, remedy := text.Foreign(d); problem != "" {
		return l.fault(0, problem, remedy)
	}
	if strings.HasPrefix(string(d[:min(3, len(d))]), "\xef\xbb\xbf") {
		l.i = 3
		l.once("byte-order-mark", "the file begins with a byte-order mark, which CIF 1.1 does not allow; it was skipped", 0)
	}
	l.version, l.class = "1.1", class
	const two = `#\#CIF_2.0`
	if rest := d[l.i:]; strings.HasPrefix(string(rest[:min(len(two), len(rest))]), two) &&
		(len(rest) == len(two) || class[rest[len(two)]] == blank) {
		l.version, l.class = "2.0", class2
	}
	return nil
}

// next returns the next token. Before it, a blank or the start of the file stands.
func (l *lexer) next() (token, error) {
	for {
		for l.i < len(l.data) && l.class[l.data[l.i]] == blank {
			l.i++
		}
		if l.i == len(l.data) {
			if l.fill() {
				continue
			}
			return token{at: l.i}, l.src.Err()
		}
		if l.data[l.i] == '#' {
			if err := l.comment(); err != nil {
				return token{}, err
			}
			continue
		}
		break
	}
	at := l.i
	switch c := l.data[at]; c {
	case '\'', '"':
		s, err := l.quoted(at)
		return token{kind: tokValue, span: s, at: at}, err
	case ';':
		if at == 0 || l.data[at-1] == '\n' || l.data[at-1] == '\r' {
			s, err := l.textField(at)
			return token{kind: tokValue, span: s, at: at}, err
		}
	case '[', '{':
		if l.version == "2.0" {
			s, err := l.compound(at)
			return token{kind: tokValue, span: s, at: at}, err
		}
		if c == '[' {
			return token{}, l.fault(at, "an unquoted value begins with [", "put the value in quotes")
		}
	case ']', '$':
		return token{}, l.fault(at, "an unquoted value begins with "+string(c), "put the value in quotes")
	}
	return l.word(at)
}

// comment skips from # to the end of the line.
func (l *lexer) comment() error {
	for ; l.more(l.i); l.i++ {
		c := l.data[l.i]
		if c == '\n' || c == '\r' {
			return nil
		}
		if l.class[c] == illegal {
			if c == 0 {
				return l.fault(l.i, "the file holds a NUL byte", "the file is damaged or not text; copy it again")
			}
			if l.endMark(l.i) {
				return nil
			}
			l.once("comment-characters", "a comment holds characters that CIF 1.1 does not allow; comments carry no data", l.i)
		}
	}
	return nil
}

// endMark handles a control-Z that ends the file: an old disk habit.
func (l *lexer) endMark(i int) bool {
	if l.data[i] != 0x1a || l.more(i+1) {
		return false
	}
	l.once("control-z", "the file ends with a control-Z character; it was skipped", i)
	l.data = l.data[:i]
	return true
}

func (l *lexer) bad(i int) error {
	c := l.data[i]
	switch {
	case c == 0:
		return l.fault(i, "the file holds a NUL byte", "the file is damaged or not text; copy it again")
	case c > 127:
		return l.fault(i, "a value or name holds the non-ASCII byte "+text.Shown(l.data[i:i+1]),
			`write it with a backslash code such as \a, or begin the file with #\#CIF_2.0`)
	}
	return l.fault(i, "a value or name holds the control character "+text.Shown(l.data[i:i+1]), "remove it; only blank, tab and line ends separate values")
}

// checkRun refuses illegal characters in a finished stretch of text.
func (l *lexer) checkRun(start, end int) error {
	high := false
	for i := start; i < end; i++ {
		if l.class[l.data[i]] == illegal {
			return l.bad(i)
		}
		high = high || l.data[i] > 127
	}
	if high && !utf8.Valid(l.data[start:end]) {
		return l.fault(start, "the text is not valid UTF-8", "save the file as UTF-8")
	}
	return nil
}

func (l *lexer) word(at int) (token, error) {
	i := at
	for l.more(i) {
		k := l.class[l.data[i]]
		if k == blank || k == illegal && l.endMark(i) {
			break
		}
		if k == illegal {
			return token{}, l.bad(i)
		}
		i++
	}
	if i == at {
		return l.next()
	}
	l.i = i
	w := l.data[at:i]
	if l.version == "2.0" {
		if err := l.checkRun(at, i); err != nil {
			return token{}, err
		}
	}
	t := token{span: span{at, i, Word}, at: at}
	if w[0] == '_' {
		t.kind = tokName
		return t, nil
	}
	if reservedStart[w[0]] && len(w) >= 5 {
		if kind, skip, err := l.reserved(w, at); err != nil || kind != tokValue {
			t.kind, t.start = kind, at+skip
			return t, err
		}
	}
	t.kind = tokValue
	if len(w) == 1 {
		switch w[0] {
		case '?':
			t.span.kind = Unknown
		case '.':
			t.span.kind = Inapplicable
		}
	}
	if l.version == "2.0" && strings.ContainsAny(string(w), "[]{}") {
		return token{}, l.fault(at, "an unquoted CIF 2.0 value holds a bracket: "+text.Shown(w), "put the value in quotes")
	}
	return t, nil
}

var reservedStart = [256]bool{'d': true, 'D': true, 'l': true, 'L': true, 's': true, 'S': true, 'g': true, 'G': true}

// reserved tells headings and keywords from values; skip is the length of what
// precedes a code.
func (l *lexer) reserved(w []byte, at int) (kind tokenKind, skip int, err error) {
	low := strings.ToLower(string(w[:min(len(w), 8)]))
	switch {
	case strings.HasPrefix(low, "data_"):
		if len(w) == 5 {
			return 0, 0, l.fault(at, "a data_ heading has no block code", "name the block, for example data_thin")
		}
		return tokData, 5, nil
	case strings.HasPrefix(low, "save_"):
		if len(w) == 5 {
			return tokFrameEnd, 5, nil
		}
		return tokFrame, 5, nil
	case low == "loop_":
		return tokLoop, 0, nil
	case low == "stop_" || low == "global_":
		return 0, 0, l.fault(at, "the reserved word "+string(w)+" has no use in CIF", "put it in quotes if it is meant as a value")
	}
	return tokValue, 0, nil
}

// ends reports whether a quoted value may end in front of offset i: at a blank, at the
// end of the text, and inside a list or table at a bracket or colon.
func (l *lexer) ends(i int) bool {
	if !l.more(i) || l.class[l.data[i]] == blank {
		return true
	}
	return l.inside > 0 && strings.IndexByte("]}:", l.data[i]) >= 0 || l.data[i] == 0x1a && l.endMark(i)
}

func (l *lexer) quoted(at int) (span, error) {
	q := l.data[at]
	if l.version == "2.0" && l.more(at+2) && l.more(at+1) && l.data[at+1] == q && l.data[at+2] == q {
		return l.tripleQuoted(at)
	}
	for i := at + 1; l.more(i); i++ {
		c := l.data[i]
		if c == '\n' || c == '\r' {
			return span{}, l.fault(at, "a quoted string is not closed on its line", "close it with "+string(q)+" followed by a blank, or use a text field for text of several lines")
		}
		if c != q {
			continue
		}
		if !l.ends(i + 1) {
			if l.version != "2.0" {
				continue
			}
			return span{}, l.fault(at, "a CIF 2.0 string holds its own quote mark", "use the other quote mark or triple quotes")
		}
		l.i = i + 1
		return span{at + 1, i, Quoted}, l.checkRun(at+1, i)
	}
	return span{}, l.fault(at, "a quoted string is not closed before the end of the file", "close it with "+string(q))
}

func (l *lexer) tripleQuoted(at int) (span, error) {
	q := l.data[at]
	for i := at + 3; l.more(i + 2); i++ {
		if l.data[i] != q || l.data[i+1] != q || l.data[i+2] != q {
			continue
		}
		if !l.ends(i + 3) {
			return span{}, l.fault(at, "a triple-quoted string is not followed by a blank", "put a blank behind the closing quotes")
		}
		l.i = i + 3
		return span{at + 3, i, Quoted}, l.checkRun(at+3, i)
	}
	return span{}, l.fault(at, "a triple-quoted string is not closed before the end of the file", "close it with three quote marks")
}

func (l *lexer) textField(at int) (span, error) {
	for i := at + 1; l.more(i); i++ {
		if l.data[i] != ';' || l.data[i-1] != '\n' && l.data[i-1] != '\r' {
			continue
		}
		end := i - 1
		if l.data[end] == '\n' && end > at+1 && l.data[end-1] == '\r' {
			end--
		}
		l.i = i + 1
		if !l.ends(l.i) {
			return span{}, l.fault(i, "the ; that closes a text field is not followed by a blank", "put the next word on a line of its own")
		}
		return span{at + 1, end, TextField}, l.checkRun(at+1, end)
	}
	return span{}, l.fault(at, "a text field is not closed before the end of the file", "close it with ; as the first character of a line")
}
