package cif_test

import (
	"fmt"
	"os"

	"thinward/io/cif"
)

func Example() {
	text := `data_thin
_cell_length_a 24.1
_cell_length_b 31.2
_cell_length_c 40.3
_cell_angle_alpha 90
_cell_angle_beta 90
_cell_angle_gamma 90
_space_group_name_H-M_alt 'P 21 21 21'
_diffrn_radiation_wavelength 0.01969
loop_
_diffrn_refln_index_h
_diffrn_refln_index_k
_diffrn_refln_index_l
_diffrn_refln_intensity_net
_diffrn_refln_intensity_u
1 2 3  510.2 12.5
2 0 0  -3.1   4.0
3 0 1  80.0   0
`
	f, err := cif.Parse("thin.cif", []byte(text))
	if err != nil {
		fmt.Println(err)
		return
	}
	r, err := f.Read(cif.Selection{})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println("used:", r.Columns.Len(), "of", r.Rows)
	for _, a := range r.SetAside {
		fmt.Printf("set aside: %d, %s, first on line %d\n", a.Count, a.Reason, a.FirstLine)
	}
	fmt.Printf("%s, %s, %.0f keV\n", r.HM, r.Probe, r.EnergyKeV)
	// Output:
	// used: 2 of 3
	// set aside: 1, sigma is zero or negative, first on line 18
	// P 21 21 21, electron, 300 keV
}

func ExampleWriter() {
	w := cif.NewWriter(os.Stdout)
	w.Block("pairs")
	w.Item("_[local]_thickness_thin_nm", cif.Num(140))
	w.Loop([]string{"_[local]_pair_index_h", "_[local]_pair_difference", "_[local]_pair_status"})
	w.Row([]cif.Value{cif.Int(2), cif.Num(-315.4), cif.Str("both")})
	w.Row([]cif.Value{cif.Int(4), cif.NotApplicable(), cif.Str("only thin")})
	if err := w.Close(); err != nil {
		fmt.Println(err)
	}
	// Output:
	// #\#CIF_1.1
	//
	// data_pairs
	// _[local]_thickness_thin_nm        140
	// loop_
	// _[local]_pair_index_h
	// _[local]_pair_difference
	// _[local]_pair_status
	// 2 -315.4 both
	// 4 . 'only thin'
}
