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
	"thinward/io/cif"
)

func someSeries(t *testing.T) *analysis.Series {
	t.Helper()
	g, err := crystal.Lookup("P 21 21 21")
	if err != nil {
		t.Fatal(err)
	}
	return &analysis.Series{
		Title: "Tarn peptide; it's \u00e4 \"test\"", EnergyKeV: 300, Group: g, Cell: crystal.Cell{A: 11.1, B: 14.7, C: 18.3, Alpha: 90, Beta: 90, Gamma: 90},
		Crystals: []analysis.Specimen{{Name: "L1", Positions: []analysis.Position{{Name: "thin", ThicknessNM: 140, ThicknessSU: 12}, {Name: "thick", ThicknessNM: 310}}}},
	}
}

func someScaled() []analysis.ScaledTable {
	return []analysis.ScaledTable{
		{Crystal: "L1", Position: "thin", ThicknessNM: 140, ThicknessSU: 12, Rows: []analysis.ScaledRow{
			{HKL: crystal.HKL{H: 1, K: -2, L: 3}, Unique: crystal.HKL{H: 1, K: 2, L: 3}, D: 4.5, Phi: -12.25, I: 100, SU: 5, Scale: 0.8, J: 125, SUJ: 6.5, Residual: 0.5, Weight: 1},
			{HKL: crystal.HKL{H: 0, K: 0, L: 1}, Unique: crystal.HKL{L: 1}, D: 18.3, Phi: 1.0 / 3, I: -2, SU: 1, Scale: 1.25, J: -1.6, SUJ: 0.8, Residual: -2, Weight: 0.01, Listed: true},
		}},
		{Crystal: "L1", Position: "thin", ThicknessNM: 150, Rows: []analysis.ScaledRow{
			{HKL: crystal.HKL{H: 2}, Unique: crystal.HKL{H: 2}, D: 5.55, Phi: math.NaN(), I: 1e5, SU: 10, Scale: 1, J: 1e5, SUJ: 11, Weight: 1},
		}},
	}
}

// parts reads every block of a CIF as a data set.
func parts(t *testing.T, data []byte, codes ...string) []*cif.Reflections {
	t.Helper()
	f, err := cif.Parse("written.cif", data)
	if err != nil {
		t.Fatal(err)
	}
	if len(f.Warnings) != 0 || len(f.Blocks) != len(codes) {
		t.Fatalf("%d blocks, warnings %v", len(f.Blocks), f.Warnings)
	}
	var out []*cif.Reflections
	for i, code := range codes {
		if f.Blocks[i].Code != code {
			t.Errorf("block %q, want %q", f.Blocks[i].Code, code)
		}
		r, err := f.Read(cif.Selection{Pick: code})
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, r)
	}
	return out
}

func TestScaledCIFRoundTrip(t *testing.T) {
	var b bytes.Buffer
	s := someSeries(t)
	if err := WriteScaledCIF(&b, s, someScaled(), nil); err != nil {
		t.Fatal(err)
	}
	golden(t, "scaled.cif", b.Bytes())
	got := parts(t, b.Bytes(), "L1-thin", "L1-thin-2")
	c := got[0].Columns
	if diff := cmp.Diff([]float64{125, -1.6}, c.I); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]float64{6.5, 0.8}, c.Sigma); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]float64{-12.25, 1.0 / 3}, c.Phi); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]int16{-2, 0}, c.K); diff != "" {
		t.Error(diff)
	}
	if got[1].Columns.Phi != nil || got[0].Merged {
		t.Error("angles where there are none, or taken as merged")
	}
	for _, r := range got {
		if diff := cmp.Diff(&s.Cell, r.Cell); diff != "" || len(r.Operators) != 4 || r.Number != 19 || r.Probe != "electron" || math.Round(r.EnergyKeV) != 300 {
			t.Errorf("facts: %s %+v", diff, r.Facts)
		}
	}
	f, err := cif.Parse("scaled.cif", b.Bytes())
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []float64{140, 150} {
		v := f.Blocks[i].Values("_[local]_set_thickness_nm")
		if x, _, ok := v[0].Number(); !ok || x != want {
			t.Errorf("thickness %v, want %g", v, want)
		}
	}
}

func TestMergedCIFRoundTrip(t *testing.T) {
	var b bytes.Buffer
	tables := []analysis.MergedTable{{Crystal: "L1", Position: "thin", ThicknessNM: 140, Rows: []analysis.MergedRow{
		{HKL: crystal.HKL{H: 1, K: 2, L: 3}, D: 4.5, J: 1530.2, SU: 21.4, N: 4, Epsilon: 1, Multiplicity: 8},
		{HKL: crystal.HKL{H: 3}, D: 3.7, J: -12.1, SU: 15, N: 2, Epsilon: 2, Multiplicity: 2, Centric: true, Forbidden: true},
	}}}
	if err := WriteMergedCIF(&b, someSeries(t), tables, &CIFSettings{Prefix: "tarn"}); err != nil {
		t.Fatal(err)
	}
	golden(t, "merged.cif", b.Bytes())
	r := parts(t, b.Bytes(), "L1-thin")[0]
	if !r.Merged || len(r.SetAside) != 0 {
		t.Errorf("merged %v, set aside %v", r.Merged, r.SetAside)
	}
	if diff := cmp.Diff([]float64{1530.2, -12.1}, r.Columns.I); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]float64{21.4, 15}, r.Columns.Sigma); diff != "" {
		t.Error(diff)
	}
	if strings.Contains(b.String(), "[local]") || !strings.Contains(b.String(), "_tarn_refln_observations") {
		t.Error("the prefix is not used")
	}
}

