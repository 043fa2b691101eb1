package text

import (
	"encoding/binary"
	"math"
	"math/bits"
)

// ColumnKind says what Rows does with a column.
type ColumnKind uint8

const (
	ColumnOther ColumnKind = iota // nothing: Read stops in front of it
	ColumnSkip                    // goes past one word
	ColumnIndex                   // an integer into Index
	ColumnValue                   // a decimal number into Value
	ColumnCount                   // an integer from 0 up into Count, and -1 into Code
	ColumnSame                    // the word remembered: its number into Code or Byte
)

// Column is one column of Rows with the place its values go to: the slice that its
// kind names, of length above the highest row read. Code of a count may be nil.
type Column struct {
	Kind  ColumnKind
	Index []int16
	Value []float64
	Count []int32
	Code  []int32
	Byte  []uint8
	word  uint64 // remembered, with a mask of its bytes; mask 0 for none
	mask  uint64
	id    int32
}

// Remember makes ColumnSame take word, of at most seven bytes, as id; longer ones are
// left to the caller.
func (c *Column) Remember(word []byte, id int32) {
	c.word, c.mask, c.id = 0, 0, id
	if len(word) >= window {
		return
	}
	for j, b := range word {
		c.word |= uint64(b) << (8 * j)
		c.mask |= 0xff << (8 * j)
	}
}

// ByteSet is a set of bytes.
type ByteSet [256]bool

// Bytes returns the set of the bytes of s.
func Bytes(s string) *ByteSet {
	var t ByteSet
	for i := range len(s) {
		t[s[i]] = true
	}
	return &t
}

// Rows reads rows of numbers in their usual form: integers with an optional minus,
// decimal numbers without an uncertainty, words. It is the fast path of the readers
// and never decides that anything is wrong: it stops in front of what it does not
// know, and the reader of the format takes over.
//
// Between are the bytes of which one must stand behind a column, Pad those that may
// stand in any number before one. With Lines, a row ends with its line and a row in
// another form is left as a whole, as is one whose indices are all 0; without, the end of a
// line is as good as any blank, and Read may go on in the middle of a row. Word are
// the bytes with which a skipped word may begin; it ends in front of a byte of
// Between or, with Lines, of a line end. Null are the bytes that alone stand for a
// value that is not given: NaN, counted in Nulls.
type Rows struct {
	Columns       []Column
	Between, Pad  *ByteSet
	Word, Null    *ByteSet
	Lines         bool
	Nulls         int
	final, inWord ByteSet
	wide          bool // no byte that ends a word is above a blank
}

// Prepare must be called before the first Read.
func (k *Rows) Prepare() {
	k.final, k.inWord, k.wide = *k.Between, ByteSet{}, k.Between[' ']
	if k.Lines {
		k.final = *k.Pad
		k.final['\n'], k.final['\r'] = true, true
	}
	for b := range 256 {
		k.inWord[b] = b >= 33 && b < 127 && !k.Between[b] || k.Lines && b > 127
	}
	if k.Lines {
		k.inWord[' '], k.inWord['\t'] = !k.Between[' '], !k.Between['\t']
	}
}

const (
	window = 8 // bytes looked at together
	ones   = 0x0101010101010101
	zeros  = '0' * ones
	highs  = 0x80 * ones
	point  = '.' ^ '0'
)

// Read reads the rows from n up to end, beginning with column c at d[i], and returns
// the offset, row and column where it stopped: row end, or the first value that is
// not in the usual form or not surely complete. Runs of up to eight digits are found
// and converted in one word instead of byte by byte (Lemire 2021, Softw. Pract. Exp.
// 51, 1700-1727, section 5); every value is that of FastFloat, bit for bit.
func (k *Rows) Read(d []byte, i, n, end, c int) (offset, row, column int) {
	columns, between, pad := k.Columns, k.Between, k.Pad
	last := len(d) - 2*window
	for start := i; n < end; n, c, start = n+1, 0, i {
		for ; c < len(columns); c++ {
			for i <= last && pad[d[i]] {
				i++
			}
			if i > last {
				return k.stop(start, i, n, c)
			}
			ends := between
			if c == len(columns)-1 {
				ends = &k.final
			}
			var j int
			switch col := &columns[c]; col.Kind {
			case ColumnValue:
				var x float64
				if x, j = shortFloat(d, i, ends); j == 0 {
					if x, j = k.longFloat(d, i, ends); j == 0 {
						return k.stop(start, i, n, c)
					}
				}
				col.Value[n] = x
			case ColumnIndex:
				w := binary.LittleEndian.Uint64(d[i : i+8])
				minus := minusFirst(w)
				digits := w>>(8*minus&63) ^ zeros
				length := runBits(digits)
				x := int(digitsValue(digits, length))
				if j = i + int(minus) + length/8; uint(length-8) > 32 || x > math.MaxInt16 || !ends[d[j]] {
					return k.stop(start, i, n, c)
				}
				col.Index[n] = int16(x ^ -int(minus) + int(minus))
			case ColumnCount:
				w := binary.LittleEndian.Uint64(d[i : i+8])
				length := runBits(w ^ zeros)
				if j = i + length/8; length == 0 || !ends[d[j]] {
					return k.stop(start, i, n, c)
				}
				col.Count[n] = int32(digitsValue(w^zeros, length))
				if col.Code != nil {
					col.Code[n] = -1
				}
			case ColumnSame:
				w := binary.LittleEndian.Uint64(d[i : i+8])
				j = i + bits.Len64(col.mask)/8
				if w&col.mask != col.word || col.mask == 0 || !ends[d[j]] {
					return k.stop(start, i, n, c)
				}
				if col.Code != nil {
					col.Code[n] = col.id
				} else {
					col.Byte[n] = uint8(col.id)
				}
			case ColumnSkip:
				if j = k.skip(d, i); j == i || j >= len(d) || !ends[d[j]] {
					return k.stop(start, i, n, c)
				}
			default:
				return k.stop(start, i, n, c)
			}
			i = j + 1
		}
		if k.Lines {
			if i = k.lineEnd(d, i-1, n); i == 0 {
				return start, n, 0
			}
		}
	}
	return i, n, c
}

