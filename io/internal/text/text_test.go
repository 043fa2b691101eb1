package text

import (
	"bytes"
	"compress/gzip"
	"errors"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/intensity"
)

// strconv is the reference: where the fast path answers, it answers bit for bit the
// same, and it answers for all usual forms.
func TestFastFloatIsExact(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	answered := 0
	const n = 200000
	for i := range n {
		x := r.NormFloat64() * math.Pow(10, float64(r.IntN(24)-12))
		s := strconv.FormatFloat(x, "efg"[i%3], r.IntN(14), 64)
		got, next, ok := FastFloat([]byte(s+" "), 0)
		if !ok {
			continue
		}
		answered++
		want, err := strconv.ParseFloat(s, 64)
		if err != nil || math.Float64bits(got) != math.Float64bits(want) || next != len(s) {
			t.Fatalf("%s: got %v, want %v", s, got, want)
		}
	}
	if answered < n*9/10 {
		t.Errorf("the fast path answered only %d of %d", answered, n)
	}
}

func TestNumbers(t *testing.T) {
	for _, tt := range []struct {
		in    string
		x, su float64
		ok    bool
	}{
		{"5", 5, math.NaN(), true}, {"+5", 5, math.NaN(), true}, {"-.5", -.5, math.NaN(), true}, {"5.", 5, math.NaN(), true},
		{"1.2E-3", 1.2e-3, math.NaN(), true}, {"12.34(5)", 12.34, .05, true}, {"34.5(12)", 34.5, 1.2, true}, {"3.45E1(12)", 34.5, 1.2, true},
		{"1.0e3(2)", 1000, 200, true}, {"100(20)", 100, 20, true}, {"0.1(0)", .1, 0, true}, {"1e-400", 0, math.NaN(), true},
		{"3.45(12)E1", 0, 0, false}, {"12.34()", 0, 0, false}, {"12.34(5", 0, 0, false}, {"12.34(5)x", 0, 0, false}, {"12(-1)", 0, 0, false}, {"1,5", 0, 0, false}, {"1.5d0", 0, 0, false},
		{"0x10", 0, 0, false}, {"1_000", 0, 0, false}, {"NaN", 0, 0, false}, {"Inf", 0, 0, false}, {"-inf", 0, 0, false}, {"infinity", 0, 0, false}, {"--5", 0, 0, false}, {"1/2", 0, 0, false},
		{"", 0, 0, false}, {".", 0, 0, false}, {"+", 0, 0, false}, {"-.", 0, 0, false}, {"1e", 0, 0, false}, {"1e+", 0, 0, false}, {"e5", 0, 0, false}, {"1.2.3", 0, 0, false}, {"1e999", 0, 0, false}, {"1 ", 0, 0, false},
	} {
		x, su, ok := ParseNumber([]byte(tt.in))
		if ok != tt.ok || ok && (x != tt.x || math.Float64bits(su) != math.Float64bits(tt.su) && !(math.IsNaN(su) && math.IsNaN(tt.su))) {
			t.Errorf("%q: got %g %g %v", tt.in, x, su, ok)
		}
		if fast, next, fok := FastFloat([]byte(tt.in+" "), 0); fok && next == len(tt.in) && (!ok || fast != x) {
			t.Errorf("%q: the fast path says %g, the slow one %g %v", tt.in, fast, x, ok)
		}
	}
}

func TestParseIndex(t *testing.T) {
	for in, want := range map[string]int{"5": 5, "+2": 2, "-1.0": -1, "1e1": 10, "-0": 0, "007": 7} {
		if n, ok := ParseIndex([]byte(in)); !ok || n != want {
			t.Errorf("%q: %d %v", in, n, ok)
		}
	}
	for _, in := range []string{"", "1.5", "x", "1(1)", "1e30", "-", "12345678901"} {
		if n, ok := ParseIndex([]byte(in)); ok {
			t.Errorf("%q: read as %d", in, n)
		}
	}
}

func TestLine(t *testing.T) {
	data := []byte("a\nb\r\nc\rd")
	for off, want := range []int{1, 1, 2, 2, 2, 3, 3, 4, 4} {
		if got := Line(data, off); got != want {
			t.Errorf("offset %d: line %d, want %d", off, got, want)
		}
	}
}

