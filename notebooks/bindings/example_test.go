package bindings_test

import (
	"fmt"

	"thinward/notebooks/bindings"
)

// What a cell can import.
func ExampleHolds() {
	for _, path := range []string{"thinward/notebooks/session", "gonum.org/v1/gonum/stat", "sort", "slices", "example.org/mine"} {
		fmt.Println(path, bindings.Holds(path))
	}
	// Output:
	// thinward/notebooks/session true
	// gonum.org/v1/gonum/stat true
	// sort true
	// slices false
	// example.org/mine false
}
