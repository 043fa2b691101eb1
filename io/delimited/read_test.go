package delimited

import (
	"bytes"
	"compress/gzip"
	"errors"
	"fmt"
	"math"
	"reflect"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/intensity"
)

var five = []string{"h", "k", "l", "intensity", "sigma"}

var twoRows = &intensity.Columns{H: []int16{1, -4}, K: []int16{2, 5}, L: []int16{3, 6}, I: []float64{10.5, -1200}, Sigma: []float64{2, 30}}

func TestForms(t *testing.T) {
	for _, tt := range []struct {
		name, text string
		o          *Options
		layout     string
	}{
		{"blanks", "1 2 3 10.5 2\n-4 5 6 -1200 30\n", &Options{Order: five}, "blanks"},
		{"no last line end", "1 2 3 10.5 2\n-4 5 6 -1200 30", &Options{Order: five}, "blanks"},
		{"indented, tabs among blanks", "  1 2\t3   10.5  2  \r\n\r\n -4 5 6 -1200 30\t\r\n", &Options{Order: five, Delimiter: ' '}, "blanks"},
		{"carriage returns", "1 2 3 10.5 2\r-4 5 6 -1200 30\r", &Options{Order: five}, "blanks"},
		{"comma with header", "h,k,l,intensity,sigma\n1,2,3,10.5,2\n-4,5,6,-1200,30\n", nil, "comma"},
		{"comma with blanks", "1, 2, 3, 10.5, 2\n -4 , 5,6 ,-1.2e3 ,30\n", &Options{Order: five}, "comma"},
		{"semicolon", "1;2;3;10.5;2\n-4;5;6;-1200;30\n", &Options{Order: five}, "semicolon"},
		{"tab", "H\tK\tL\tIntensity\tSigma\n1\t2\t3\t10.5\t2\n-4\t5\t6\t-1200\t30\n", &Options{}, "tab"},
		{"header in a comment", "# invented\n# h k l intensity sigma\n1 2 3 10.5 2\n-4 5 6 -1200 30\n", nil, "blanks"},
		{"comments of three kinds", "! a\n; b\n1 2 3 10.5 2 # first\n  # c\n\n-4 5 6 -1200 30 ! last\n", &Options{Order: five}, "blanks"},
		{"end row", "1 2 3 10.5 2\n-4 5 6 -1200 30\n0 0 0 0 0\nanything at all\n", &Options{Order: five}, "blanks"},
		{"other order, unused columns", "sigma,note,l,k,h,intensity\n2,\"a, b\",3,2,1,10.5\n30,x,6,5,-4,-1200\n", nil, "comma"},
		{"skip", "9 1 2 3 word 10.5 2\n9 -4 5 6 word -1200 30\n", &Options{Order: []string{"skip", "h", "k", "l", "skip", "intensity", "sigma"}}, "blanks"},
		{"fixed widths", "   1   2   3    10.5       2\n  -4   5   6-1200.00      30\n", &Options{Order: five, Widths: []int{4, 4, 4, 8, 8}}, "fixed widths"},
		{"fixed widths that touch", "   1   2   300010.5000000002\r\n  -4   5   6-1200.0000030.00\r\n   0   0   0\n", &Options{Order: five, Widths: []int{4, 4, 4, 8, 8}}, "fixed widths"},
		{"header over a declared order", "h k l I sigma\n1 2 3 10.5 2\n-4 5 6 -1200 30\n", &Options{Order: five}, "blanks"},
		{"byte-order mark", "\xef\xbb\xbf1 2 3 10.5 2\n-4 5 6 -1200 30\n", &Options{Order: five}, "blanks"},
		{"signs and points", "+1 2.0 3 10.5 2.\n-4 5 6 -.12e+4 3E1\n", &Options{Order: five}, "blanks"},
		{"quoted", "\"1\",2,3,\"10.5\",2\n-4,5,6,-1200,30\n", &Options{Order: five}, "comma"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			for _, data := range [][]byte{[]byte(tt.text), zipped(t, []byte(tt.text))} {
				r, err := Parse("f.txt", data, tt.o)
				if err != nil {
					t.Fatal(err)
				}
				if diff := cmp.Diff(twoRows, r.Columns); diff != "" || r.Layout != tt.layout || r.Rows != 2 {
					t.Errorf("%s layout %q rows %d", diff, r.Layout, r.Rows)
				}
			}
		})
	}
}

