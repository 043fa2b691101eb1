package delimited

import (
	"bytes"
	"fmt"
	"math"
	"strings"

	"thinward/io/internal/text"
)

// body reads rows until the end, or a row of index 0 0 0. Rows in the usual form are
// taken straight from the bytes; any other goes field by field.
func (r *reader) body() error {
	rows := r.fast()
	room := firstRoom
	r.aim(rows, room)
	start := r.i
	for n := 0; ; {
		if n == room {
			room = text.Room(n, r.i-start, r.src.SizeHint()-start)
			r.aim(rows, room)
		}
		if n%rowsPerMark == 0 {
			r.marks = append(r.marks, r.i)
		}
		if r.delimiter != 0 {
			r.i, n, _ = rows.Read(r.data, r.i, n, min(room, n-n%rowsPerMark+rowsPerMark), 0)
			if n == room || n == len(r.marks)*rowsPerMark {
				continue
			}
		}
		next, err := r.row(n)
		if err != nil {
			return err
		}
		if next < 0 {
			r.rows = n
			r.cut(n)
			return r.src.Err()
		}
		r.i = next
		n++
	}
}

// row stores row n and returns where the next begins, or -1 at the end of the list.
func (r *reader) row(n int) (int, error) {
	for {
		next := 0
		if r.delimiter == 0 {
			next = r.quickFixed(n)
		}
		if next == 0 {
			if !r.more(r.i) {
				return -1, nil
			}
			line, after := r.lineAt(r.i)
			if trimmed := bytes.TrimSpace(line); len(trimmed) == 0 || comment(trimmed[0]) || len(trimmed) == 1 && trimmed[0] == 0x1a {
				r.i = after
				continue
			}
			if err := r.slow(line, n); err != nil {
				return 0, err
			}
			next = after
		}
		if r.raw.H[n] == 0 && r.raw.K[n] == 0 && r.raw.L[n] == 0 {
			return -1, nil
		}
		return next, nil
	}
}

// fast sets up the reading of rows in the usual form, which fixed widths are not.
func (r *reader) fast() *text.Rows {
	rows := &text.Rows{Lines: true, Word: wordStart, Null: nullMarks}
	switch r.delimiter {
	case ' ':
		rows.Between, rows.Pad = text.Bytes(" \t"), text.Bytes(" \t")
	case '\t':
		rows.Between, rows.Pad = text.Bytes("\t"), text.Bytes(" ")
	default:
		rows.Between, rows.Pad = text.Bytes(string(r.delimiter)), text.Bytes(" \t")
	}
	return rows
}

var nullMarks = text.Bytes("?.")

// wordStart is what a field that is skipped may begin with when it is neither quoted
// nor a comment.
var wordStart = func() *text.ByteSet {
	var t text.ByteSet
	for b := 33; b < 127; b++ {
		t[b] = b != '"' && !comment(byte(b))
	}
	return &t
}()

// aim makes room for n rows and points the columns of rows there.
func (r *reader) aim(rows *text.Rows, n int) {
	r.grow(n)
	c := &r.raw
	rows.Columns = make([]text.Column, len(r.roles))
	for j, of := range r.roles {
		rows.Columns[j] = map[role]text.Column{
			roleSkip:       {Kind: text.ColumnSkip},
			roleH:          {Kind: text.ColumnIndex, Index: c.H},
			roleK:          {Kind: text.ColumnIndex, Index: c.K},
			roleL:          {Kind: text.ColumnIndex, Index: c.L},
			roleIntensity:  {Kind: text.ColumnValue, Value: c.I},
			roleSigma:      {Kind: text.ColumnValue, Value: c.Sigma},
			rolePhi:        {Kind: text.ColumnValue, Value: c.Phi},
			roleFrame:      {Kind: text.ColumnCount, Count: c.Frame},
			rolePartiality: {Kind: text.ColumnValue, Value: c.Partiality},
		}[of]
	}
	if r.delimiter != 0 {
		rows.Prepare()
	}
}

