package cif

import (
	"strings"
	"testing"
)

// A column that tells twin components apart is not passed over in silence.
func TestTwinColumnIsNamed(t *testing.T) {
	for _, c := range []struct {
		column string
		warned bool
	}{{"_refln_twin_component", true}, {"_refln.Twin_individual_id", true}, {"_refln_phase_calc", false}} {
		dot := "_"
		if strings.Contains(c.column, ".") {
			dot = "."
		}
		text := "data_x\nloop_\n"
		for _, item := range []string{"index_h", "index_k", "index_l", "F_squared_meas", "F_squared_sigma"} {
			text += "_refln" + dot + item + "\n"
		}
		f, err := Parse("x.cif", []byte(text+c.column+"\n1 0 0 10 1 1\n1 0 0 40 1 2\n"))
		if err != nil {
			t.Fatal(err)
		}
		r, err := f.Read(Selection{})
		if err != nil {
			t.Fatal(err)
		}
		said := false
		for _, w := range r.Warnings {
			said = said || w.Code == "twin-column" && strings.Contains(w.Text, c.column)
		}
		if said != c.warned {
			t.Errorf("%s: warned %t: %+v", c.column, said, r.Warnings)
		}
	}
}