func zipped(tb testing.TB, data []byte) []byte {
	tb.Helper()
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	if _, err := z.Write(data); err != nil {
		tb.Fatal(err)
	}
	if err := z.Close(); err != nil {
		tb.Fatal(err)
	}
	return b.Bytes()
}

func TestAllColumns(t *testing.T) {
	text := "h,k,l,intensity,sigma,phi,frame,partiality\n1,2,3,10,1,-30.5,12,.5\n4,5,6,20,2,-30.25,13,1\n"
	r, err := Parse("f.csv", []byte(text), nil)
	if err != nil {
		t.Fatal(err)
	}
	want := &intensity.Columns{H: []int16{1, 4}, K: []int16{2, 5}, L: []int16{3, 6}, I: []float64{10, 20}, Sigma: []float64{1, 2},
		Phi: []float64{-30.5, -30.25}, Frame: []int32{12, 13}, Partiality: []float64{.5, 1}}
	if diff := cmp.Diff(want, r.Columns); diff != "" {
		t.Error(diff)
	}
}

func TestSetAside(t *testing.T) {
	text := "h,k,l,intensity,sigma,phi\n1,0,0,10,1,5\n2,0,0,,1,5\n# x\n3,0,0,NaN,1,5\n4,0,0,10,0,5\n5,0,0,10,-2,5\n6,0,0,10,?,5\n7,0,0,10,1,.\n?,0,0,10,1,5\n"
	r, err := Parse("f.csv", []byte(text), nil)
	if err != nil {
		t.Fatal(err)
	}
	want := []Aside{aside("intensity is null", 2, 3), aside("sigma is zero or negative", 2, 6), aside("sigma is null", 1, 8), aside("angle is null", 1, 9), aside("index is null", 1, 10)}
	if diff := cmp.Diff(want, r.SetAside); diff != "" || r.Rows != 8 || r.Columns.Len() != 1 {
		t.Errorf("%s rows %d used %d", diff, r.Rows, r.Columns.Len())
	}
}

func aside(reason string, count, line int) Aside {
	return Aside{Reason: reason, Count: count, FirstLine: line}
}

func TestWarnings(t *testing.T) {
	for _, tt := range []struct {
		text string
		o    *Options
		code string
	}{
		{"h,k,l,intensity,sigma,colour\n1,2,3,4,5,red\n", nil, "column-skipped"},
		{"h k l I s\n1 2 3 4 5\n", &Options{Order: five}, "header-skipped"},
		{"\xef\xbb\xbf1 2 3 4 5\n", &Options{Order: five}, "byte-order-mark"},
	} {
		r, err := Parse("f.txt", []byte(tt.text), tt.o)
		if err != nil {
			t.Errorf("%s: %v", tt.code, err)
			continue
		}
		if len(r.Warnings) != 1 || r.Warnings[0].Code != tt.code || r.Warnings[0].Where != "f.txt:1" {
			t.Errorf("%s: %v", tt.code, r.Warnings)
		}
	}
}