// store reads the number or word at d[i] and returns the offset behind it, 0 when
// there is none.
func (r *reader) store(d []byte, i, n int, role role) int {
	switch role {
	case roleH, roleK, roleL:
		x, j, ok := text.FastInt(d, i)
		if !ok || x < -math.MaxInt16 || x > math.MaxInt16 {
			return 0
		}
		switch role {
		case roleH:
			r.raw.H[n] = int16(x)
		case roleK:
			r.raw.K[n] = int16(x)
		default:
			r.raw.L[n] = int16(x)
		}
		return j
	case roleFrame:
		x, j, ok := text.FastInt(d, i)
		if !ok || x < 0 {
			return 0
		}
		r.raw.Frame[n] = int32(x)
		return j
	}
	x, j, ok := text.FastFloat(d, i)
	if !ok {
		return 0
	}
	switch role {
	case roleIntensity:
		r.raw.I[n] = x
	case roleSigma:
		r.raw.Sigma[n] = x
	case rolePhi:
		r.raw.Phi[n] = x
	default:
		r.raw.Partiality[n] = x
	}
	return j
}

// quickFixed reads a row of fixed widths in the usual form: a field is blanks, a
// number, blanks. It returns 0 for any other row and one that is not complete.
func (r *reader) quickFixed(n int) int {
	rest := r.data[r.i:]
	end := bytes.IndexByte(rest, '\n')
	if end < 0 {
		return 0
	}
	next := r.i + end + 1
	if end > 0 && rest[end-1] == '\r' {
		end--
	}
	line := rest[:end]
	if len(line) == 0 || comment(line[0]) || bytes.IndexByte(line, '\r') >= 0 {
		return 0
	}
	for c, role := range r.roles {
		if role == roleSkip {
			continue
		}
		a, b := r.edges[c], min(r.edges[c+1], len(line))
		for a < b && line[a] == ' ' {
			a++
		}
		if a >= b {
			return 0
		}
		j := r.store(line[:b], a, n, role)
		if j == 0 {
			return 0
		}
		for j < b && line[j] == ' ' {
			j++
		}
		if j < b {
			return 0
		}
	}
	if trailing := r.edges[len(r.edges)-1]; len(line) > trailing && len(bytes.TrimSpace(line[trailing:])) > 0 {
		return 0
	}
	return next
}

// slow stores any row, with an error that names line and column.
func (r *reader) slow(line []byte, n int) error {
	if j := bytes.IndexByte(line, 0); j >= 0 {
		return r.fault(r.i+j, "", "the line holds a NUL byte", "the file is damaged or not text; copy it again")
	}
	fields := r.split(line)
	if r.delimiter == ' ' && len(fields) > len(r.roles) {
		// A field of form feeds alone is trimmed to nothing.
		if next := fields[len(r.roles)]; len(next) > 0 && (next[0] == '#' || next[0] == '!') {
			fields = fields[:len(r.roles)]
		}
	}
	r.raw.H[n], r.raw.K[n], r.raw.L[n] = 1, 1, 1
	for j := 0; j < min(len(fields), len(r.roles)); j++ {
		if err := r.field(fields[j], j, n); err != nil {
			return err
		}
	}
	if r.delimiter == 0 {
		if trailing := r.edges[len(r.edges)-1]; len(line) > trailing && len(bytes.TrimSpace(line[trailing:])) > 0 {
			return r.fault(r.i, "", fmt.Sprintf("the row goes on behind its last column (%d characters)", trailing), "declare the rest as skip with its width")
		}
	}
	if len(fields) == len(r.roles) || r.raw.H[n] == 0 && r.raw.K[n] == 0 && r.raw.L[n] == 0 {
		return nil
	}
	remedy := "complete the row, or correct the declared order"
	if len(fields) > len(r.roles) {
		remedy = "declare columns that are not used as skip; decimal commas must become points"
	}
	return r.fault(r.i, "", fmt.Sprintf("the row has %d fields where %d are declared: %s", len(fields), len(r.roles), text.Shown(line)), remedy)
}

func null(f []byte) bool {
	switch strings.ToLower(string(f)) {
	case "", "?", ".", "nan", "na", "null":
		return true
	}
	return false
}

func decimalComma(f []byte) bool {
	a, b, ok := bytes.Cut(f, []byte{','})
	return ok && len(b) > 0 && len(bytes.Trim(a, "+-0123456789")) == 0 && b[0]-'0' <= 9
}