func gz(t testing.TB, data []byte) []byte {
	t.Helper()
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	z.Write(data)
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func drain(s *Source) ([]byte, error) {
	seen := s.Bytes()
	for s.More() {
		if !bytes.HasPrefix(s.Bytes(), seen) {
			return nil, errors.New("the prefix changed")
		}
		seen = s.Bytes()
	}
	return seen, s.Err()
}

// Gzip of any size, of several members, and with a wrong length in its tail.
func TestSourceInflates(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	for _, n := range []int{0, 1, 1000, inflateStep - 1, inflateStep, inflateStep + 1, 3*inflateStep + 17} {
		data := make([]byte, n)
		for i := range data {
			data[i] = "0123456789 \n"[r.IntN(12)]
		}
		for what, in := range map[string][]byte{"plain": data, "gzip": gz(t, data), "two members": append(gz(t, data[:n/3]), gz(t, data[n/3:])...)} {
			got, err := drain(NewSource("f", in))
			if err != nil || !bytes.Equal(got, data) {
				t.Errorf("%s of %d bytes: %d bytes, %v", what, n, len(got), err)
			}
		}
	}
	zeros := make([]byte, 6*inflateStep)
	if got, err := drain(NewSource("f", append(gz(t, zeros), gz(t, nil)...))); err != nil || !bytes.Equal(got, zeros) {
		t.Errorf("much expanded: %d bytes, %v", len(got), err)
	}
}

func TestSourceFailures(t *testing.T) {
	whole := gz(t, bytes.Repeat([]byte("1 2 3 4 5\n"), 200000))
	broken := append([]byte(nil), whole...)
	broken[len(broken)-6] ^= 0xff
	for _, tt := range []struct {
		what string
		in   []byte
		want string
	}{
		{"cut", whole[:len(whole)/2], "the gzip data are cut off after 99"},
		{"cut in the tail", whole[:len(whole)-3], "f.gz:200001: the gzip data are cut off after 2000000 bytes of text; copy the file again"},
		{"checksum", broken, "f.gz:200001: the gzip data are damaged: the checksum of 2000000 bytes of text is wrong; copy the file again"},
		{"rubbish behind", append(append([]byte(nil), whole...), "rubbish"...), "f.gz:200001: the gzip data end after 2000000 bytes of text and something else stands behind them; copy the file again, or unpack it and look at what is there"},
		{"one byte behind", append(append([]byte(nil), whole...), 0x1f), "something else stands behind them"},
		{"second member cut", append(append([]byte(nil), whole...), whole[:5]...), "f.gz:200001: the gzip data are cut off after 2000000 bytes of text"},
		{"only the mark", []byte{0x1f, 0x8b}, "f.gz: the gzip data are cut off after 0 bytes of text"},
		{"header", append([]byte{0x1f, 0x8b, 7}, make([]byte, 30)...), "f.gz: the gzip header is damaged; copy the file again"},
		{"inside", append(append([]byte(nil), whole[:10]...), bytes.Repeat([]byte{0xff}, 99)...), "f.gz: the gzip data are damaged after 0 bytes of text: flate: corrupt input"},
	} {
		_, err := drain(NewSource("f.gz", tt.in))
		var e *Error
		if !errors.As(err, &e) || !strings.Contains(err.Error(), tt.want) || e.Remedy == "" {
			t.Errorf("%s: got %v, want %s", tt.what, err, tt.want)
		}
	}
	s := NewSource("f", whole)
	s.More()
	s.Close()
	s.Close()
}

func TestSift(t *testing.T) {
	nan := math.NaN()
	raw := &intensity.Columns{H: []int16{1, NullIndex, 0, 2, 3, 4, 5}, K: make([]int16, 7), L: make([]int16, 7),
		I: []float64{1, 1, 1, nan, -1, 1, 1}, Sigma: []float64{1, 1, 1, 1, 2, 0, nan}, Phi: []float64{nan, nan, nan, nan, nan, nan, nan},
		Frame: []int32{1, 2, 3, 4, 5, 6, 7}}
	before := *raw
	got, asides := Sift(raw, func(i int) string {
		if i == 0 {
			return OtherSet
		}
		return ""
	}, func(i int) int { return 10 + i })
	want := &intensity.Columns{H: []int16{3}, K: []int16{0}, L: []int16{0}, I: []float64{-1}, Sigma: []float64{2}, Frame: []int32{5}}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Error(diff)
	}
	wantAside := []Aside{{Reason: ReasonNullIndex, Count: 1, FirstLine: 11}, {Reason: ReasonZeroIndex, Count: 1, FirstLine: 12}, {Reason: ReasonNullIntensity, Count: 1, FirstLine: 13},
		{Reason: ReasonSigma, Count: 1, FirstLine: 15}, {Reason: ReasonNullSigma, Count: 1, FirstLine: 16}}
	if diff := cmp.Diff(wantAside, asides); diff != "" {
		t.Error(diff)
	}
	if len(raw.I) != 7 || &raw.I[0] != &before.I[0] || len(raw.Phi) != 7 {
		t.Error("the input was changed")
	}
}

func TestRoom(t *testing.T) {
	for _, tt := range []struct{ n, read, total, want int }{{2048, 20480, 204800, 21568}, {2048, 20480, 20480, 2240}, {5000, 50000, 0, 5376}, {1, 1, 1, 65}} {
		if got := Room(tt.n, tt.read, tt.total); got != tt.want {
			t.Errorf("%d rows in %d of %d bytes: %d, want %d", tt.n, tt.read, tt.total, got, tt.want)
		}
	}
}

func TestErrorText(t *testing.T) {
	e := &Error{File: "f", Line: 3, Block: "b", Item: "_i", Problem: "is bad", Remedy: "mend it"}
	if got := e.Error(); got != "f:3: block b: _i: is bad; mend it" {
		t.Error(got)
	}
	if got := (&Error{File: "f", Problem: "is bad"}).Error(); got != "f: is bad" {
		t.Error(got)
	}
	if got := Shown(bytes.Repeat([]byte{'x'}, 50)); got != `"`+strings.Repeat("x", 37)+`"...` {
		t.Error(got)
	}
}