func TestBadInput(t *testing.T) {
	fixed := &Options{Order: five, Widths: []int{4, 4, 4, 8, 8}}
	for _, tt := range []struct {
		name, text            string
		o                     *Options
		line                  int
		item, problem, remedy string // the last two in part
	}{
		{"empty", "", nil, 1, "", "the file is empty", "cut off or never written"},
		{"only comments", "# a\n! b\n", nil, 3, "", "holds no rows", "cut off"},
		{"UTF-16", "\xff\xfeh\x00", nil, 1, "", "UTF-16", "save it as plain ASCII"},
		{"zip", "PK\x03\x04....", nil, 1, "", "zip archive", "unpack it first"},
		{"gzip cut off", "\x1f\x8b\x08\x00\x00\x00\x00\x00\x00\x00\x4b\x4c", nil, 1, "", "the gzip data are cut off after 1 bytes of text", "copy the file again"},
		{"UTF-16 without mark", "\x001\x00 \x002", nil, 1, "", "UTF-16 text without a byte-order mark", "save it as plain ASCII"},
		{"NUL", "1 2 3 4 5\n1 2 3 4\x00 5\n", &Options{Order: five}, 2, "", "the line holds a NUL byte", "damaged or not text"},
		{"web page", "<html><body>", nil, 1, "", "the file is a web page", "download the list itself"},
		{"nothing declared", "1 2 3 4 5\n", nil, 1, "", "columns are not declared", "declare the order"},
		{"header lacks sigma", "h k l intensity error\n1 2 3 4 5\n", nil, 1, "header", "the column sigma is missing", "use the names h, k, l"},
		{"header names twice", "h k l intensity sigma sigma\n1 2 3 4 5 6\n", nil, 1, "header", "the column sigma stands twice", "use the names"},
		{"header contradicts", "h k l sigma intensity\n1 2 3 4 5\n", &Options{Order: five}, 1, "column 4", `calls the column "sigma"`, "leave it out so that the header counts"},
		{"unknown column", "1 2 3 4 5\n", &Options{Order: []string{"h", "k", "l", "J", "sigma"}}, 0, "order", `column 4 has the name "J"`, "name the columns by h, k, l"},
		{"missing column", "1 2 3 4\n", &Options{Order: five[:4]}, 0, "order", "the column sigma is missing", "name the columns"},
		{"column twice", "1 2 3 4 5\n", &Options{Order: append([]string{"h"}, five...)}, 0, "order", "the column h stands twice", "name the columns"},
		{"widths for other columns", "1 2 3 4 5\n", &Options{Order: five, Widths: []int{4, 4}}, 0, "widths", "2 widths for 5 columns", "one width for each"},
		{"widths without order", "1 2 3 4 5\n", &Options{Widths: []int{4}}, 0, "widths", "1 widths for 0 columns", "one width for each"},
		{"width of zero", "1 2 3 4 5\n", &Options{Order: five, Widths: []int{4, 4, 4, 8, 0}}, 0, "widths", "width of column 5 is 0", "from 1 to 1000"},
		{"delimiter", "1|2|3|4|5\n", &Options{Order: five, Delimiter: '|'}, 0, "delimiter", "'|' cannot separate fields", "use a comma"},
		{"short row", "1 2 3 4 5\n1 2 3 4\n", &Options{Order: five}, 2, "", "4 fields where 5 are declared", "complete the row"},
		{"long row", "1 2 3 4 5\n1 2 3 4 5 6\n", &Options{Order: five}, 2, "", "6 fields where 5 are declared", "as skip"},
		{"decimal comma, semicolon", "1;2;3;4,5;5\n", &Options{Order: five}, 1, "column 4 (intensity)", `"4,5" has a decimal comma`, "write decimal points"},
		{"decimal comma, blanks", "1 2 3 4,5 5,1\n", &Options{Order: five}, 1, "column 4 (intensity)", `"4,5" has a decimal comma`, "write decimal points"},
		{"decimal comma, header", "h k l I sigma phi\n1 2 3 4,5 5,1 0,5\n", nil, 2, "column 4 (I)", `"4,5" has a decimal comma`, "write decimal points"},
		{"small i", "h k i l sigma\n1 2 3 4 5\n", nil, 1, "header", "the column intensity is missing", "use the names"},
		{"decimal comma, comma", "1,2,3,4,5,5,1\n", &Options{Order: five}, 1, "", "7 fields where 5 are declared", "decimal commas must become points"},
		{"index fraction", "1 2 3 4 5\n1.5 2 3 4 5\n", &Options{Order: five}, 2, "column 1 (h)", `index "1.5" is not a whole number`, "must be integers"},
		{"index word", "1,2,3,4,5\n1,b,3,4,5\n", &Options{Order: five}, 2, "column 2 (k)", `index "b"`, "must be integers"},
		{"index range", "1,2,40000,4,5\n", &Options{Order: five}, 1, "column 3 (l)", "40000 is out of range", "columns touch"},
		{"hexadecimal", "1 2 3 0x10 5\n", &Options{Order: five}, 1, "column 4 (intensity)", `"0x10" is not a number`, "decimal digits"},
		{"underscore", "1 2 3 1_000 5\n", &Options{Order: five}, 1, "column 4 (intensity)", `"1_000" is not a number`, "decimal digits"},
		{"infinite", "1 2 3 4 inf\n", &Options{Order: five}, 1, "column 5 (sigma)", `"inf" is not a number`, "decimal digits"},
		{"overflow", "1 2 3 4 1e400\n", &Options{Order: five}, 1, "column 5 (sigma)", `"1e400" is not a number`, "decimal digits"},
		{"frame fraction", "1 2 3 4 5 6.5\n", &Options{Order: append(five[:5:5], "frame")}, 1, "column 6 (frame)", `frame "6.5"`, "number the frames"},
		{"frame negative", "1 2 3 4 5 -6\n", &Options{Order: append(five[:5:5], "frame")}, 1, "column 6 (frame)", "-6 is negative", "number the frames"},
		{"fixed, shifted", "   1   2   3    10.5       2\n    1   2   3    10.5      2\n", fixed, 2, "column 1 (h)", `index ""`, "give widths"},
		{"fixed, short", "   1   2   3    10.5\n", fixed, 1, "", "4 fields where 5 are declared", "complete the row"},
		{"fixed, long", "   1   2   3    10.5       2   7\n", fixed, 1, "", "goes on behind its last column (28 characters)", "skip with its width"},
		{"nothing usable", "1 2 3 4 0\n1 2 3 4 -1\n", &Options{Order: five}, 3, "", "no row of 2 can be used: sigma is zero or negative (2, first on line 1)", "declared right"},
		{"end row first", "0 0 0 0 0\n1 2 3 4 5\n", &Options{Order: five}, 3, "", "no row of 0 can be used", "declared right"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			_, err := Parse("f.txt", []byte(tt.text), tt.o)
			var e *Error
			if !errors.As(err, &e) {
				t.Fatalf("got %v, want an *Error", err)
			}
			if e.File != "f.txt" || e.Line != tt.line || e.Item != tt.item || !strings.Contains(e.Problem, tt.problem) || !strings.Contains(e.Remedy, tt.remedy) {
				t.Errorf("got line %d item %q problem %q remedy %q", e.Line, e.Item, e.Problem, e.Remedy)
			}
		})
	}
}

