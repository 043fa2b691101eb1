package text

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// oneValue reads a single number with Rows, at the end of some text before it.
func oneValue(s string) (x float64, ok bool) {
	k := Rows{Columns: []Column{{Kind: ColumnValue, Value: make([]float64, 1)}}, Between: Bytes(" \n"), Pad: Bytes(" \n"), Word: &ByteSet{}, Null: &ByteSet{}}
	k.Prepare()
	_, n, _ := k.Read([]byte("x\n"+s+" the rest of the text is here"), 2, 0, 1, 0)
	return k.Columns[0].Value[0], n == 1
}

// strconv is the reference, bit for bit, and all usual forms must be taken.
func TestRowsValuesAreExact(t *testing.T) {
	r := rand.New(rand.NewPCG(11, 12))
	taken := 0
	const n = 200000
	for i := range n {
		x := r.NormFloat64() * math.Pow(10, float64(r.IntN(14)-6))
		s := strconv.FormatFloat(x, "ffeg"[i%4], r.IntN(9), 64)
		got, ok := oneValue(s)
		if !ok {
			continue
		}
		taken++
		if want, err := strconv.ParseFloat(s, 64); err != nil || math.Float64bits(got) != math.Float64bits(want) {
			t.Fatalf("%s: got %v, want %v", s, got, want)
		}
	}
	if taken < n*99/100 {
		t.Errorf("only %d of %d were taken", taken, n)
	}
	for _, s := range []string{"0", "-0", "-0.00", "5", "-5", "5.", ".5", "-.5", "1234567", "12345678", "-1234567", "-12345678", "123456789", "99999999", "9999999.", "1234.567", "-123.456", "12345.678", "1e3", "-1.5E-7", "0.000001", "+5"} {
		want, err := strconv.ParseFloat(s, 64)
		if got, ok := oneValue(s); err != nil || !ok || math.Float64bits(got) != math.Float64bits(want) {
			t.Errorf("%s: got %v %v, want %v", s, got, ok, want)
		}
	}
	for _, s := range []string{"", ".", "-", "-.", "?", "1.2.3", "1,5", "--5", "5-", "12.3(4)", "1e", "1e+", "0x10", "NaN", "1_000", "12345678901234567890", "1\x80", "1.\xff", "\xb1", "5\v", "1.5d0", "'5'", ";5"} {
		if got, ok := oneValue(s); ok {
			t.Errorf("%q was taken as %v", s, got)
		}
	}
}

// All integers of up to seven characters that may be an index, and what lies beside.
func TestRowsIndices(t *testing.T) {
	k := Rows{Columns: []Column{{Kind: ColumnIndex, Index: make([]int16, 1)}}, Between: Bytes(" \n"), Pad: Bytes(" \n"), Word: &ByteSet{}, Null: &ByteSet{}}
	k.Prepare()
	read := func(s string) (int, bool) {
		_, n, _ := k.Read([]byte(s+" the rest of the text is here"), 0, 0, 1, 0)
		return int(k.Columns[0].Index[0]), n == 1
	}
	for x := -40000; x <= 40000; x++ {
		got, ok := read(strconv.Itoa(x))
		if inside := x >= -math.MaxInt16 && x <= math.MaxInt16; ok != inside || ok && got != x {
			t.Fatalf("%d: got %d %v", x, got, ok)
		}
	}
	for s, want := range map[string]int{"007": 7, "-00012": -12, "-0": 0, "\n  5": 5} {
		if got, ok := read(s); !ok || got != want {
			t.Errorf("%q: %d %v", s, got, ok)
		}
	}
	for _, s := range []string{"-", "+2", "1.0", "--1", "1-", "123456", "-123456", "9999999999", "?", "1a", "1\xff", "/", ":"} {
		if got, ok := read(s); ok {
			t.Errorf("%q was taken as %d", s, got)
		}
	}
}

// Read stops in front of what it does not know and goes on from any column; of rows
// that are lines it leaves the whole row.
func TestRowsStop(t *testing.T) {
	const tail = "\n# at least sixteen bytes of something else"
	text := "7 abc 1.5\n8 def ? 9 'g' 2.5" + tail
	k := Rows{Columns: []Column{{Kind: ColumnCount, Count: make([]int32, 9), Code: make([]int32, 9)}, {Kind: ColumnSkip}, {Kind: ColumnValue, Value: make([]float64, 9)}},
		Between: Bytes(" \n"), Pad: Bytes(" \n"), Word: Bytes("abcdef"), Null: &ByteSet{}}
	k.Prepare()
	var stops []string
	i, n, c := 0, 0, 0
	for range 4 {
		i, n, c = k.Read([]byte(text), i, n, 9, c)
		stops = append(stops, fmt.Sprint(n, c, strings.Fields(text[i:])[0]))
		if i += len(strings.Fields(text[i:])[0]); c == 2 {
			n, c = n+1, 0
		} else {
			c++
		}
	}
	if got := strings.Join(stops, ", "); got != "1 2?, 2 1'g', 3 0#, 3 2least" || k.Columns[0].Count[1] != 8 || k.Columns[0].Code[1] != -1 || k.Columns[2].Value[2] != 2.5 {
		t.Errorf("%s %v %v", got, k.Columns[0].Count, k.Columns[2].Value)
	}
	k.Columns[0] = Column{Kind: ColumnIndex, Index: make([]int16, 9)}
	k.Lines, k.Between, k.Pad = true, Bytes(" "), Bytes(" ")
	k.Prepare()
	for _, tt := range []struct {
		text string
		rest string
		rows int
	}{
		{"7 abc 1.5\n8 def 2.5  \r\n 9 a -1\r10 a ?" + tail, "10 a ?", 3},
		{"7 abc\n1.5 8" + tail, "7 abc\n", 0},
		{"7 abc 1.5 8\n" + tail, "7 abc 1.5 8", 0},
		{"7 abc 1.5 # x\n" + tail, "7 abc 1.5 #", 0},
		{"7 abc 1.5\n\n8 a 1" + tail, "\n8", 1},
		{"7 abc 1.5\n0 a 1\n8 a 1" + tail, "0 a", 1},
	} {
		i, n, c := k.Read([]byte(tt.text), 0, 0, 9, 0)
		if n != tt.rows || c != 0 || !strings.HasPrefix(tt.text[i:], tt.rest) {
			t.Errorf("%q: stopped at %q, row %d, column %d", tt.text, tt.text[i:], n, c)
		}
	}
}

