package bindings

import "slices"

// Bound lists the packages, ours and third parties', that a cell can import,
// sorted.
func Bound() []string { return slices.Clone(bound[:]) }

// Standard lists the packages of the standard library that a cell can import,
// sorted. Most of them are as in Go 1.13.
func Standard() []string { return slices.Clone(standard[:]) }

// Holds tells whether a cell can import the package. Besides Bound and Standard
// these are display, by which the kernel shows values, and unsafe.
func Holds(path string) bool {
	if path == "display" || path == "unsafe" {
		return true
	}
	_, ours := slices.BinarySearch(bound[:], path)
	_, std := slices.BinarySearch(standard[:], path)
	return ours || std
}
