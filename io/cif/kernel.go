package cif

import (
	"bytes"
	"fmt"
	"math"
	"strings"

	"thinward/io/internal/text"
)

// firstRoom is the number of rows after which the length of the columns is
// estimated from the bytes a row took.
const firstRoom = 2048

// plainStart marks the bytes with which a value begins that is certainly an
// unquoted word and no heading or keyword.
var plainStart = func() *text.ByteSet {
	var t text.ByteSet
	for c := 33; c < 127; c++ {
		t[c] = !strings.ContainsRune("\"#$'_[]{;dDlLsSgG", rune(c))
	}
	return &t
}()

var neverPlain text.ByteSet

// reflections reads the rows of a loop from its first value, p.tok, into columns.
// Numbers and words that stand in the usual form are taken straight from the
// bytes; everything else (quotes, text fields, comments, nulls, the end) goes
// through the lexer.
func (p *parser) reflections(loop *Loop, pl *plan) error {
	l := &list{file: p.file, block: p.block, plan: pl, names: loop.Names, twinRow: -1}
	p.file.lists = append(p.file.lists, l)
	p.i = p.tok.at
	n, err := p.readRows(l)
	if err != nil {
		return err
	}
	l.finish(n)
	loop.Rows = n
	return nil
}

func (p *parser) readRows(l *list) (int, error) {
	q := quick{list: l, class: p.class, plain: plainStart}
	if p.version == "2.0" {
		q.plain = &neverPlain
	}
	q.rows = text.Rows{Between: blanks, Pad: blanks, Word: q.plain, Null: nullMarks}
	defer func() { l.nulls += q.rows.Nulls }()
	i, start, columns := p.i, p.i, len(l.plan.roles)
	room := firstRoom
	q.aim(room)
	for n, c := 0, 0; ; {
		if n == room {
			room = text.Room(n, i-start, p.src.SizeHint()-start)
			q.aim(room)
		}
		if n%rowsPerMark == 0 && c == 0 {
			l.marks = append(l.marks, i)
		}
		i, n, c = q.rows.Read(p.data, i, n, min(room, n-n%rowsPerMark+rowsPerMark), c)
		if n == room || n%rowsPerMark == 0 && c == 0 && n/rowsPerMark == len(l.marks) {
			continue
		}
		if j := q.word(p.data, i, n, c); j > 0 {
			i = j
		} else {
			p.i = i
			tok, err := p.next()
			if err != nil {
				return 0, err
			}
			if tok.kind != tokValue {
				p.tok = tok
				if c != 0 {
					return 0, p.wrongCount(&Loop{Names: l.names}, n*columns+c)
				}
				return n, nil
			}
			if err := p.slowly(l, n, c, tok); err != nil {
				return 0, err
			}
			i = p.i
		}
		if c++; c == columns {
			n, c = n+1, 0
		}
	}
}

var (
	blanks    = text.Bytes(" \t\r\n")
	nullMarks = text.Bytes("?.")
)

// quick is the path of values in the usual form.
type quick struct {
	*list
	rows  text.Rows
	class *[256]uint8
	plain *text.ByteSet
}

// aim makes room for n rows and points the columns of rows there.
func (q *quick) aim(n int) {
	q.grow(n)
	r := &q.raw
	columns := make([]text.Column, len(q.plan.roles))
	for c, of := range q.plan.roles {
		columns[c] = map[role]text.Column{
			roleSkip:       {Kind: text.ColumnSkip},
			roleH:          {Kind: text.ColumnIndex, Index: r.H},
			roleK:          {Kind: text.ColumnIndex, Index: r.K},
			roleL:          {Kind: text.ColumnIndex, Index: r.L},
			roleIntensity:  {Kind: text.ColumnValue, Value: r.I},
			roleSigma:      {Kind: text.ColumnValue, Value: r.Sigma},
			roleMate:       {Kind: text.ColumnValue, Value: q.mate.I},
			roleMateSigma:  {Kind: text.ColumnValue, Value: q.mate.Sigma},
			rolePhi:        {Kind: text.ColumnValue, Value: r.Phi},
			rolePartiality: {Kind: text.ColumnValue, Value: r.Partiality},
			roleFrame:      {Kind: text.ColumnCount, Count: r.Frame},
			roleScaleGroup: {Kind: text.ColumnCount, Count: r.Frame, Code: q.scale.of},
			roleDataSet:    {Kind: text.ColumnSame, Code: q.dataSet.of},
			roleStatus:     {Kind: text.ColumnSame, Byte: q.status},
		}[of]
	}
	q.rows.Columns = columns
	q.rows.Prepare()
}