// Nulls and a word that repeats.
func TestRowsNullsAndWords(t *testing.T) {
	k := Rows{Columns: []Column{{Kind: ColumnSame, Code: make([]int32, 9)}, {Kind: ColumnValue, Value: make([]float64, 9)}, {Kind: ColumnSame, Byte: make([]uint8, 9)}},
		Between: Bytes(" \n"), Pad: Bytes(" \n"), Word: &ByteSet{}, Null: Bytes("?.")}
	k.Prepare()
	k.Columns[0].Remember([]byte("ab"), 7)
	k.Columns[2].Remember([]byte("o"), 3)
	const text = "ab 1.5 o\nab ? o\nab . o\nab .5 o\nabc 1 o\nab ?5 o\nab 1 oo\nab 1 x and sixteen bytes more"
	if i, n, c := k.Read([]byte(text), 0, 0, 9, 0); n != 4 || c != 0 || text[i:i+3] != "abc" || k.Nulls != 2 {
		t.Errorf("stopped at %q, row %d, column %d, %d nulls", text[i:], n, c, k.Nulls)
	}
	v := k.Columns[1].Value
	if k.Columns[0].Code[3] != 7 || k.Columns[2].Byte[3] != 3 || v[0] != 1.5 || !math.IsNaN(v[1]) || !math.IsNaN(v[2]) || v[3] != .5 {
		t.Errorf("%+v", k.Columns)
	}
	for _, stop := range []string{"ab ?5", "ab 1 oo", "ab 1 x"} {
		at := strings.Index(text, stop)
		if _, n, c := k.Read([]byte(text), at, 0, 1, 0); n != 0 || c == 0 {
			t.Errorf("%s: row %d column %d", stop, n, c)
		}
	}
	k.Columns[0].Remember([]byte("eightlong"), 7)
	if _, n, c := k.Read([]byte("eightlong 1 o and sixteen bytes more"), 0, 0, 1, 0); n != 0 || c != 0 {
		t.Error("a long word was taken")
	}
}

// FuzzRows: whatever the bytes, what is taken is what strconv makes of the same word,
// and what is in the usual form is taken.
func FuzzRows(f *testing.F) {
	for _, s := range []string{"1 2.5", "-12 -1234.567\n8", "5 .5\n", "123456789 1e5", "9.9.9 1", "\x80\xff 1", "- 1", "12345678 12345678"} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		const room = 64
		index, value := make([]int16, room), make([]float64, room)
		k := Rows{Columns: []Column{{Kind: ColumnIndex, Index: index}, {Kind: ColumnValue, Value: value}}, Between: Bytes(" \t\r\n"), Pad: Bytes(" \t\r\n"), Word: &ByteSet{}, Null: &ByteSet{}}
		k.Prepare()
		text := append(append([]byte(nil), data...), "  and sixteen bytes more"...)
		words := strings.FieldsFunc(string(text), func(r rune) bool { return strings.ContainsRune(" \t\r\n", r) })
		_, n, c := k.Read(text, 0, 0, room, 0)
		for j, w := range words[:2*n+c] {
			if j%2 == 0 {
				if x, err := strconv.ParseInt(w, 10, 16); err != nil || int16(x) != index[j/2] {
					t.Fatalf("%q: got %d", w, index[j/2])
				}
				continue
			}
			if x, err := strconv.ParseFloat(w, 64); err != nil || math.Float64bits(x) != math.Float64bits(value[j/2]) {
				t.Fatalf("%q: got %v, want %v", w, value[j/2], x)
			}
		}
		if n == room {
			return
		}
		w := words[2*n+c]
		if x, err := strconv.Atoi(w); c == 0 && err == nil && x > -32768 && x < 32768 && strconv.Itoa(x) == w {
			t.Fatalf("%q was left", w)
		}
		if x, err := strconv.ParseFloat(w, 64); c == 1 && err == nil && strconv.FormatFloat(x, 'f', -1, 64) == w && len(w) <= 8 && math.Abs(x) <= math.MaxFloat64 {
			t.Fatalf("%q was left", w)
		}
	})
}
