package cif

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis/intensity"
)

func mustRead(t *testing.T, text string, sel Selection) *Reflections {
	t.Helper()
	f, err := Parse("f.cif", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	r, err := f.Read(sel)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func loopOf(names string, rows string) string {
	return "data_a\nloop_\n" + strings.Join(strings.Fields(names), "\n") + "\n" + rows
}

// Old core, current core, macromolecular, the draft category; any case; any order of
// columns; unused ones anywhere.
func TestSpellings(t *testing.T) {
	for _, tt := range []struct {
		names, rows string
		merged      bool
		want        intensity.Columns
	}{
		{"_diffrn_refln_index_h _diffrn_refln_index_k _diffrn_refln_index_l _diffrn_refln_intensity_net _diffrn_refln_intensity_u _diffrn_refln_scale_group_code",
			"1 -2 3 10.5 2 7", false, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}, Frame: []int32{7}}},
		{"_DIFFRN_REFLN_INDEX_H _diffrn_refln_index_k _diffrn_refln_index_l _diffrn_refln_intensity_net _diffrn_refln_intensity_sigma _diffrn_refln_sint/lambda",
			"1 -2 3 10.5 2 .3", false, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}}},
		{"_diffrn_refln.intensity_net_su _diffrn_refln.index_h _diffrn_refln.index_k _diffrn_refln.index_l _diffrn_refln.intensity_net _diffrn_refln.id",
			"2 1 -2 3 10.5 data7", false, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}}},
		{"_diffrn_refln.index_h _diffrn_refln.index_k _diffrn_refln.index_l _diffrn_refln.counts_net _diffrn_refln.counts_net_su",
			"1 -2 3 10.5 2", false, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}}},
		{"_diffrn_refln.diffrn_id _diffrn_refln.id _diffrn_refln.index_h _diffrn_refln.index_k _diffrn_refln.index_l _diffrn_refln.intensity_net _diffrn_refln.intensity_sigma _diffrn_refln.pdbx_rotation_angle _diffrn_refln.pdbx_image_id",
			"x 'a b' 1 -2 3 10.5 2 -3.25 14", false, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}, Phi: []float64{-3.25}, Frame: []int32{14}}},
		{"_pdbx_diffrn_unmerged_refln.reflection_id _pdbx_diffrn_unmerged_refln.scan_id _pdbx_diffrn_unmerged_refln.image_id_begin _pdbx_diffrn_unmerged_refln.index_h _pdbx_diffrn_unmerged_refln.index_k _pdbx_diffrn_unmerged_refln.index_l _pdbx_diffrn_unmerged_refln.intensity_meas _pdbx_diffrn_unmerged_refln.intensity_sigma _pdbx_diffrn_unmerged_refln.scan_angle_reflection _pdbx_diffrn_unmerged_refln.partiality",
			"1 1 14 1 -2 3 10.5 2 -3.25 .5", false, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}, Phi: []float64{-3.25}, Frame: []int32{14}, Partiality: []float64{.5}}},
		{"_refln_index_h _refln_index_k _refln_index_l _refln_F_squared_calc _refln_F_squared_meas _refln_F_squared_sigma _refln_observed_status",
			"1 -2 3 99 10.5 2 o", true, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}}},
		{"_refln.index_h _refln.index_k _refln.index_l _refln.intensity_meas _refln.intensity_meas_su", "1 -2 3 10.5 2", true, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}}},
		{"_refln.index_h _refln.index_k _refln.index_l _refln.F_meas_au _refln.F_meas_sigma_au", "1 -2 3 3 .5", true, intensity.Columns{I: []float64{9}, Sigma: []float64{3}}},
		{"_refln_index_h _refln_index_k _refln_index_l _refln_F_meas _refln_F_squared_meas _refln_F_squared_sigma", "1 -2 3 3 10.5 2", true, intensity.Columns{I: []float64{10.5}, Sigma: []float64{2}}},
		{"_refln_index_h _refln_index_k _refln_index_l _refln_F_meas _refln_F_sigma _refln_intensity_meas", "1 -2 3 3 .5 10", true, intensity.Columns{I: []float64{9}, Sigma: []float64{3}}},
	} {
		r := mustRead(t, loopOf(tt.names, tt.rows+"\n"), Selection{})
		tt.want.H, tt.want.K, tt.want.L = []int16{1}, []int16{-2}, []int16{3}
		if diff := cmp.Diff(&tt.want, r.Columns); diff != "" || r.Merged != tt.merged {
			t.Errorf("%s: merged %v %s", tt.names, r.Merged, diff)
		}
	}
}