// lineEnd returns the start of the next line, d[i] being the first byte behind row n;
// 0 when something else stands in the line or the row is the last.
func (k *Rows) lineEnd(d []byte, i, n int) int {
	for i < len(d) && k.Pad[d[i]] {
		i++
	}
	if i+1 >= len(d) || k.indexZero(n) {
		return 0
	}
	switch {
	case d[i] == '\n' || d[i] == '\r' && d[i+1] != '\n':
		return i + 1
	case d[i] == '\r':
		return i + 2
	}
	return 0
}

func (k *Rows) indexZero(n int) bool {
	var any int16
	for c := range k.Columns {
		if k.Columns[c].Kind == ColumnIndex {
			any |= k.Columns[c].Index[n]
		}
	}
	return any == 0
}

// stop undoes the row begun when rows are lines.
func (k *Rows) stop(start, i, n, c int) (offset, row, column int) {
	if k.Lines {
		return start, n, 0
	}
	return i, n, c
}

// skip returns the end of the word at d[i], i itself when there is none.
func (k *Rows) skip(d []byte, i int) int {
	if !k.Word[d[i]] {
		return i
	}
	for ; k.wide && i+window <= len(d); i += window {
		w := binary.LittleEndian.Uint64(d[i : i+8])
		if odd := ((w - '!'*ones) | (w + ones) | w) & highs; odd != 0 {
			i += bits.TrailingZeros64(odd) / 8
			break
		}
	}
	for i < len(d) && k.inWord[d[i]] {
		i++
	}
	return i
}

// minusFirst is 1 when the first byte of w is a minus, else 0, without a branch:
// signs are the least predictable thing in a list of reflections.
func minusFirst(w uint64) uint64 { return (w&0xff ^ '-' - 1) >> 63 }

// runBits returns eight times the number of leading bytes below ten. Sums that
// carry into the next byte come only from bytes that are themselves no digits, so
// the first mark is right.
func runBits(w uint64) int { return bits.TrailingZeros64((w+0x76*ones|w)&highs) &^ 7 }

// digitsValue is the number whose digits are the first length/8 bytes of w, length
// from 8 to 64.
func digitsValue(w uint64, length int) uint64 {
	w <<= (64 - length) & 63
	w = w * (1 + 10<<8) >> 8 & 0x00ff00ff00ff00ff
	w = w * (1 + 100<<16) >> 16 & 0x0000ffff0000ffff
	return w * (1 + 10000<<32) >> 32
}

// shortFloat is FastFloat for a number of up to eight characters without exponent that
// ends in front of a byte of ends, in one step; next is 0 for any other.
func shortFloat(d []byte, i int, ends *ByteSet) (x float64, next int) {
	w := binary.LittleEndian.Uint64(d[i : i+8])
	minus := minusFirst(w)
	w = w>>(8*minus&63) ^ zeros
	marks := (w + 0x76*ones | w) & highs
	whole := bits.TrailingZeros64(marks) &^ 7
	length, decimals := whole, 0
	next = i + int(minus) + whole/8
	if whole < 64 && byte(w>>(whole&63)) == point {
		both := bits.TrailingZeros64(marks&(marks-1)) &^ 7
		length = both - 8
		decimals = (length - whole) / 8
		next += decimals + 1
		front := uint64(1)<<(whole&63) - 1
		w = w&front | w>>8&^front
	}
	if length == 0 || next >= len(d) || !ends[d[next]] {
		return 0, 0
	}
	x = float64(digitsValue(w, length)) / powersOfTen[decimals&15]
	return math.Float64frombits(math.Float64bits(x) | minus<<63), next
}

// longFloat is shortFloat for any number, and for nulls.
func (k *Rows) longFloat(d []byte, i int, ends *ByteSet) (x float64, next int) {
	if k.Null[d[i]] && ends[d[i+1]] {
		k.Nulls++
		return math.NaN(), i + 1
	}
	x, next, ok := FastFloat(d, i)
	if !ok || next >= len(d) || !ends[d[next]] {
		return 0, 0
	}
	return x, next
}