func TestSettingsAreNotChanged(t *testing.T) {
	o := &Options{Order: append([]string(nil), five...)}
	if _, err := Parse("f.txt", []byte("1 2 3 4 5\n"), o); err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(&Options{Order: five}, o); diff != "" {
		t.Error(diff)
	}
}

func invented(n int) *intensity.Columns {
	c := &intensity.Columns{}
	for i := range n {
		c.H, c.K, c.L = append(c.H, int16(i%40+1)), append(c.K, int16(-i%30)), append(c.L, int16(i%7))
		c.I, c.Sigma = append(c.I, math.Sin(float64(i))*1000), append(c.Sigma, 1/float64(i+1))
		c.Phi, c.Frame = append(c.Phi, float64(i)/7-60), append(c.Frame, int32(i/3))
		c.Partiality = append(c.Partiality, float64(i%11)/11)
	}
	return c
}

func TestRoundTrip(t *testing.T) {
	for _, n := range []int{1, 1023, 1024, 2047, 2048, 2049, 7000} {
		c := invented(n)
		for _, delimiter := range []byte{0, ',', ';', '\t', ' '} {
			var b bytes.Buffer
			if err := Write(&b, c, &Options{Delimiter: delimiter}); err != nil {
				t.Fatal(err)
			}
			r, err := Parse("f.txt", b.Bytes(), nil)
			if err != nil {
				t.Fatal(err)
			}
			if !reflect.DeepEqual(c, r.Columns) {
				t.Fatalf("%d rows, delimiter %q: what was read differs", n, delimiter)
			}
		}
	}
	c := invented(500)
	widths := &Options{Order: append([]string{"skip"}, allNames(c)...), Widths: []int{1, 4, 4, 4, 25, 25, 22, 4, 20}}
	var b bytes.Buffer
	if err := Write(&b, c, widths); err != nil {
		t.Fatal(err)
	}
	r, err := Parse("f.txt", b.Bytes(), widths)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(c, r.Columns); diff != "" {
		t.Error(diff)
	}
}