// The same numbers in every form that CIF allows read the same.
func TestFormsOfValues(t *testing.T) {
	plain := mustRead(t, listHead+"1 2 3 10.5 2\n4 5 6 -1200 30\n", Selection{}).Columns
	for _, rows := range []string{
		"1 2 3 10.5 2 4 5 6 -1200 30",
		"1\n2\n3\n10.5\n2\n4\n5\n6\n-1200\n30\n",
		"+1 2.0 '3' \"10.5\" 2. 4 5 6 -1.2E3 3e+1\n",
		"1 2 3 # comment 7 8 9\n10.5 2\n#\n4 5 6 -1200.0 30(5)\n",
		"1\t2\t3\t10.50000000000000000000 2\r\n4 5 6 -12000000000000000000000e-19 30\r\n",
		"1 2 3 1050.0e-2 2 4 5 6 -1200 30 # end",
	} {
		if diff := cmp.Diff(plain, mustRead(t, listHead+rows, Selection{}).Columns); diff != "" {
			t.Errorf("%q: %s", rows, diff)
		}
	}
}

func TestUncertaintyInParentheses(t *testing.T) {
	names := "_diffrn_refln_index_h _diffrn_refln_index_k _diffrn_refln_index_l _diffrn_refln_intensity_net"
	r := mustRead(t, loopOf(names, "1 0 0 12.34(5)\n2 0 0 34.5(12)\n3 0 0 3.45E1(12)\n4 0 0 100(20)\n5 0 0 7\n"), Selection{})
	if diff := cmp.Diff([]float64{.05, 1.2, 1.2, 20}, r.Columns.Sigma, cmpopts.EquateApprox(1e-12, 0)); diff != "" {
		t.Error(diff)
	}
	if diff := cmp.Diff([]Aside{aside(reasonNoSU, 1, 11)}, r.SetAside); diff != "" {
		t.Error(diff)
	}
	if r.List.Sigma != "(s.u.)" {
		t.Errorf("sigma column %q", r.List.Sigma)
	}
}

func TestSetAside(t *testing.T) {
	text := loopOf("_refln_index_h _refln_index_k _refln_index_l _refln_intensity_meas _refln_intensity_sigma _refln_include_status",
		"1 0 0 10 1 o\n2 0 0 ? 1 o\n3 0 0 10 0 o\n4 0 0 10 -1 o\n5 0 0 10 . o\n6 0 0 10 1 x\n7 0 0 10 1 -\n0 0 0 10 1 o\n? 0 0 10 1 o\n8 0 0 -5 1 <\n9 0 0 10 0 o\n")
	r := mustRead(t, text, Selection{})
	want := []Aside{aside("intensity is null", 1, 10), aside("sigma is zero or negative", 3, 11), aside("sigma is null", 1, 13), aside(reasonUnreliable, 1, 14),
		aside(reasonAbsent, 1, 15), aside("index is 0 0 0", 1, 16), aside("index is null", 1, 17)}
	if diff := cmp.Diff(want, r.SetAside); diff != "" {
		t.Error(diff)
	}
	if r.Rows != 11 || r.Columns.Len() != 2 || r.Columns.I[1] != -5 || r.List.Nulls != 3 {
		t.Errorf("rows %d, used %d, nulls %d", r.Rows, r.Columns.Len(), r.List.Nulls)
	}
}

// Lines of rows far from a mark, with comments between.
func TestLineOfARow(t *testing.T) {
	var b strings.Builder
	b.WriteString(listHead)
	line := 7
	for i := 1; i <= 5000; i++ {
		sigma := "1"
		if i == 4321 {
			sigma = "0"
		}
		if i%7 == 0 {
			b.WriteString("# a comment\n")
			line++
		}
		fmt.Fprintf(&b, "%d 1 1\n 5 %s\n", i, sigma)
	}
	r := mustRead(t, b.String(), Selection{})
	want := 7 + 2*4320 + 4321/7 + 1
	if len(r.SetAside) != 1 || r.SetAside[0].FirstLine != want || r.Columns.Len() != 4999 {
		t.Errorf("aside %v, want line %d", r.SetAside, want)
	}
}

func TestAmplitudes(t *testing.T) {
	names := "_refln_index_h _refln_index_k _refln_index_l _refln_F_meas _refln_F_sigma"
	r := mustRead(t, loopOf(names, "1 0 0 3 .5\n2 0 0 -3 .5\n3 0 0 0 .5\n"), Selection{})
	if r.Columns.Len() != 1 || r.Columns.I[0] != 9 || r.Columns.Sigma[0] != 3 || len(r.SetAside) != 2 || r.SetAside[0].Reason != reasonAmplitude {
		t.Errorf("%+v %v", r.Columns, r.SetAside)
	}
	if !warned(r, "amplitudes") {
		t.Errorf("warnings %v", r.Warnings)
	}
}

