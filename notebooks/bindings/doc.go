// Package bindings is the list of what a cell can import: our packages, and of
// third parties' what the notebooks use. The tables that make them known to the
// interpreter are the packages below tables, one for each; they are compiled
// under the build tag kernel only, so that the command does not link them.
//
// directives.txt says what is bound; go generate writes the tables and list.go.
// It is not for listing packages by hand.
package bindings

//go:generate go run ./generate -root ../..
