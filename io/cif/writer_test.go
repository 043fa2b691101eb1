package cif

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// same says whether two values are the same to a reader: nulls by kind, all else by
// text.
func same(a, b Value) bool {
	if a.Null() || b.Null() {
		return a.Kind == b.Kind
	}
	return a.Text == b.Text
}

var hardTexts = []string{"", "a", "two words", "don't", "don't stop", `the "best" one`, `both ' and " here`, `it's "both" of' them"`, "?", ".", "12", "-1.5e3(2)", "data_x", "loop_", "loop_x",
	"_name", "#hash", "$x", "[x", "]x", ";x", "; x", "a;b", "'", `"`, "''", `x' `, "tab\there", "two\nlines", "\nbegins empty", "ends empty\n", "\n", "\\", "\\\nnot folded", "a\\\nb", "a\\  \nb\\",
	"  blanks  ", "\\ \nx", strings.Repeat("long ", 1000), strings.Repeat("y", 5000), strings.Repeat("z", 2048) + "\\", "x\n" + strings.Repeat("w ", 3000) + "\nlast\\", "k; l;\nm"}

func write(t testing.TB, build func(w *Writer)) ([]byte, error) {
	t.Helper()
	var b bytes.Buffer
	w := NewWriter(&b)
	build(w)
	err := w.Close()
	return b.Bytes(), err
}

func TestTextsRoundTrip(t *testing.T) {
	out, err := write(t, func(w *Writer) {
		w.Block("a")
		for i, s := range hardTexts {
			w.Item("_t"+strings.Repeat("i", i+1), Str(s))
		}
		w.Loop([]string{"_[local]_x", "_[local]_y"})
		for _, s := range hardTexts {
			w.Row([]Value{Str(s), Str(s)})
		}
	})
	if err != nil {
		t.Fatal(err)
	}
	f, err := Parse("f.cif", out)
	if err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	if len(f.Warnings) != 0 {
		t.Errorf("warnings %v", f.Warnings)
	}
	for i, s := range hardTexts {
		for _, v := range []Value{f.Blocks[0].Items[i].Value, f.Blocks[0].Loops[0].At(i, 0), f.Blocks[0].Loops[0].At(i, 1)} {
			if v.Null() || v.Text != s {
				t.Errorf("wrote %.60q, read %.60q", s, v.Text)
			}
			if _, _, number := v.Number(); number && v.Kind == Word {
				t.Errorf("%q reads as a bare number", s)
			}
		}
	}
}

func TestNumbersRoundTrip(t *testing.T) {
	numbers := []float64{0, 1, -1, 0.1, 1.0 / 3, 1e-300, math.MaxFloat64, math.SmallestNonzeroFloat64, 123456789.123456789, -2.5e17, math.Copysign(0, -1)}
	out, err := write(t, func(w *Writer) {
		w.Block("a")
		w.Loop([]string{"_x", "_n", "_u", "_i"})
		for i, x := range numbers {
			w.Row([]Value{Num(x), Int(-i), NotKnown(), NotApplicable()})
		}
		w.Item("_nan", Num(math.NaN()))
	})
	if err != nil {
		t.Fatal(err)
	}
	f, err := Parse("f.cif", out)
	if err != nil {
		t.Fatal(err)
	}
	l := f.Blocks[0].Loops[0]
	for i, want := range numbers {
		if got, _, ok := l.At(i, 0).Number(); !ok || math.Float64bits(got) != math.Float64bits(want) {
			t.Errorf("wrote %g, read %g", want, got)
		}
		if l.At(i, 2).Kind != Unknown || l.At(i, 3).Kind != Inapplicable {
			t.Errorf("nulls %v %v", l.At(i, 2), l.At(i, 3))
		}
	}
	if v := f.Blocks[0].Values("_nan")[0]; v.Kind != Unknown {
		t.Errorf("NaN read as %v", v)
	}
}