func warned(r *Reflections, code string) bool {
	for _, w := range r.Warnings {
		if w.Code == code {
			return true
		}
	}
	return false
}

func TestScaleGroupSets(t *testing.T) {
	names := "_refln_index_h _refln_index_k _refln_index_l _refln_intensity_meas _refln_intensity_sigma _refln_scale_group_code"
	f, err := Parse("f.cif", []byte(loopOf(names, "1 0 0 10 1 12%3\n2 0 0 20 2 13%3\n1 0 0 11 1 12%4\n")))
	if err != nil {
		t.Fatal(err)
	}
	l := f.Lists()[0]
	if l.Merged || l.MinFrame != 12 || l.MaxFrame != 13 {
		t.Errorf("list %+v, want single measurements of frames 12 to 13", l)
	}
	if diff := cmp.Diff([]Set{{"3", 2}, {"4", 1}}, l.ScaleSets); diff != "" {
		t.Error(diff)
	}
	r, err := f.Read(Selection{Pick: "a/%3"})
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff([]int32{12, 13}, r.Columns.Frame); diff != "" || !warned(r, "merged-name") || r.Rows != 2 {
		t.Error(diff, r.Warnings, r.Rows)
	}
	r, err = f.Read(Selection{All: true})
	if err != nil || r.Rows != 3 {
		t.Errorf("all: %v", err)
	}
	if _, err = f.Read(Selection{}); err == nil || !strings.Contains(err.Error(), `such as "%3"`) {
		t.Errorf("no pick: %v", err)
	}
	words := mustRead(t, loopOf(names, "1 0 0 10 1 low\n2 0 0 20 2 high\n"), Selection{Pick: "high"})
	if words.Columns.Frame != nil || words.Columns.H[0] != 2 {
		t.Errorf("words as scale groups: %+v", words.Columns)
	}
}

func TestPick(t *testing.T) {
	second := strings.Replace(listHead, "data_a", "data_b/c", 1)
	text := listHead + "1 0 0 10 1\n" + second + "2 0 0 10 1\n" + strings.Replace(mmHead, "data_a\n", "", 1) + "x 3 0 0 10 1 1\ny 4 0 0 10 1 1\n"
	for pick, h := range map[string]int16{"a": 1, "A": 1, "#1": 1, "b/c/_refln": 2, "#2/_refln": 2, "b/c/x": 3, "b/c/diffrn=y": 4, "#2/_diffrn_refln/y": 4, "x": 3, "_diffrn_refln/x": 3} {
		if r := mustRead(t, text, Selection{Pick: pick}); r.Columns.Len() != 1 || r.Columns.H[0] != h {
			t.Errorf("%s: got index %v, want %d", pick, r.Columns.H, h)
		}
	}
	r := mustRead(t, text, Selection{Pick: "b/c", All: true})
	if !warned(r, "several-lists") || r.Columns.Len() != 2 {
		t.Errorf("single measurements before merged: %v %v", r.Columns.H, r.Warnings)
	}
}

func TestFrameAndAngleColumnsWithNulls(t *testing.T) {
	names := "_diffrn_refln.index_h _diffrn_refln.index_k _diffrn_refln.index_l _diffrn_refln.intensity_net _diffrn_refln.intensity_sigma _diffrn_refln.pdbx_scan_angle _diffrn_refln.pdbx_image_id"
	r := mustRead(t, loopOf(names, "1 0 0 10 1 ? .\n2 0 0 10 1 ? .\n"), Selection{})
	if r.Columns.Phi != nil || r.Columns.Frame != nil || r.Columns.Len() != 2 {
		t.Errorf("columns null throughout: %+v", r.Columns)
	}
	r = mustRead(t, loopOf(names, "1 0 0 10 1 5 7\n2 0 0 10 1 ? 7\n3 0 0 10 1 5 .\n"), Selection{})
	if r.Columns.Len() != 1 || len(r.SetAside) != 2 || r.SetAside[0].Reason != "angle is null" || r.SetAside[1].Reason != "frame is null" {
		t.Errorf("some null: %+v %v", r.Columns, r.SetAside)
	}
}