// readPairsCIF reads the loops of WritePairsCIF back.
func readPairsCIF(t *testing.T, data []byte) []analysis.PairRow {
	t.Helper()
	f, err := cif.Parse("pairs.cif", data)
	if err != nil {
		t.Fatal(err)
	}
	var out []analysis.PairRow
	for _, b := range f.Blocks {
		axis := b.Values("_[local]_pair_strength_axis")[0].Text
		sets := b.Values("_[local]_set_crystal")
		if len(sets) != 2 {
			t.Fatalf("block %s describes %d positions", b.Code, len(sets))
		}
		column := map[string][]cif.Value{}
		for _, n := range PairNames() {
			column[n] = b.Values("_[local]_pair_" + n)
		}
		for i := range column["index_h"] {
			num := func(n string) float64 {
				v := column[n][i]
				if v.Null() {
					return math.NaN()
				}
				x, _, ok := v.Number()
				if !ok {
					t.Fatalf("%s: %q is no number", n, v.Text)
				}
				return x
			}
			words := func(n string) string {
				if column[n][i].Null() {
					return ""
				}
				return column[n][i].Text
			}
			out = append(out, analysis.PairRow{
				Crystal: sets[0].Text, HKL: crystal.HKL{H: int(num("index_h")), K: int(num("index_k")), L: int(num("index_l"))}, D: num("d_spacing"),
				NThin: int(num("n_thin")), JThin: num("intensity_thin"), SUThin: num("intensity_thin_su"), PhiThin: num("angle_thin"), TiltThin: num("tilt_thin"),
				NThick: int(num("n_thick")), JThick: num("intensity_thick"), SUThick: num("intensity_thick_su"), PhiThick: num("angle_thick"), TiltThick: num("tilt_thick"),
				DI: num("difference"), SUDI: num("difference_su"), Eps: num("difference_over_mean"), Z: num("z"), Strength: num("strength"), Axis: axis,
				InverseVariance: num("strength_inverse_variance"), Class: words("class"), Flags: words("flags"),
			})
		}
	}
	return out
}

func TestPairsCIFRoundTrip(t *testing.T) {
	list := somePairs()
	list[1].SUThick, list[1].DI = math.NaN(), math.NaN()
	second := list[0]
	second.HKL.L, second.Class, second.Flags = 4, "", ""
	list = []analysis.PairRow{list[0], second, list[1]}
	var b bytes.Buffer
	if err := WritePairsCIF(&b, someSeries(t), list, nil); err != nil {
		t.Fatal(err)
	}
	golden(t, "pairs.cif", b.Bytes())
	got := readPairsCIF(t, b.Bytes())
	if diff := cmp.Diff(list, got, cmpopts.EquateNaNs(), cmpopts.IgnoreFields(analysis.PairRow{}, "Thin", "Thick")); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
}

func TestCIFRefuses(t *testing.T) {
	for _, prefix := range []string{"a_b", "a b", "\u00e4"} {
		err := WriteMergedCIF(new(bytes.Buffer), someSeries(t), nil, &CIFSettings{Prefix: prefix})
		if err == nil || !strings.Contains(err.Error(), "cannot begin data names") {
			t.Errorf("%q: %v", prefix, err)
		}
	}
	tables := someScaled()
	tables[0].Rows[0].J = math.Inf(1)
	if err := WriteScaledCIF(new(bytes.Buffer), someSeries(t), tables, nil); err == nil || !strings.Contains(err.Error(), "not a CIF number") {
		t.Errorf("infinity: %v", err)
	}
}

func TestTableCSV(t *testing.T) {
	var b bytes.Buffer
	if err := WriteScaled(&b, someScaled()); err != nil {
		t.Fatal(err)
	}
	if err := WriteMerged(&b, []analysis.MergedTable{{Crystal: "L, 1", Position: "thin", ThicknessNM: 140, Rows: []analysis.MergedRow{{HKL: crystal.HKL{H: 3}, D: 3.7, J: -12.1, SU: 15, N: 2, Epsilon: 2, Multiplicity: 2, Centric: true, Forbidden: true}}}}); err != nil {
		t.Fatal(err)
	}
	if err := WriteChanged(&b, []analysis.ChangedRow{{PairRow: somePairs()[0], Rank: 1, Of: 900, ByNoise: 3.4}}); err != nil {
		t.Fatal(err)
	}
	golden(t, "tables.csv", b.Bytes())
}