func (r *reader) field(f []byte, j, n int) error {
	role := r.roles[j]
	if role == roleSkip {
		return nil
	}
	if null(f) && (len(f) > 0 || role > roleL) {
		r.setNull(role, n)
		return nil
	}
	if decimalComma(f) {
		return r.fault(r.i, r.column(j), text.Shown(f)+" has a decimal comma", "write decimal points; with commas one cannot tell a number from two fields")
	}
	if role <= roleL && role >= roleH || role == roleFrame {
		return r.integer(f, j, n)
	}
	x, _, ok := text.ParseNumber(f)
	if !ok {
		return r.fault(r.i, r.column(j), text.Shown(f)+" is not a number", "write it in decimal digits, as 12.5 or 1.2e-3, or ? where it is not known; or correct the declared order")
	}
	switch role {
	case roleIntensity:
		r.raw.I[n] = x
	case roleSigma:
		r.raw.Sigma[n] = x
	case rolePhi:
		r.raw.Phi[n] = x
	default:
		r.raw.Partiality[n] = x
	}
	return nil
}

func (r *reader) integer(f []byte, j, n int) error {
	x, ok := text.ParseIndex(f)
	role := r.roles[j]
	switch {
	case !ok && role == roleFrame:
		return r.fault(r.i, r.column(j), "the frame "+text.Shown(f)+" is not a whole number", "number the frames, or declare the column as skip")
	case !ok:
		return r.fault(r.i, r.column(j), "the index "+text.Shown(f)+" is not a whole number", "indices must be integers; correct the declared order, or give widths where columns touch")
	case role == roleFrame && (x < 0 || x > math.MaxInt32):
		return r.fault(r.i, r.column(j), fmt.Sprintf("the frame %d is negative", x), "number the frames from 0 or 1, or declare the column as skip")
	case role != roleFrame && (x < -math.MaxInt16 || x > math.MaxInt16):
		return r.fault(r.i, r.column(j), fmt.Sprintf("the index %d is out of range", x), "indices lie within -32767 and 32767; give widths where columns touch")
	}
	switch role {
	case roleH:
		r.raw.H[n] = int16(x)
	case roleK:
		r.raw.K[n] = int16(x)
	case roleL:
		r.raw.L[n] = int16(x)
	default:
		r.raw.Frame[n] = int32(x)
	}
	return nil
}

func (r *reader) setNull(role role, n int) {
	switch role {
	case roleH:
		r.raw.H[n] = text.NullIndex
	case roleK:
		r.raw.K[n] = text.NullIndex
	case roleL:
		r.raw.L[n] = text.NullIndex
	case roleIntensity:
		r.raw.I[n] = math.NaN()
	case roleSigma:
		r.raw.Sigma[n] = math.NaN()
	case rolePhi:
		r.raw.Phi[n] = math.NaN()
	case rolePartiality:
		r.raw.Partiality[n] = math.NaN()
	case roleFrame:
		r.raw.Frame[n] = text.NullFrame
	}
}

func (r *reader) grow(n int) {
	c := &r.raw
	c.H, c.K, c.L = text.Grown(c.H, n), text.Grown(c.K, n), text.Grown(c.L, n)
	c.I, c.Sigma = text.Grown(c.I, n), text.Grown(c.Sigma, n)
	for _, role := range r.roles {
		switch role {
		case rolePhi:
			c.Phi = text.Grown(c.Phi, n)
		case roleFrame:
			c.Frame = text.Grown(c.Frame, n)
		case rolePartiality:
			c.Partiality = text.Grown(c.Partiality, n)
		}
	}
}

func (r *reader) cut(n int) {
	c := &r.raw
	c.H, c.K, c.L = text.Cut(c.H, n), text.Cut(c.K, n), text.Cut(c.L, n)
	c.I, c.Sigma, c.Phi = text.Cut(c.I, n), text.Cut(c.Sigma, n), text.Cut(c.Phi, n)
	c.Frame, c.Partiality = text.Cut(c.Frame, n), text.Cut(c.Partiality, n)
}
