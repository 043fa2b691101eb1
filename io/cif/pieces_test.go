package cif

import (
	"fmt"
	"maps"
	"math/rand/v2"
	"slices"
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
		for step := 1; step < 12; step++ {
			samePieces(t, s, step)
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

// Lists of all kinds of columns and forms of values, one in ten of them bad, read the
// same on the fast path and, in pieces too short for it, through the lexer.
func TestFastPathReadsAsTheLexer(t *testing.T) {
	r := rand.New(rand.NewPCG(21, 22))
	indices := []string{"1", "-12", "0", "+3", "2.0", "'4'", "?", "00012", "-7\t", "32767"}
	numbers := []string{"1.5", "-1234.567", "12345678", "123456789.25", "1e3", "-1.5E-2", ".5", "7.", "?", ".", "'2.5'", "3(2)", "+4", "0.000123456789", "-0", "5 # five\n"}
	words := []string{"a", "abc", "longerthanseven", "?", ".", "'b c'", "a1", "o", "x", "-", "<"}
	frames := []string{"1", "12", "12%3", "13%4", "0", "?", "low", "99999999", "123456789"}
	bad := []string{"x", "1.2.3", "[", "1,5", "_n", "loop_", "\"", "data_", "\x01", "1e999"}
	kinds := map[string][]string{"index_h": indices, "index_k": indices, "index_l": indices, "intensity_net": numbers, "intensity_sigma": numbers, "intensity_meas": numbers,
		"pdbx_scan_angle": numbers, "pdbx_image_id": frames[:2], "scale_group_code": frames, "diffrn_id": words, "id": words, "include_status": words[7:], "counts_peak": numbers,
		"pdbx_I_plus": numbers, "pdbx_I_plus_sigma": numbers, "pdbx_I_minus": numbers, "pdbx_I_minus_sigma": numbers}
	items := slices.Sorted(maps.Keys(kinds))
	for range 400 {
		names := []string{"index_h", "index_k", "index_l"}
		for _, item := range items {
			if !slices.Contains(names, item) && r.IntN(2) == 0 {
				names = append(names, item)
			}
		}
		r.Shuffle(len(names), func(i, j int) { names[i], names[j] = names[j], names[i] })
		category := []string{"_diffrn_refln.", "_refln."}[r.IntN(2)]
		text, spoiled := loopOf(category+strings.Join(names, " "+category), ""), r.IntN(10) == 0
		for range r.IntN(30) {
			for _, item := range names {
				from := kinds[item]
				if spoiled && r.IntN(100) == 0 {
					from = bad
				}
				text += from[r.IntN(len(from))] + []string{" ", " ", " ", "\n", "  \r\n"}[r.IntN(5)]
			}
		}
		samePieces(t, text, 5)
	}
}

// samePieces compares what text gives as a whole and in pieces.
func samePieces(t *testing.T, s string, step int) {
	t.Helper()
	whole, want := Parse("f.cif", []byte(s))
	f, err := parse("f.cif", text.InPieces("f.cif", []byte(s), step))
	if (err == nil) != (want == nil) || err != nil && err.Error() != want.Error() {
		t.Fatalf("%q in pieces of %d: got %v, want %v", s, step, err, want)
	}
	if err != nil {
		return
	}
	if diff := cmp.Diff(shape(whole), shape(f)); diff != "" {
		t.Fatalf("%q in pieces of %d: %s", s, step, diff)
	}
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