func TestListInsideText(t *testing.T) {
	touching := "data_a\n_x_hkl_file\n;\n -10 -11 -12 9999.99 9999.99\n-100-101 -12  102.0821.79097\n   1   0   2    -3.5    2.00\n   0   0   0    0.00    0.00\n_not an item\nloop_\n;\n_b 1\n"
	r := mustRead(t, touching, Selection{})
	want := &intensity.Columns{H: []int16{-10, -100, 1}, K: []int16{-11, -101, 0}, L: []int16{-12, -12, 2},
		I: []float64{9999.99, 102.08, -3.5}, Sigma: []float64{9999.99, 21.79097, 2}}
	if diff := cmp.Diff(want, r.Columns); diff != "" || r.List.Layout != layoutFixed {
		t.Error(diff, r.List.Layout)
	}
	free := mustRead(t, "data_a\n_iucr_refine_reflections_details\n;\n1 0 2 -3.5 2.00 1\n-1 2 3 1e2 1.5 1\n;\n", Selection{})
	if diff := cmp.Diff(&intensity.Columns{H: []int16{1, -1}, K: []int16{0, 2}, L: []int16{2, 3}, I: []float64{-3.5, 100}, Sigma: []float64{2, 1.5}}, free.Columns); diff != "" || free.List.Layout != layoutFree {
		t.Error(diff, free.List.Layout)
	}
	if !warned(free, "list-in-text") {
		t.Errorf("warnings %v", free.Warnings)
	}
	grouped := mustRead(t, "data_a\n_x_hkl_file\n;\n   1   0   0   10.00    1.00   1\n   2   0   0   10.00    1.00   2\n;\n", Selection{Pick: "%2"})
	if grouped.Columns.Len() != 1 || grouped.Columns.H[0] != 2 {
		t.Errorf("groups: %+v", grouped.Columns)
	}
}

func TestCIFInsideText(t *testing.T) {
	text := "data_a\n_cell_length_a 5\n_cell_length_b 6\n_cell_length_c 7\n_cell_angle_alpha 90\n_cell_angle_beta 90\n_cell_angle_gamma 90\n_iucr_refine_fcf_details\n;\n" + listHead + "1 0 0 10 1\n2 0 0 10 0\n;\n"
	r := mustRead(t, text, Selection{})
	if r.Columns.Len() != 1 || r.Cell == nil || r.Cell.C != 7 || r.SetAside[0].FirstLine != 18 {
		t.Errorf("%+v %+v %v", r.Columns, r.Cell, r.SetAside)
	}
}

func TestIndexTransformation(t *testing.T) {
	names := "_diffrn_refln_index_h _diffrn_refln_index_k _diffrn_refln_index_l _diffrn_refln_intensity_net _diffrn_refln_intensity_u"
	var m strings.Builder
	for i, row := range [3][3]int{{0, 1, 0}, {0, 0, 1}, {1, 0, 0}} {
		for j, x := range row {
			fmt.Fprintf(&m, "_diffrn_reflns_transf_matrix_%d%d %d\n", i+1, j+1, x)
		}
	}
	r := mustRead(t, loopOf(names, "1 2 3 10 1\n")+m.String(), Selection{})
	if r.Columns.H[0] != 3 || r.Columns.K[0] != 1 || r.Columns.L[0] != 2 || !warned(r, "index-transformation") {
		t.Errorf("%v %v %v", r.Columns.H, r.Columns.K, r.Columns.L)
	}
	f, err := Parse("f.cif", []byte(loopOf(names, "1 2 3 10 1\n")+strings.Replace(m.String(), "12 1", "12 0.5", 1)))
	if err != nil {
		t.Fatal(err)
	}
	if _, err := f.Read(Selection{}); err == nil || !strings.Contains(err.Error(), "makes 1 2 3 a fraction") {
		t.Errorf("fraction: %v", err)
	}
}

// Lengths around the sizes at which columns grow and lines are marked.
func TestListsOfEveryLengthAreWhole(t *testing.T) {
	for _, n := range []int{1, 1023, 1024, 1025, 2047, 2048, 2049, 5000, 9001} {
		var b strings.Builder
		for i := range n {
			fmt.Fprintf(&b, "%d 1 -%d %d.5 %d\n", i+1, i%9, i, 1+i%3)
		}
		r := mustRead(t, listHead+b.String(), Selection{})
		if r.Columns.Len() != n {
			t.Fatalf("%d rows of %d", r.Columns.Len(), n)
		}
		for i := range n {
			if r.Columns.I[i] != float64(i)+.5 || int(r.Columns.H[i]) != i+1 || int(r.Columns.L[i]) != -(i%9) || r.Columns.Sigma[i] != float64(1+i%3) {
				t.Fatalf("%d rows: row %d differs", n, i)
			}
		}
	}
}

func aside(reason string, count, line int) Aside {
	return Aside{Reason: reason, Count: count, FirstLine: line}
}