// word stores what Rows leaves: a word of column c at d[i], or a null. It returns
// the offset behind it, 0 when it is anything else or not complete.
func (q *quick) word(d []byte, i, n, c int) int {
	for i < len(d) && q.class[d[i]] == blank {
		i++
	}
	if i == len(d) || !q.plain[d[i]] {
		return 0
	}
	j := i + 1
	for j < len(d) && q.class[d[j]] == ordinary {
		j++
	}
	if j == len(d) || q.class[d[j]] != blank {
		return 0
	}
	null := j == i+1 && (d[i] == '?' || d[i] == '.')
	switch q.plan.roles[c] {
	case roleSkip:
	case roleDataSet:
		if null {
			return 0
		}
		q.dataSet.of[n] = q.dataSet.id(d[i:j])
		q.rows.Columns[c].Remember(d[i:j], q.dataSet.of[n])
	case roleStatus:
		if j > i+1 {
			return 0
		}
		q.setStatus(n, d[i:j])
		q.rows.Columns[c].Remember(d[i:j], int32(q.status[n]))
	default:
		return 0
	}
	return j
}

// slowly stores any value of the loop.
func (p *parser) slowly(l *list, n, c int, tok token) error {
	r := l.plan.roles[c]
	w := p.data[tok.start:tok.end]
	null := tok.span.kind == Unknown || tok.span.kind == Inapplicable
	if null && r != roleSkip && r != roleStatus {
		l.nulls++
	}
	switch r {
	case roleH, roleK, roleL:
		return p.slowIndex(l, n, c, tok, null)
	case roleHKL:
		return p.slowVector(l, n, c, tok, null)
	case roleIntensity, roleIntensitySU, roleSigma, roleMate, roleMateSigma, rolePhi, rolePartiality:
		x, su := math.NaN(), math.NaN()
		if !null {
			var ok bool
			if x, su, ok = text.ParseNumber(w); !ok || tok.span.kind == TextField {
				return p.notNumber(l, c, tok)
			}
		}
		switch r {
		case roleIntensity:
			l.raw.I[n] = x
		case roleIntensitySU:
			l.raw.I[n], l.raw.Sigma[n] = x, su
			if !math.IsNaN(su) {
				l.plainSU++
			}
		case roleSigma:
			l.raw.Sigma[n] = x
		case roleMate:
			l.mate.I[n] = x
		case roleMateSigma:
			l.mate.Sigma[n] = x
		case rolePhi:
			l.raw.Phi[n] = x
		default:
			l.raw.Partiality[n] = x
		}
	case roleFrame:
		l.raw.Frame[n] = text.NullFrame
		if !null {
			x, ok := text.ParseIndex(w)
			if !ok || x < 0 {
				p.item = l.names[c]
				return p.fault(tok.at, "the image number "+text.Shown(w)+" is not a whole number from 0 up", "give the number of the image, or ? where it is not known")
			}
			l.raw.Frame[n] = int32(x)
		}
	case roleScaleGroup, roleScaleSet:
		l.scaleCode(n, w, null, r == roleScaleGroup)
	case roleDataSet:
		l.dataSet.of[n] = -1
		if !null {
			l.dataSet.of[n] = l.dataSet.id(w)
		}
	case roleStatus:
		if null {
			w = []byte("o")
		}
		l.setStatus(n, w)
	}
	return nil
}

