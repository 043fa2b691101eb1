// Package table writes the interpreter's tables: for each package that a cell may
// import, a Go package whose init registers the exported names.
//
// A table never fills Wrappers, the interpreter's list of promoted methods: the
// interpreter removes listed methods from a type and then counts the rest, which
// picks wrong methods on today's Go. Generic functions and types cannot be bound;
// they, deprecated names and what else is left out are listed at the end of each
// table. Methods with a pointer receiver on a named number or text are in the
// table and still cannot be called: the interpreter keeps such values where they
// have no address. The package is not needed to run a notebook.
package table
