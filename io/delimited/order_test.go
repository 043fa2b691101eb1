package delimited

import (
	"testing"
)

// The plain symbol of an intensity names its column, the third of four hexagonal indices
// does not.
func TestSymbolOfIntensity(t *testing.T) {
	r, err := Parse("x", []byte("h k i l I sigma\n1 2 -3 4 10.5 2\n1 0 -1 4 7 1\n"), nil)
	if err != nil {
		t.Fatal(err)
	}
	if c := r.Columns; c.Len() != 2 || c.I[0] != 10.5 || c.Sigma[0] != 2 || c.L[0] != 4 || len(r.Warnings) != 1 {
		t.Errorf("%+v, %+v", r.Columns, r.Warnings)
	}
	if r, err = Parse("x", []byte("1 2 4 10.5 2\n"), &Options{Order: []string{"h", "k", "l", "I", "sigma"}}); err != nil || r.Columns.I[0] != 10.5 {
		t.Errorf("%+v, %v", r, err)
	}
}
