package cif

import (
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/intensity"
)

const pairNames = "_refln.index_h _refln.index_k _refln.index_l _refln.pdbx_I_plus _refln.pdbx_I_plus_sigma _refln.pdbx_I_minus _refln.pdbx_I_minus_sigma"

// A list of I+ and I- without a mean gives a row for each member of a pair; what is
// null or the same number twice is counted, with the line it stands on.
func TestFriedelPairs(t *testing.T) {
	text := loopOf(pairNames, "1 -2 3 10.5 2 11 3\n0 2 0 20 1 20 1\n2 0 1 ? ? 7 .5\n2 0 2 8 .25 . .\n2 0 3 ? ? ? ?\n? 1 1 5 1 6 1\n")
	r := mustRead(t, text, Selection{})
	want := &intensity.Columns{H: []int16{1, -1, 0, -2, 2}, K: []int16{-2, 2, 2, 0, 0}, L: []int16{3, -3, 0, -1, 2},
		I: []float64{10.5, 11, 20, 7, 8}, Sigma: []float64{2, 3, 1, .5, .25}}
	if diff := cmp.Diff(want, r.Columns); diff != "" {
		t.Error(diff)
	}
	asides := []Aside{aside(reasonRepeated, 1, 11), aside("intensity is null", 4, 12), aside("index is null", 2, 15)}
	if diff := cmp.Diff(asides, r.SetAside); diff != "" || r.Rows != 12 {
		t.Error(diff, r.Rows)
	}
	if r.List.Intensity != "_refln.pdbx_I_plus and _refln.pdbx_I_minus" || r.List.MinHKL != [3]int{-2, -2, -3} || r.List.Rows != 12 || r.List.Line != 10 {
		t.Errorf("%+v", r.List)
	}
	says := "its 6 rows were read as 12, (h k l) and (-h -k -l); 3 rows hold both, 1 only the first, 1 only the second; in 1 both are the same number"
	if len(r.Warnings) != 1 || r.Warnings[0].Code != "friedel-pairs" || !strings.Contains(r.Warnings[0].Text, says) {
		t.Errorf("warnings %v", r.Warnings)
	}
}

func TestFriedelForms(t *testing.T) {
	for _, tt := range []struct {
		names, row string
		want       intensity.Columns
		code       string
	}{
		{pairNames + " _refln.intensity_meas _refln.intensity_sigma", "1 -2 3 9 1 11 1 10 .5", intensity.Columns{H: []int16{1}, K: []int16{-2}, L: []int16{3}, I: []float64{10}, Sigma: []float64{.5}}, "friedel-mean"},
		{pairNames + " _refln.F_meas_au _refln.F_meas_sigma_au", "1 -2 3 9 1 11 1 3 .5", intensity.Columns{H: []int16{1, -1}, K: []int16{-2, 2}, L: []int16{3, -3}, I: []float64{9, 11}, Sigma: []float64{1, 1}}, "friedel-pairs"},
		{pairNames + " _refln.status", "1 -2 3 9 1 11 1 o", intensity.Columns{H: []int16{1, -1}, K: []int16{-2, 2}, L: []int16{3, -3}, I: []float64{9, 11}, Sigma: []float64{1, 1}}, "friedel-pairs"},
		{pairNames + " _refln.pdbx_diffrn_id", "1 -2 3 9 1 11 1 a", intensity.Columns{H: []int16{1, -1}, K: []int16{-2, 2}, L: []int16{3, -3}, I: []float64{9, 11}, Sigma: []float64{1, 1}}, "friedel-pairs"},
		{strings.ReplaceAll(pairNames, "_I_", "_F_"), "1 -2 3 3 .5 4 .25", intensity.Columns{H: []int16{1, -1}, K: []int16{-2, 2}, L: []int16{3, -3}, I: []float64{9, 16}, Sigma: []float64{3, 2}}, "friedel-pairs"},
		{"_refln.index_h _refln.index_k _refln.index_l _refln.pdbx_I_plus _refln.pdbx_I_plus_sigma", "1 -2 3 9 1", intensity.Columns{H: []int16{1}, K: []int16{-2}, L: []int16{3}, I: []float64{9}, Sigma: []float64{1}}, "friedel-half"},
		{"_refln.index_h _refln.index_k _refln.index_l _refln.pdbx_I_minus _refln.pdbx_I_minus_sigma", "1 -2 3 9 1", intensity.Columns{H: []int16{-1}, K: []int16{2}, L: []int16{-3}, I: []float64{9}, Sigma: []float64{1}}, "friedel-half"},
	} {
		r := mustRead(t, loopOf(tt.names, tt.row+"\n"), Selection{})
		if diff := cmp.Diff(&tt.want, r.Columns); diff != "" || !warned(r, tt.code) {
			t.Errorf("%s: %s %v", tt.names, diff, r.Warnings)
		}
	}
}

// Long lists of pairs keep their lines, past the sizes at which columns grow.
func TestFriedelLines(t *testing.T) {
	rows := strings.Repeat("1 2 3 4.5 1 5.5 1\n", 5000)
	r := mustRead(t, loopOf(pairNames, rows+"1 2 4 4 1 5 0\n"+rows), Selection{})
	if r.Columns.Len() != 20001 || len(r.SetAside) != 1 || r.SetAside[0].FirstLine != 9+5001 {
		t.Errorf("%d rows, aside %v", r.Columns.Len(), r.SetAside)
	}
}
