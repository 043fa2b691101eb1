package cif

import (
	"errors"
	"strings"
	"testing"
)

const listHead = "data_a\nloop_\n_refln_index_h\n_refln_index_k\n_refln_index_l\n_refln_intensity_meas\n_refln_intensity_sigma\n"

const mmHead = "data_a\nloop_\n_diffrn_refln.diffrn_id\n_diffrn_refln.index_h\n_diffrn_refln.index_k\n_diffrn_refln.index_l\n_diffrn_refln.intensity_net\n_diffrn_refln.intensity_sigma\n_diffrn_refln.pdbx_image_id\n"

// Every case is read with Parse and then Read with the pick given; the first of both
// that fails must say file, line, block, item, problem and remedy.
func TestBadInput(t *testing.T) {
	for _, tt := range []struct {
		name, text, pick string
		line             int
		item             string
		problem          string // part of it
		remedy           string // part of it
	}{
		{"UTF-16", "\xff\xfed\x00a\x00", "", 1, "", "UTF-16", "save it as plain ASCII"},
		{"UTF-16 big", "\xfe\xff\x00d", "", 1, "", "UTF-16", "save it as plain ASCII"},
		{"zip", "PK\x03\x04....", "", 1, "", "zip archive", "unpack it first"},
		{"gzip cut off", "\x1f\x8b\x08\x00\x00\x00\x00\x00\x00\x00\x4b\x4c", "", 1, "", "the gzip data are cut off after 1 bytes of text", "copy the file again"},
		{"gzip header cut off", "\x1f\x8b\x00", "", 0, "", "the gzip data are cut off after 0 bytes of text", "copy the file again"},
		{"gzip header", "\x1f\x8b\x00aaaaaaaaaaaaaaaa", "", 0, "", "the gzip header is damaged", "copy the file again"},
		{"UTF-16 without mark", "d\x00a\x00t\x00", "", 1, "", "UTF-16 text without a byte-order mark", "save it as plain ASCII"},
		{"bzip2", "BZh91AY&SY", "", 1, "", "packed with bzip2", "only gzip is read directly"},
		{"xz", "\xfd7zXZ\x00", "", 1, "", "packed with xz", "only gzip is read directly"},
		{"web page", "\n<!DOCTYPE html>", "", 1, "", "the file is a web page", "download the list itself"},
		{"empty", "", "", 0, "", "the file is empty", "cut off or never written"},
		{"NUL", "data_a\n_a 1\x002\n", "", 2, "_a", "NUL byte", "damaged or not text"},
		{"NUL in comment", "# a\x00\ndata_a\n", "", 1, "", "NUL byte", "damaged or not text"},
		{"non-ASCII value", "data_a\n_a 1\u00a02\n", "", 2, "_a", "non-ASCII byte", `begin the file with #\#CIF_2.0`},
		{"form feed", "data_a\n_a 1\f_b 2\n", "", 2, "_a", "control character", "only blank, tab and line ends separate values"},
		{"control-Z inside", "data_a\n_a 1\x1a\n_b 2\n", "", 2, "_a", "control character", "remove it"},
		{"invalid UTF-8", "#\\#CIF_2.0\ndata_a\n_a 'x\xff'\n", "", 3, "_a", "not valid UTF-8", "save the file as UTF-8"},
		{"no heading", "_a 1\n", "", 1, "", "before the first data_ heading", "such as data_thin"},
		{"open string at the end", "data_a\n_a 'x", "", 2, "_a", "not closed before the end of the file", "close it with '"},
		{"open text field", "data_a\n_a\n;x\n", "", 3, "_a", "text field is not closed", "; as the first character"},
		{"empty frame", "data_a\nsave_f\nsave_\n", "", 3, "", "save frame f is empty", "remove it"},
		{"nested frame", "data_a\nsave_f _a 1\nsave_g _b 1\nsave_", "", 3, "", "opens inside the save frame f", "cannot be nested"},
		{"frame not open", "data_a\nsave_\n", "", 2, "", "not open", "in quotes if it is a value"},
		{"frame twice", "data_a save_f _a 1 save_\nsave_F _a 1 save_", "", 2, "", "stands twice", "rename"},
		{"heading in frame", "data_a\nsave_f _a 1\ndata_b", "", 3, "", "inside the save frame f", "close the frame"},
		{"underscore alone", "data_a\n_ 1", "", 2, "", "only an underscore", "in full"},
		{"open triple quote", "#\\#CIF_2.0\ndata_a\n_a '''x\n", "", 3, "_a", "not closed before the end", "three quote marks"},
		{"CIF 2.0 list open", "#\\#CIF_2.0\ndata_a\n_a [1 2\n", "", 3, "_a", "list or table is not closed before the end", "close it with its bracket"},
		{"CIF 2.0 list closed twice", "#\\#CIF_2.0\ndata_a\n_a [1 2]]\n", "", 3, "_a", "list or table is not followed by a blank", "behind the closing bracket"},
		{"CIF 2.0 brackets crossed", "#\\#CIF_2.0\ndata_a\n_a [1\n2}\n", "", 4, "_a", "closed by } where that does not fit", "pair [ with ]"},
		{"CIF 2.0 key without value", "#\\#CIF_2.0\ndata_a\n_a {'a':}\n", "", 3, "_a", "closed by } where that does not fit", "every key a value"},
		{"CIF 2.0 key without colon", "#\\#CIF_2.0\ndata_a\n_a {'a' :1}\n", "", 3, "_a", "no colon directly behind it", "'key':value"},
		{"CIF 2.0 values touch", "#\\#CIF_2.0\ndata_a\n_a [[1][2]]\n", "", 3, "_a", "two values inside", "put a blank between"},
		{"CIF 2.0 nested deeply", "#\\#CIF_2.0\ndata_a\n_a " + strings.Repeat("[", 101), "", 3, "_a", "nested too deeply", "separate items or a loop"},
		{"index list of two", "#\\#CIF_2.0\ndata_a\nloop_\n_diffrn_refln.hkl\n_diffrn_refln.intensity_net\n_diffrn_refln.intensity_net_su\n[1 2] 10 1\n", "", 7, "_diffrn_refln.hkl", `"[1 2]" is not a list of three whole numbers`, "[1 2 3]"},

		{"index not whole", listHead + "1 2 3.5 10 1\n", "", 8, "_refln_index_l", `the index "3.5" is not a whole number`, "must be integers"},
		{"index a word", listHead + "1 2 3 10 1\n1 b 3 10 1\n", "", 9, "_refln_index_k", `the index "b"`, "shifted column"},
		{"index too large", listHead + "1 2 40000 10 1\n", "", 8, "_refln_index_l", "40000 is out of range", "columns that touch"},
		{"index with s.u.", listHead + "1(1) 2 3 10 1\n", "", 8, "_refln_index_h", `the index "1(1)"`, "must be integers"},
		{"intensity hexadecimal", listHead + "1 2 3 0x10 1\n", "", 8, "_refln_intensity_meas", `"0x10" is not a number`, "decimal digits"},
		{"intensity underscored", listHead + "1 2 3 1_000 1\n", "", 8, "_refln_intensity_meas", `"1_000" is not a number`, "decimal digits"},
		{"intensity NaN", listHead + "1 2 3 NaN 1\n", "", 8, "_refln_intensity_meas", `"NaN" is not a number`, "write ? for a value"},
		{"sigma infinite", listHead + "1 2 3 10 -Inf\n", "", 8, "_refln_intensity_sigma", `"-Inf" is not a number`, "write ? for a value"},
		{"decimal comma", listHead + "1 2 3 10,5 1\n", "", 8, "_refln_intensity_meas", `"10,5" is not a number`, "decimal point, not a comma"},
		{"Fortran exponent", listHead + "1 2 3 1.5d0 1\n", "", 8, "_refln_intensity_meas", `"1.5d0"`, "exponent with e"},
		{"s.u. not closed", listHead + "1 2 3 1.5(2 1\n", "", 8, "_refln_intensity_meas", `"1.5(2"`, "digits in parentheses"},
		{"s.u. before exponent", listHead + "1 2 3 3.45(12)E1 1\n", "", 8, "_refln_intensity_meas", `"3.45(12)E1"`, "digits in parentheses"},
		{"overflow", listHead + "1 2 3 1e999 1\n", "", 8, "_refln_intensity_meas", `"1e999"`, "decimal digits"},
		{"number as text field", listHead + "1 2 3\n;10\n;\n1\n", "", 9, "_refln_intensity_meas", `"10" is not a number`, "decimal digits"},
		{"row cut off", listHead + "1 2 3 10 1\n1 2 3\n", "", 10, "_refln_index_h", "8 values for 5 names", "complete the last row"},
		{"heading inside a row", listHead + "1 2 3 10\ndata_b\n", "", 9, "_refln_index_h", "4 values for 5 names", "complete the last row"},
		{"image fraction", mmHead + "1 1 2 3 10 1 4.5\n", "", 10, "_diffrn_refln.pdbx_image_id", `"4.5" is not a whole number`, "number of the image"},
		{"image negative", mmHead + "1 1 2 3 10 1 -4\n", "", 10, "_diffrn_refln.pdbx_image_id", `"-4"`, "number of the image"},

		{"no list", "data_a\n_a 1\n", "", 0, "", "holds no reflection list; its blocks are a", "_diffrn_refln or _refln"},
		{"no sigma", strings.Replace(listHead, "_refln_intensity_sigma\n", "", 1) + "1 2 3 10\n", "", 7, "_refln_intensity_meas", "no uncertainties", "none is made up here"},
		{"no intensity", strings.Replace(listHead, "_meas", "_calc", 1) + "1 2 3 10 1\n", "", 8, "_refln_index_h", "no measured intensity", "supply intensity_net"},
		{"nothing usable", listHead + "1 2 3 10 0\n1 2 4 ? 1\n", "", 8, "_refln_intensity_meas", "no row of 2 can be used: sigma is zero or negative (1, first on line 8), intensity is null (1, first on line 9)", "peek"},
		{"Friedel pair without sigmas", "data_a\nloop_\n_refln.index_h\n_refln.index_k\n_refln.index_l\n_refln.pdbx_I_plus\n_refln.pdbx_I_minus\n1 2 3 10 11\n", "", 8, "_refln.pdbx_I_plus", "no uncertainties", "none is made up here"},
		{"peak heights alone", strings.Replace(listHead, "_refln_intensity_meas", "_refln_intensity_peak", 1) + "1 2 3 10 1\n", "", 8, "_refln_index_h", "no measured intensity: its columns are _refln_index_h", "F_squared_meas or F_meas"},
		{"list as pairs", "data_a\n_refln.index_h 1\n_refln.index_k 2\n_refln.index_l 3.5\n", "", 4, "_refln.index_l", `the index "3.5" is not a whole number`, "must be integers"},
		{"list as pairs, no sigma", "data_a\n_refln.index_h 1\n_refln.index_k 2\n_refln.index_l 3\n_refln.intensity_meas 5\n", "", 2, "_refln.intensity_meas", "no uncertainties", "none is made up here"},
		{"mate not a number", "data_a\nloop_\n_refln.index_h\n_refln.index_k\n_refln.index_l\n_refln.pdbx_I_plus\n_refln.pdbx_I_plus_sigma\n_refln.pdbx_I_minus\n_refln.pdbx_I_minus_sigma\n1 2 3 10 1 x 1\n", "", 10, "_refln.pdbx_I_minus", `"x" is not a number`, "decimal digits"},
		{"two cells", listHead + "1 2 3 10 1\nloop_\n_pdbx_diffrn_cell.length_a\n5\n6\n", "", 12, "_pdbx_diffrn_cell.length_a", "more than one cell", "cell of this list only"},
		{"several data sets", mmHead + "1 1 2 3 10 1 4\n2 1 2 3 10 1 4\n", "", 10, "_diffrn_refln.diffrn_id", "2 data sets told apart by diffrn_id: 1 2", `such as "diffrn=1"`},
		{"no such data set", mmHead + "1 1 2 3 10 1 4\n", "diffrn=7", 0, "", `no data set "diffrn=7"; there is a (#1) _diffrn_refln`, "second block"},
		{"no such block", listHead + "1 2 3 10 1\n", "#2", 0, "", `no data set "#2"`, "pick a block code"},
		{"several lists", listHead + "1 2 3 10 1\n" + strings.Replace(listHead, "data_a", "data_b", 1) + "1 2 3 10 1\n", "", 0, "", "several reflection lists: a (#1) _refln (merged, 1 rows); b (#2)", `such as "#1"`},
		{"twins", "data_a\n_x_hkl_file\n;\n   1   0   0   10.00    1.00   1\n   1   0   0   10.00    1.00  -2\n;\n", "", 5, "_x_hkl_file", "twin components", "one component"},
		{"list in text", "data_a\n_x_hkl_file\n;\n   1   0   0   10.00    1.00\n   1   0   0   1,000    1.00\n;\n", "", 5, "_x_hkl_file", `"1,000", which is not a number`, "4 characters each"},
		{"list in text, short row", "data_a\n_x_hkl_file\n;\n1 0 0 10.00\n;\n", "", 4, "_x_hkl_file", "fit neither fixed columns nor five or six words", "4 characters each"},

		{"cell not complete", listHead + "1 2 3 10 1\n_cell_length_a 5\n", "", 9, "_cell_length_b", "not complete", "all six"},
		{"cell not a number", listHead + "1 2 3 10 1\n_cell_length_a 5A\n_cell_length_b 5\n", "", 9, "_cell_length_a", `"5A" is not a number`, "decimal digits"},
		{"cell that cannot be", listHead + "1 2 3 10 1\n_cell_length_a -5\n_cell_length_b 5\n_cell_length_c 5\n_cell_angle_alpha 90\n_cell_angle_beta 90\n_cell_angle_gamma 90\n", "", 9, "_cell", "the cell cannot be", "in the manifest"},
		{"group number", listHead + "1 2 3 10 1\n_space_group_IT_number 231\n", "", 9, "_space_group_IT_number", `"231"`, "1 to 230"},
		{"null operator", listHead + "1 2 3 10 1\nloop_ _space_group_symop_operation_xyz\nx,y,z ?\n", "", 10, "_space_group_symop_operation_xyz", "operator is null", "complete list"},
		{"wavelength", listHead + "1 2 3 10 1\n_diffrn_radiation_wavelength 0\n", "", 9, "_diffrn_radiation_wavelength", "not positive", "angstrom"},
		{"voltage", listHead + "1 2 3 10 1\n_diffrn_source_voltage -200\n", "", 9, "_diffrn_source_voltage", "not positive", "kilovolt"},
		{"temperature", listHead + "1 2 3 10 1\n_diffrn_ambient_temperature -173\n", "", 9, "_diffrn_ambient_temperature", "negative", "kelvin"},
		{"thickness", listHead + "1 2 3 10 1\n_refine_ls.sample_thickness thin\n", "", 9, "_refine_ls.sample_thickness", `"thin" is not a number`, "decimal digits"},
		{"half a transformation", strings.ReplaceAll(mmHead, "_diffrn_refln.diffrn_id\n", "") + "1 2 3 10 1 4\n_diffrn_reflns_transf_matrix_11 1\n", "", 9, "_diffrn_reflns_transf_matrix_12", "not complete", "all nine"},
	} {
		t.Run(tt.name, func(t *testing.T) {
			f, err := Parse("f.cif", []byte(tt.text))
			if err == nil {
				_, err = f.Read(Selection{Pick: tt.pick})
			}
			var e *Error
			if !errors.As(err, &e) {
				t.Fatalf("got %v, want an *Error", err)
			}
			if e.File != "f.cif" || e.Line != tt.line || e.Item != tt.item || !strings.Contains(e.Problem, tt.problem) || !strings.Contains(e.Remedy, tt.remedy) {
				t.Errorf("got %q\nline %d item %q problem %q remedy %q", err, e.Line, e.Item, e.Problem, e.Remedy)
			}
			if tt.line > 1 && e.Block != "a" {
				t.Errorf("block %q, want a", e.Block)
			}
		})
	}
}

func TestMissingFile(t *testing.T) {
	_, err := ReadFile("no-such-folder/no-such-file.cif")
	var e *Error
	if !errors.As(err, &e) || e.File != "no-such-folder/no-such-file.cif" || !strings.Contains(e.Problem, "cannot be read") || !strings.Contains(e.Remedy, "check the path") {
		t.Errorf("got %v", err)
	}
}

func TestFolderInsteadOfFile(t *testing.T) {
	dir := t.TempDir()
	_, err := ReadFile(dir)
	if err == nil || err.Error() != dir+": is a folder, not a file; name the file in it" {
		t.Errorf("got %v", err)
	}
}

// The kernel takes numbers from the bytes, the lexer everything else: both must say
// the same in the same place, wherever a value stands in a row.
func TestErrorTextIsWhole(t *testing.T) {
	_, err := Parse("tarn.cif", []byte(listHead+"1 2 3 10 1\n1 2 3 ten 1\n"))
	want := `tarn.cif:9: block a: _refln_intensity_meas: "ten" is not a number; write it in decimal digits, as 12.5 or 1.2e-3`
	if err == nil || err.Error() != want {
		t.Errorf("got  %v\nwant %s", err, want)
	}
}