// A list written with public names reads back as reflections, bit for bit.
func TestReflectionsRoundTrip(t *testing.T) {
	out, err := write(t, func(w *Writer) {
		w.Block("scaled")
		w.Comment("invented")
		w.Item("_space_group_name_H-M_alt", Str("P 21 21 21"))
		w.Loop([]string{"_diffrn_refln_index_h", "_diffrn_refln_index_k", "_diffrn_refln_index_l", "_diffrn_refln_intensity_net", "_diffrn_refln_intensity_u"})
		for i := range 3000 {
			w.Row([]Value{Int(i), Int(-i), Int(2), Num(1 / float64(i+1)), Num(math.Sqrt(float64(i + 1)))})
		}
	})
	if err != nil {
		t.Fatal(err)
	}
	r := mustRead(t, string(out), Selection{Pick: "scaled"})
	if r.Columns.Len() != 3000 || r.HM != "P 21 21 21" {
		t.Fatalf("%d rows, %q", r.Columns.Len(), r.HM)
	}
	for i := range 3000 {
		if int(r.Columns.H[i]) != i || r.Columns.I[i] != 1/float64(i+1) || r.Columns.Sigma[i] != math.Sqrt(float64(i+1)) {
			t.Fatalf("row %d differs", i)
		}
	}
}

func TestWriterRefuses(t *testing.T) {
	for _, tt := range []struct {
		name  string
		build func(w *Writer)
		want  string
	}{
		{"infinity", func(w *Writer) { w.Block("a"); w.Item("_x", Num(math.Inf(-1))) }, "-Inf is not a CIF number"},
		{"non-ASCII", func(w *Writer) { w.Block("a"); w.Item("_x", Str("Å")) }, "cannot be written"},
		{"carriage return", func(w *Writer) { w.Block("a"); w.Item("_x", Str("a\rb")) }, "LF line ends"},
		{"semicolon line", func(w *Writer) { w.Block("a"); w.Item("_x", Str("a\n;b")) }, "begins with a semicolon"},
		{"semicolons throughout", func(w *Writer) { w.Block("a"); w.Item("_x", Str("a"+strings.Repeat(";", 5000))) }, "cannot be folded"},
		{"no block", func(w *Writer) { w.Item("_x", Int(1)) }, "before the first block"},
		{"name twice", func(w *Writer) { w.Block("a"); w.Item("_x", Int(1)); w.Item("_X", Int(1)) }, "used twice"},
		{"block twice", func(w *Writer) { w.Block("a"); w.Block("A") }, "used twice"},
		{"block code", func(w *Writer) { w.Block("a b") }, "cannot be a block code"},
		{"long name", func(w *Writer) { w.Block("a"); w.Item("_"+strings.Repeat("x", 75), Int(1)) }, "cannot be a data name"},
		{"bad name", func(w *Writer) { w.Block("a"); w.Item("x", Int(1)) }, "cannot be a data name"},
		{"short row", func(w *Writer) { w.Block("a"); w.Loop([]string{"_x", "_y"}); w.Row([]Value{Int(1)}) }, "1 values for 2 names"},
		{"row without loop", func(w *Writer) { w.Block("a"); w.Row([]Value{Int(1)}) }, "1 values for 0 names"},
		{"no rows", func(w *Writer) { w.Block("a"); w.Loop([]string{"_x"}); w.Item("_y", Int(1)) }, "no rows"},
		{"no names", func(w *Writer) { w.Block("a"); w.Loop(nil) }, "no names"},
		{"word with blank", func(w *Writer) { w.Block("a"); w.Item("_x", Value{Kind: Word, Text: "a b"}) }, "without quotes"},
		{"comment in loop", func(w *Writer) { w.Block("a"); w.Loop([]string{"_x"}); w.Comment("no") }, "inside a loop"},
		{"comment characters", func(w *Writer) { w.Comment("\x00") }, "comment holds the character"},
	} {
		_, err := write(t, tt.build)
		if err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("%s: got %v, want %q", tt.name, err, tt.want)
		}
	}
}

func TestWrittenForm(t *testing.T) {
	out, err := write(t, func(w *Writer) {
		w.Block("pairs")
		w.Item("_[local]_thickness_nm", Num(40))
		w.Loop([]string{"_[local]_h", "_[local]_why"})
		w.Row([]Value{Int(2), Str("only one")})
		w.Row([]Value{Int(4), Str("a\nb")})
	})
	if err != nil {
		t.Fatal(err)
	}
	want := "#\\#CIF_1.1\n\ndata_pairs\n_[local]_thickness_nm             40\nloop_\n_[local]_h\n_[local]_why\n2 'only one'\n4\n;a\nb\n;\n"
	if diff := cmp.Diff(want, string(out)); diff != "" {
		t.Error(diff)
	}
}
