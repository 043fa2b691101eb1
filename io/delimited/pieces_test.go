package delimited

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/io/internal/text"
)

// A text that arrives in pieces, cut anywhere, gives what it gives in one.
func TestPieces(t *testing.T) {
	for _, s := range []string{"1 2 3 10.5 2\n-4 5 6 -1200 30", "1 2 3 10.5 2\r\n# x\r\n\r\n-4 5 6 -1200 30\r\n", "1 2 3 10.5 2\r-4 5 6 ? 30\r", "1;2;3;4;5\n1;2;3;4\n", "\xef\xbb\xbf1,2,3,4,5\n1,2,3,4,0\n0 0 0\n"} {
		want, wantErr := Parse("f.txt", []byte(s), &Options{Order: five})
		for step := 1; step < 12; step++ {
			got, err := read("f.txt", text.InPieces("f.txt", []byte(s), step), &Options{Order: five})
			if (err == nil) != (wantErr == nil) || err != nil && err.Error() != wantErr.Error() {
				t.Fatalf("%q in pieces of %d: got %v, want %v", s, step, err, wantErr)
			}
			if diff := cmp.Diff(want, got); diff != "" {
				t.Fatalf("%q in pieces of %d: %s", s, step, diff)
			}
		}
	}
}

// Rows of all kinds of columns and forms of values, some of them bad, read the same on
// the fast path and, in pieces too short for it, field by field.
func TestFastPathReadsAsFields(t *testing.T) {
	r := rand.New(rand.NewPCG(23, 24))
	names := append(five[:5:5], "phi", "frame", "partiality", "skip", "skip")
	indices := []string{"1", "-12", "7", "+3", "2.0", "?", "00012", "32767"}
	numbers := []string{"1.5", "-1234.567", "12345678", "123456789.25", "1e3", "-1.5E-2", ".5", "7.", "?", ".", "nan", "+4", "-0"}
	words := []string{"a", "#b", "\"c\"", "longer than seven", "\xb5", "5", "!"}
	for range 600 {
		delimiter := []byte{' ', ',', ';', '\t'}[r.IntN(4)]
		order := append([]string(nil), names[:5+r.IntN(6)]...)
		r.Shuffle(len(order), func(i, j int) { order[i], order[j] = order[j], order[i] })
		var b strings.Builder
		for range 1 + r.IntN(20) {
			for j, name := range order {
				from := numbers
				switch name {
				case "h", "k", "l":
					from = indices
				case "frame":
					from = indices[5:]
				case "skip":
					from = words
				}
				if j > 0 {
					b.WriteByte(delimiter)
				}
				b.WriteString([]string{"", "", " "}[r.IntN(3)])
				word := from[r.IntN(len(from))]
				if delimiter == ' ' {
					word = strings.ReplaceAll(word, " ", "_")
				}
				b.WriteString(word)
			}
			if r.IntN(150) == 0 {
				b.WriteString(" 9") // a field too many
			}
			b.WriteString([]string{"\n", "\n", " \n", "\r\n", "\r", "\n# x\n", "\n\n"}[r.IntN(7)])
		}
		o := &Options{Order: order, Delimiter: delimiter}
		want, wantErr := Parse("f.txt", []byte(b.String()), o)
		got, err := read("f.txt", text.InPieces("f.txt", []byte(b.String()), 5), o)
		if fmt.Sprint(err) != fmt.Sprint(wantErr) {
			t.Fatalf("%q: got %v, want %v", b.String(), err, wantErr)
		}
		if diff := cmp.Diff(want, got); diff != "" {
			t.Fatalf("%q: %s", b.String(), diff)
		}
	}
}
