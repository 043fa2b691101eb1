package table_test

import (
	"fmt"

	"thinward/notebooks/bindings/table"
)

// The file that says what cells can import.
func ExampleParseDirectives() {
	list, err := table.ParseDirectives(`
thinward/analysis/... *      # all that is exported
!thinward/analysis/internal
gonum.org/v1/gonum/stat
	Mean Variance
`)
	for _, d := range list {
		fmt.Println(d.Pattern, d.All, d.Skip, len(d.Names))
	}
	fmt.Println(err)
	// Output:
	// thinward/analysis/... true false 0
	// thinward/analysis/internal false true 0
	// gonum.org/v1/gonum/stat false false 2
	// <nil>
}
