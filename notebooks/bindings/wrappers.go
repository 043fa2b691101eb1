//go:build kernel

package bindings

import "github.com/cosmos72/gomacro/imports"

// DropWrappers empties the lists of promoted methods in the interpreter's own
// tables: the interpreter removes listed methods from a type and then counts the
// rest, which picks the wrong method on today's Go. Call it before the first
// interpreter is made.
func DropWrappers() {
	for path, p := range imports.Packages {
		p.Wrappers = nil
		imports.Packages[path] = p
	}
}