func TestWriteRefuses(t *testing.T) {
	c := invented(3)
	inf := invented(3)
	inf.I[1] = math.Inf(1)
	for _, tt := range []struct {
		c    *intensity.Columns
		o    *Options
		want string
	}{
		{inf, nil, "row 1 holds an infinity"},
		{&intensity.Columns{I: []float64{1}}, nil, "column h has 0 values for 1 rows"},
		{twoRows, &Options{Order: append(five[:5:5], "phi")}, "column phi has 0 values for 2 rows"},
		{c, &Options{Order: five, Widths: []int{4, 4, 4, 4, 8}}, "does not fit 4 characters of column 4 (intensity)"},
		{c, &Options{Order: []string{"h"}}, "the column k is missing"},
	} {
		if err := Write(&bytes.Buffer{}, tt.c, tt.o); err == nil || !strings.Contains(err.Error(), tt.want) {
			t.Errorf("got %v, want %q", err, tt.want)
		}
	}
}

func FuzzRead(f *testing.F) {
	for _, s := range []string{"1 2 3 4 5\n", "h,k,l,intensity,sigma\n1,2,3,4,5\n", "1;2;3;4,5;5\n", "# h k l intensity sigma\n1\t2\t3\t4\t5 # x\n0 0 0\n",
		"   1   2   3    10.5       2\n", "\"1\",2,3,?,nan\n", "1 2 3 4 5\r1 2 3 4\r\n", "\x1f\x8b\x08\x00"} {
		for mode := range byte(4) {
			f.Add([]byte(s), mode)
		}
	}
	f.Fuzz(func(t *testing.T, data []byte, mode byte) {
		o := [...]*Options{nil, {Order: five}, {Order: five, Widths: []int{4, 4, 4, 8, 8}}, {Order: append(five[:5:5], "phi", "skip", "frame", "partiality")}}[mode%4]
		r, err := Parse("f.txt", data, o)
		if err != nil {
			var e *Error
			if !errors.As(err, &e) || e.Problem == "" || e.Remedy == "" {
				t.Fatalf("error %#v", err)
			}
			return
		}
		total := r.Columns.Len()
		for _, a := range r.SetAside {
			total += a.Count
			if a.FirstLine < 1 || a.Count < 1 {
				t.Fatalf("set aside %+v", a)
			}
		}
		if total != r.Rows {
			t.Fatalf("%d rows, %d accounted for", r.Rows, total)
		}
		var b bytes.Buffer
		if err := Write(&b, r.Columns, nil); err != nil {
			t.Fatal(err)
		}
		again, err := Parse("again.csv", b.Bytes(), nil)
		if err != nil {
			t.Fatalf("%v\n%s", err, b.Bytes())
		}
		if diff := cmp.Diff(r.Columns, again.Columns); diff != "" {
			t.Fatal(diff)
		}
	})
}

func BenchmarkRead(b *testing.B) {
	const rows = 950000
	var text bytes.Buffer
	for i := range rows {
		x := math.Sin(float64(i)) * 1000
		fmt.Fprintf(&text, "%d %d %d %.2f %.2f %.3f\n", i%20+1, i%51-25, i%61-30, x, math.Abs(x)/20+2, float64(i%120000)/1000-60)
	}
	o := &Options{Order: append(five[:5:5], "phi")}
	comma := bytes.ReplaceAll(text.Bytes(), []byte{' '}, []byte{','})
	for _, bench := range []struct {
		format string
		data   []byte
	}{{"delimited", text.Bytes()}, {"comma", comma}, {"delimited.gz", zipped(b, text.Bytes())}} {
		b.Run("format="+bench.format, func(b *testing.B) {
			b.ReportAllocs()
			b.SetBytes(int64(text.Len()))
			for b.Loop() {
				r, err := Parse("bench.txt", bench.data, o)
				if err != nil || r.Columns.Len() != rows {
					b.Fatal(err)
				}
			}
		})
	}
}
