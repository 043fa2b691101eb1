package cif

import (
	"errors"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/intensity"
)

// A category of one row may stand as pairs of name and value, a list of one
// reflection too; in any order, with other items between, quoted or in text fields.
func TestListOfOneRowAsPairs(t *testing.T) {
	want := &intensity.Columns{H: []int16{1}, K: []int16{-2}, L: []int16{3}, I: []float64{10.5}, Sigma: []float64{2}}
	for _, text := range []string{
		"data_a\n_refln_index_h 1\n_refln_index_k -2\n_refln_index_l 3\n_refln_intensity_meas 10.5\n_refln_intensity_sigma 2\n",
		"data_a\n_refln.intensity_sigma '2'\n_refln.index_l 3.0\n_cell.length_x 5\n_refln.index_k \"-2\"\n_refln.index_h +1\n_refln.intensity_meas 10.5\n_reflns.number_obs 1\n",
		"data_a\n_diffrn_refln.id\n;x\n;\n_diffrn_refln.index_h 1\n_diffrn_refln.index_k -2\n_diffrn_refln.index_l 3\n_diffrn_refln.intensity_net 10.5(9)\n_diffrn_refln.intensity_net_su 2\n",
	} {
		r := mustRead(t, text, Selection{})
		if diff := cmp.Diff(want, r.Columns); diff != "" || r.List.Line < 2 || r.Rows != 1 {
			t.Errorf("%q: %s line %d", text, diff, r.List.Line)
		}
	}
	pair := mustRead(t, "data_a\n"+strings.Join(strings.Fields("_refln.index_h 1 _refln.index_k 2 _refln.index_l 3 _refln.pdbx_I_plus 4 _refln.pdbx_I_plus_sigma 1 _refln.pdbx_I_minus 5 _refln.pdbx_I_minus_sigma 1"), " "), Selection{})
	if pair.Columns.Len() != 2 || pair.Columns.H[1] != -1 || pair.Columns.I[1] != 5 {
		t.Errorf("%+v", pair.Columns)
	}
}

func TestListAsPairsAmongLoops(t *testing.T) {
	text := "data_a\n_refln.index_h 1\n_refln.index_k 2\n_refln.index_l 3\n_refln.intensity_meas 4\n_refln.intensity_sigma 1\n" + strings.Replace(mmHead, "data_a", "data_b", 1) + "1 7 2 3 10 1 4\n"
	f, err := Parse("f.cif", []byte(text))
	if err != nil {
		t.Fatal(err)
	}
	if l := f.Lists(); len(l) != 2 || l[0].Block != "a" || l[0].Line != 2 || l[0].Rows != 1 || l[1].Block != "b" {
		t.Errorf("%+v", l)
	}
	if r, err := f.Read(Selection{Pick: "a"}); err != nil || r.Columns.H[0] != 1 {
		t.Errorf("%v", err)
	}
}

func TestListAsPairsFaults(t *testing.T) {
	_, err := Parse("f.cif", []byte("data_b\n_refln.index_h 1\n_refln.index_k 2\n_refln.index_l 3.5\n"))
	var e *Error
	if !errors.As(err, &e) || e.Line != 4 || e.Item != "_refln.index_l" || e.Block != "b" || !strings.Contains(e.Problem, `"3.5" is not a whole number`) {
		t.Errorf("%v", err)
	}
}
