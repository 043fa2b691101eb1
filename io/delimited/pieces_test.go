package delimited

import (
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
