package manifest

import (
	"bytes"
	"compress/gzip"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

const cifHead = "data_a\nloop_\n_refln_index_h\n_refln_index_k\n_refln_index_l\n_refln_intensity_meas\n_refln_intensity_sigma\n"

func packed(t *testing.T, text string) string {
	t.Helper()
	var b bytes.Buffer
	z, err := gzip.NewWriterLevel(&b, gzip.NoCompression) // so that a cut says the same with any compressor
	if err != nil {
		t.Fatal(err)
	}
	if _, err := z.Write([]byte(text)); err != nil {
		t.Fatal(err)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

// Each bad file that a manifest may name, of either kind, stops the reading with an
// error that names file, line, item and remedy; the whole text is compared.
func TestBadFiles(t *testing.T) {
	list := cifHead + "1 2 3 10 1\n4 5 6 20 2\n"
	zip := packed(t, list)
	checksum := []byte(zip)
	checksum[len(checksum)-6] ^= 0xff
	for _, tt := range []struct{ name, text, want string }{
		// whole files
		{"empty.cif", "", `empty.cif:1: the file is empty; look whether it was cut off or never written`},
		{"utf16.cif", "\xff\xfed\x00a\x00", `utf16.cif:1: the file is UTF-16 text; save it as plain ASCII or UTF-8`},
		{"utf16be.txt", "\xfe\xff\x001\x00 ", `utf16be.txt:1: the file is UTF-16 text; save it as plain ASCII or UTF-8`},
		{"utf16plain.txt", "1\x00 \x002\x00", `utf16plain.txt:1: the file is UTF-16 text without a byte-order mark; save it as plain ASCII or UTF-8`},
		{"list.zip", "PK\x03\x04....", `list.zip:1: the file is a zip archive; unpack it first; only gzip is read directly`},
		{"list.bz2", "BZh91AY&SY", `list.bz2:1: the file is packed with bzip2; unpack it first; only gzip is read directly`},
		{"list.xz", "\xfd7zXZ\x00", `list.xz:1: the file is packed with xz; unpack it first; only gzip is read directly`},
		{"list.zst", "\x28\xb5\x2f\xfd", `list.zst:1: the file is packed with zstd; unpack it first; only gzip is read directly`},
		{"list.Z", "\x1f\x9d\x90", `list.Z:1: the file is packed with compress; unpack it first; only gzip is read directly`},
		{"list.pdf", "%PDF-1.7\n", `list.pdf:1: the file is a PDF document; supply the list itself as text`},
		{"list.html", "<!DOCTYPE html>\n<html>\n", `list.html:1: the file is a web page; download the list itself, not the page about it`},
		{"cut.cif.gz", zip[:len(zip)-20], `cut.cif.gz:9: the gzip data are cut off after 118 bytes of text; copy the file again`},
		{"tail.cif.gz", zip[:len(zip)-3], `tail.cif.gz:10: the gzip data are cut off after 125 bytes of text; copy the file again`},
		{"checksum.cif.gz", string(checksum), `checksum.cif.gz:10: the gzip data are damaged: the checksum of 125 bytes of text is wrong; copy the file again`},
		{"behind.cif.gz", zip + "rubbish", `behind.cif.gz:10: the gzip data end after 125 bytes of text and something else stands behind them; copy the file again, or unpack it and look at what is there`},
		{"header.gz", "\x1f\x8b\x07" + strings.Repeat("a", 20), `header.gz: the gzip header is damaged; copy the file again`},
		{"cut.txt.gz", packed(t, strings.Repeat("1 2 3 4 5 6 7\n", 9))[:20], `cut.txt.gz:1: the gzip data are cut off after 5 bytes of text; copy the file again`},
		// CIF
		{"nul.cif", "data_a\n_a 1\x002\n", `nul.cif:2: block a: _a: the file holds a NUL byte; the file is damaged or not text; copy it again`},
		{"high.cif", "data_a\n_a 1\xa02\n", `high.cif:2: block a: _a: a value or name holds the non-ASCII byte "\xa0"; write it with a backslash code such as \a, or begin the file with #\#CIF_2.0`},
		{"control.cif", "data_a\r\n_a 1\r\n_b 2\f\r\n", `control.cif:3: block a: _b: a value or name holds the control character "\f"; remove it; only blank, tab and line ends separate values`},
		{"control-cr.cif", "data_a\r_a 1\r_b 2\f\r", `control-cr.cif:3: block a: _b: a value or name holds the control character "\f"; remove it; only blank, tab and line ends separate values`},
		{"early.cif", "_cell_length_a 5\ndata_a\n", `early.cif:1: something stands before the first data_ heading: "_cell_length_a"; begin the file with a heading such as data_thin`},
		{"code.cif", "data_\n_a 1\n", `code.cif:1: a data_ heading has no block code; name the block, for example data_thin`},
		{"string.cif", "data_a\n_a 'open\n_b 1\n", `string.cif:2: block a: _a: a quoted string is not closed on its line; close it with ' followed by a blank, or use a text field for text of several lines`},
		{"field.cif", "data_a\n_a\n;open\n", `field.cif:3: block a: _a: a text field is not closed before the end of the file; close it with ; as the first character of a line`},
		{"field2.cif", "data_a\n_a\n;x\n;_b 1\n", `field2.cif:4: block a: _a: the ; that closes a text field is not followed by a blank; put the next word on a line of its own`},
		{"value.cif", "data_a\n_a 1 2\n", `value.cif:2: block a: a value stands without a data name: "2"; a data name takes one value; text of several words needs quotes`},
		{"novalue.cif", "data_a\n_a\n_b 1\n", `novalue.cif:2: block a: _a: the data name has no value; write ? for a value that is not known`},
		{"twice.cif", "data_a\n_a 1\n_A 2\n", `twice.cif:3: block a: _A: the data name stands twice in its block; remove or rename one of them; case does not count`},
		{"loop.cif", "data_a\nloop_\n_a _b\n1 2 3\n", `loop.cif:5: block a: _a: the loop holds 3 values for 2 names: the last row has 1 of 2; complete the last row, or look for a value with a blank in it that needs quotes`},
		{"bracket.cif", "data_a\n_a [1\n", `bracket.cif:2: block a: _a: an unquoted value begins with [; put the value in quotes`},
		{"reserved.cif", "data_a\n_a stop_\n", `reserved.cif:2: block a: _a: the reserved word stop_ has no use in CIF; put it in quotes if it is meant as a value`},
		{"frame.cif", "data_a\nsave_f\n_a 1\n", `frame.cif:4: block a: _a: the save frame f is not closed; close it with save_`},
		{"list2.cif", "#\\#CIF_2.0\ndata_a\n_a [1 2\n", `list2.cif:3: block a: _a: a CIF 2.0 list or table is not closed before the end of the file; close it with its bracket`},
		{"nolist.cif", "data_a\n_a 1\n", `nolist.cif: the file holds no reflection list; its blocks are a; name a file with a _diffrn_refln or _refln loop`},
		{"index.cif", cifHead + "1 2 3.5 10 1\n", `index.cif:8: block a: _refln_index_l: the index "3.5" is not a whole number; indices must be integers; look for a shifted column or a value too many in the rows before`},
		{"range.cif", cifHead + "1 2 40000 10 1\n", `range.cif:8: block a: _refln_index_l: the index 40000 is out of range; indices lie within -32767 and 32767; look for columns that touch`},
		{"comma.cif", cifHead + "1 2 3 10,5 1\n", `comma.cif:8: block a: _refln_intensity_meas: "10,5" is not a number; write a decimal point, not a comma`},
		{"nan.cif", cifHead + "1 2 3 NaN 1\n", `nan.cif:8: block a: _refln_intensity_meas: "NaN" is not a number; write ? for a value that is not known`},
		{"su.cif", cifHead + "1 2 3 1.5(2 1\n", `su.cif:8: block a: _refln_intensity_meas: "1.5(2" is not a number; a standard uncertainty is digits in parentheses behind the whole number, as in 12.3(4)`},
		{"row.cif", cifHead + "1 2 3 10 1\n1 2 3\n", `row.cif:10: block a: _refln_index_h: the loop holds 8 values for 5 names: the last row has 3 of 5; complete the last row, or look for a value with a blank in it that needs quotes`},
		{"nosigma.cif", strings.Replace(cifHead, "_refln_intensity_sigma\n", "", 1) + "1 2 3 10\n", `nosigma.cif:7: block a: _refln_intensity_meas: the list has no uncertainties: there is no sigma column and no value with its s.u. in parentheses; supply the column of standard uncertainties; none is made up here`},
		{"calc.cif", strings.Replace(cifHead, "_meas", "_calc", 1) + "1 2 3 10 1\n", `calc.cif:8: block a: _refln_index_h: the list has no measured intensity: its columns are _refln_index_h _refln_index_k _refln_index_l _refln_intensity_calc _refln_intensity_sigma; supply intensity_net, intensity_meas, F_squared_meas or F_meas with its uncertainty`},
		{"unusable.cif", cifHead + "1 2 3 10 0\n1 2 4 ? 1\n", `unusable.cif:8: block a: _refln_intensity_meas: no row of 2 can be used: sigma is zero or negative (1, first on line 8), intensity is null (1, first on line 9); look at the columns of the list with peek`},
		{"two.cif", list + strings.Replace(list, "data_a", "data_b", 1), `two.cif: the file holds several reflection lists: a (#1) _refln (merged, 2 rows); b (#2) _refln (merged, 2 rows); pick one by its block, such as "#1", or by block and category, such as "#1/_refln", as block in the manifest`},
		{"sets.cif", strings.Replace(cifHead, "_sigma\n", "_sigma\n_refln_scale_group_code\n", 1) + "1 2 3 10 1 1%1\n1 2 3 10 1 1%2\n", `sets.cif:9: block a: _refln_scale_group_code: the list holds 2 data sets told apart by scale-group set: 1 2; pick one, such as "%1", as block in the manifest`},
		{"twin.cif", "data_a\n_x_hkl_file\n;\n   1   0   0   10.00    1.00   1\n   1   0   0   10.00    1.00  -2\n;\n", `twin.cif:5: block a: _x_hkl_file: the list holds twin components that share one intensity (negative group number); supply the list of one component, separated before; an average would be wrong`},
		{"text.cif", "data_a\n_x_hkl_file\n;\n   1   0   0   10.00    1.00\n   1   0   0   1,000    1.00\n;\n", `text.cif:5: block a: _x_hkl_file: a row of the list inside the text field has the value "1,000", which is not a number; rows are h k l in 4 characters each, intensity and sigma in 8 each and perhaps a group in 4, or all are apart by blanks`},
		{"halfcell.cif", list + "_cell_length_a 5\n", `halfcell.cif:10: block a: _cell_length_b: the cell is not complete; give all six of a, b, c, alpha, beta and gamma`},
		{"number.cif", list + "_space_group_IT_number 231\n", `number.cif:10: block a: _space_group_IT_number: "231" is not a space-group number; give a whole number from 1 to 230`},
		{"wavelength.cif", list + "_diffrn_radiation_wavelength 0\n", `wavelength.cif:10: block a: _diffrn_radiation_wavelength: the wavelength is not positive; give it in angstrom`},
		// column text; the manifest declares h k l intensity sigma phi frame
		{"short.txt", "1 2 3 4 5 6 7\n1 2 3 4\n", `short.txt:2: the row has 4 fields where 7 are declared: "1 2 3 4"; complete the row, or correct the declared order`},
		{"long.txt", "1 2 3 4 5 6 7 8\n", `long.txt:1: the row has 8 fields where 7 are declared: "1 2 3 4 5 6 7 8"; declare columns that are not used as skip; decimal commas must become points`},
		{"crlf.txt", "1 2 3 4 5 6 7\r\n1 2 3 4 x 6 7\r\n", `crlf.txt:2: column 5 (sigma): "x" is not a number; write it in decimal digits, as 12.5 or 1.2e-3, or ? where it is not known; or correct the declared order`},
		{"cr.txt", "1 2 3 4 5 6 7\r1 2 3 4 x 6 7\r", `cr.txt:2: column 5 (sigma): "x" is not a number; write it in decimal digits, as 12.5 or 1.2e-3, or ? where it is not known; or correct the declared order`},
		{"nul.txt", "1 2 3 4 5 6 7\n1 2 3 4\x00 5 6 7\n", `nul.txt:2: the line holds a NUL byte; the file is damaged or not text; copy it again`},
		{"comma.txt", "1;2;3;4,5;5;6;7\n", `comma.txt:1: column 4 (intensity): "4,5" has a decimal comma; write decimal points; with commas one cannot tell a number from two fields`},
		{"index.txt", "1.5 2 3 4 5 6 7\n", `index.txt:1: column 1 (h): the index "1.5" is not a whole number; indices must be integers; correct the declared order, or give widths where columns touch`},
		{"range.txt", "1 2 40000 4 5 6 7\n", `range.txt:1: column 3 (l): the index 40000 is out of range; indices lie within -32767 and 32767; give widths where columns touch`},
		{"number.txt", "1 2 3 0x10 5 6 7\n", `number.txt:1: column 4 (intensity): "0x10" is not a number; write it in decimal digits, as 12.5 or 1.2e-3, or ? where it is not known; or correct the declared order`},
		{"frame.txt", "1 2 3 4 5 6 7.5\n", `frame.txt:1: column 7 (frame): the frame "7.5" is not a whole number; number the frames, or declare the column as skip`},
		{"before.txt", "1 2 3 4 5 6 -7\n", `before.txt:1: column 7 (frame): the frame -7 is negative; number the frames from 0 or 1, or declare the column as skip`},
		{"header.txt", "h k l sigma intensity phi frame\n1 2 3 4 5 6 7\n", `header.txt:1: column 4: the header calls the column "sigma", which contradicts the declared order; correct the order, or leave it out so that the header counts`},
		{"comments.txt", "# a\n! b\n", `comments.txt:3: the file holds no rows; look whether it was cut off`},
		{"unusable.txt", "1 2 3 4 0 6 7\n1 2 3 4 -1 6 7\n", `unusable.txt:3: no row of 2 can be used: sigma is zero or negative (2, first on line 1); look whether the columns are declared right`},
		{"end.txt", "0 0 0 0 0 0 0\n1 2 3 4 5 6 7\n", `end.txt:3: no row of 0 can be used; look whether the columns are declared right`},
	} {
		t.Run(tt.name, func(t *testing.T) {
			path := folder(t, strings.Replace(good, "thin.txt", tt.name, 1), map[string]string{tt.name: tt.text})
			if stop := readFails(t, path); stop != tt.want {
				t.Errorf("got\n%s\nwant\n%s", stop, tt.want)
			}
		})
	}
}

// readFails reads the manifest and returns the error without the folder.
func readFails(t *testing.T, path string) string {
	t.Helper()
	_, err := ReadSeries(path)
	if err == nil {
		t.Fatal("was read, want an error")
	}
	return strings.ReplaceAll(err.Error(), filepath.Dir(path)+string(filepath.Separator), "")
}

func TestFileThatIsAFolder(t *testing.T) {
	path := folder(t, strings.Replace(good, "thin.txt", "lists", 1), nil)
	if err := os.Mkdir(filepath.Join(filepath.Dir(path), "lists"), 0o700); err != nil {
		t.Fatal(err)
	}
	const want = `series.toml:15: crystal.position.files: lists is a folder, not a file; name the files in it`
	if stop := readFails(t, path); stop != want {
		t.Errorf("got %s", stop)
	}
}
