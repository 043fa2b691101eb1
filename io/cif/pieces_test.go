package cif

import (
	"fmt"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/io/internal/text"
)

// A text that arrives in pieces, cut anywhere, gives what it gives in one.
func TestPieces(t *testing.T) {
	texts := []string{
		listHead + "1 2 3 10 1\n4 5 6 -7.25 .5 # x\n'7' 8 9 ? 1\n10 11 12 1e2 3",
		mmHead + "1 1 2 3 10 1 4\nb -1 -2 -3 1e3 .5 5\n'b' 1 1 1 1 1 .\n_x 1\n" + cellLines,
		"data_a loop_ _refln_index_h _refln_index_k _refln_index_l _refln_intensity_meas _refln_intensity_sigma _refln_scale_group_code _refln_include_status 1 2 3 4 5 6%7 - 'a' 1 2 3 4 5 x",
		"data_a\r\n_t\r\n;a\r\nb\r\n;\r\n_c 'x' \r\n# end\x1a",
		"data_a _a 1\x1a", "\xef\xbb\xbf#\\#CIF_2.0\ndata_a _a \"\"\"x\ny\"\"\"\n",
	}
	for _, e := range grammarExamples {
		texts = append(texts, e.text)
	}
	for _, s := range texts {
		whole, want := Parse("f.cif", []byte(s))
		for step := 1; step < 12; step++ {
			f, err := parse("f.cif", text.InPieces("f.cif", []byte(s), step))
			if (err == nil) != (want == nil) || err != nil && err.Error() != want.Error() {
				t.Fatalf("%q in pieces of %d: got %v, want %v", s, step, err, want)
			}
			if err != nil {
				continue
			}
			if diff := cmp.Diff(shape(whole), shape(f)); diff != "" {
				t.Fatalf("%q in pieces of %d: %s", s, step, diff)
			}
		}
	}
}

// shape writes out all that a file holds.
func shape(f *File) string {
	var b strings.Builder
	for _, k := range f.Blocks {
		fmt.Fprintln(&b, k.Code, k.Line)
		for _, it := range k.Items {
			fmt.Fprintf(&b, "%s %d %q\n", it.Name, it.Value.Kind, it.Value.Text)
		}
		for _, l := range k.Loops {
			fmt.Fprintln(&b, l.Names, l.Rows)
			for _, s := range l.spans {
				fmt.Fprintf(&b, "%q ", f.value(s).Text)
			}
		}
	}
	for _, l := range f.lists {
		fmt.Fprintln(&b, l.rows, l.raw, l.scale.of, l.dataSet.of, l.status, l.nulls)
	}
	fmt.Fprintln(&b, f.Warnings)
	return b.String()
}

func TestGzipReadsAsPlain(t *testing.T) {
	plain := listHead + strings.Repeat("1 2 3 10.25 1\n-4 5 6 -7.5 .5\n", 60000)
	f, err := parse("f.cif", text.InPieces("f.cif", []byte(plain), 4099))
	if err != nil {
		t.Fatal(err)
	}
	r, err := f.Read(Selection{})
	if err != nil || r.Columns.Len() != 120000 || r.Columns.H[119999] != -4 || r.Columns.I[119998] != 10.25 {
		t.Errorf("%v", err)
	}
}
