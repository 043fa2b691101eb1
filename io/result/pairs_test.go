package result

import (
	"bytes"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
	"thinward/analysis/crystal"
)

func somePairs() []analysis.PairRow {
	return []analysis.PairRow{
		{Crystal: "L1", Thin: "thin", Thick: "thick", HKL: crystal.HKL{H: 1, K: -2, L: 3}, D: 2.5, PhiThin: -12.25, PhiThick: 13, TiltThin: 10.5, TiltThick: 11.75, NThin: 4, NThick: 3,
			JThin: 1530.2, SUThin: 21.4, JThick: 1214.8, SUThick: 19.9, Strength: 1.1, Axis: "crystals", InverseVariance: 1.2,
			DI: 315.4, SUDI: 29.2, Eps: 0.2, Z: 315.4 / 29.2, Class: "middle", Flags: "centric"},
		{Crystal: "L, 2", Thin: "a \"b\"", Thick: "L1/c", HKL: crystal.HKL{H: 0, K: 0, L: -4}, D: 1.0 / 3, PhiThin: math.NaN(), PhiThick: math.NaN(), TiltThin: math.NaN(), TiltThick: math.NaN(), NThin: 1, NThick: 1,
			JThin: -1e-300, SUThin: 0.1, JThick: 1e300, SUThick: math.Inf(1), Strength: math.NaN(), Axis: "bracket", InverseVariance: math.NaN(),
			DI: math.Inf(-1), SUDI: math.NaN(), Eps: math.NaN(), Z: math.NaN(), Flags: "no-strength"},
	}
}

func TestPairsRoundTrip(t *testing.T) {
	var b bytes.Buffer
	want := somePairs()
	if err := WritePairs(&b, want); err != nil {
		t.Fatal(err)
	}
	golden(t, "pairs.csv", b.Bytes())
	got, err := ReadPairs(&b)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(want, got, cmpopts.EquateNaNs()); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
}

func TestReadPairsRefuses(t *testing.T) {
	head := strings.Join(PairColumns(), ",")
	good := `L1,thin,thick,1,-2,3,2.5,,,,,4,3,1,1,1,1,,crystals,,1,1,1,1,middle,`
	for _, c := range []struct{ name, in, want string }{
		{"empty", "", "no header"},
		{"other header", strings.Replace(head, "d_A", "d", 1) + "\n", `column 7 is "d", not "d_A"`},
		{"short row", head + "\n1,2\n", "wrong number of fields"},
		{"index", head + "\n" + good + "\n" + strings.Replace(good, "-2", "x", 1) + "\n", `line 3: column k: "x" is no integer`},
		{"number", head + "\n" + strings.Replace(good, "2.5", "2,5", 1) + "\n", "wrong number of fields"},
		{"word", head + "\n" + strings.Replace(good, "2.5", "far", 1) + "\n", `line 2: column d_A: "far" is no number`},
	} {
		if _, err := ReadPairs(strings.NewReader(c.in)); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: %v, want %q", c.name, err, c.want)
		}
	}
}

func FuzzReadPairs(f *testing.F) {
	var b bytes.Buffer
	if err := WritePairs(&b, somePairs()); err != nil {
		f.Fatal(err)
	}
	f.Add(b.Bytes())
	f.Add([]byte(strings.Join(PairColumns(), ",") + "\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		rows, err := ReadPairs(bytes.NewReader(data))
		if err != nil {
			return
		}
		var out bytes.Buffer
		if err := WritePairs(&out, rows); err != nil {
			t.Fatalf("what was read cannot be written: %v", err)
		}
		again, err := ReadPairs(&out)
		if err != nil {
			t.Fatalf("what was written cannot be read: %v", err)
		}
		if diff := cmp.Diff(rows, again, cmpopts.EquateNaNs()); diff != "" {
			t.Fatal(diff)
		}
	})
}