func (p *parser) slowIndex(l *list, n, c int, tok token, null bool) error {
	w := p.data[tok.start:tok.end]
	x, ok := text.NullIndex, true
	if !null {
		x, ok = text.ParseIndex(w)
		if !ok || tok.span.kind == TextField {
			p.item = l.names[c]
			return p.fault(tok.at, "the index "+text.Shown(w)+" is not a whole number", "indices must be integers; look for a shifted column or a value too many in the rows before")
		}
		if x < -math.MaxInt16 || x > math.MaxInt16 {
			p.item = l.names[c]
			return p.fault(tok.at, fmt.Sprintf("the index %d is out of range", x), "indices lie within -32767 and 32767; look for columns that touch")
		}
	}
	switch l.plan.roles[c] {
	case roleH:
		l.raw.H[n] = int16(x)
	case roleK:
		l.raw.K[n] = int16(x)
	default:
		l.raw.L[n] = int16(x)
	}
	return nil
}

func (p *parser) slowVector(l *list, n, c int, tok token, null bool) error {
	hkl := [3]int{text.NullIndex, text.NullIndex, text.NullIndex}
	if !null {
		w := p.data[tok.start:tok.end]
		var ok bool
		hkl, ok = indexVector(w)
		for _, x := range hkl {
			ok = ok && x >= -math.MaxInt16 && x <= math.MaxInt16
		}
		if !ok || tok.span.kind != Compound {
			p.item = l.names[c]
			return p.fault(tok.at, "the index "+text.Shown(w)+" is not a list of three whole numbers", "write it as [1 2 3], within -32767 and 32767")
		}
	}
	l.raw.H[n], l.raw.K[n], l.raw.L[n] = int16(hkl[0]), int16(hkl[1]), int16(hkl[2])
	return nil
}

func (p *parser) notNumber(l *list, c int, tok token) error {
	p.item = l.names[c]
	w := p.data[tok.start:tok.end]
	return p.fault(tok.at, text.Shown(w)+" is not a number", numberRemedy(w))
}

func numberRemedy(w []byte) string {
	low := strings.ToLower(string(bytes.TrimLeft(w, "+-")))
	switch {
	case strings.Contains(low, ","):
		return "write a decimal point, not a comma"
	case low == "nan" || strings.HasPrefix(low, "inf"):
		return "write ? for a value that is not known"
	case strings.Contains(low, "("):
		return "a standard uncertainty is digits in parentheses behind the whole number, as in 12.3(4)"
	case strings.Contains(low, "d"):
		return "write the exponent with e"
	}
	return "write it in decimal digits, as 12.5 or 1.2e-3"
}

// scaleCode takes 12 as a frame, 12%3 as frame 12 of set 3 and anything else as a
// set without frames.
func (l *list) scaleCode(n int, w []byte, null, frames bool) {
	frame, set := text.NullFrame, int32(-1)
	if !null {
		frame = noFrame
		number, name, two := bytes.Cut(w, []byte("%"))
		x, ok := text.ParseIndex(number)
		switch {
		case ok && x >= 0 && two && len(name) > 0:
			frame, set = x, l.scale.id(name)
		case ok && x >= 0 && !two:
			frame = x
		default:
			set = l.scale.id(w)
		}
	}
	l.scale.of[n] = set
	if frames {
		l.raw.Frame[n] = int32(frame)
	}
}

func (l *list) setStatus(n int, w []byte) {
	l.status[n] = statusKeep
	switch {
	case len(w) == 1 && w[0] == '-':
		l.status[n] = statusAbsent
	case len(w) == 1 && w[0] == 'x':
		l.status[n] = statusUnreliable
	case len(w) == 1 && strings.IndexByte("o<hlf.?", w[0]) >= 0:
	case l.odd == "":
		l.odd = text.Shown(w)
	}
}
