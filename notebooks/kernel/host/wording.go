package host

import (
	"fmt"
	"sort"
	"strings"
)

// UnknownImport is the text for a package that the kernel does not hold;
// available are the paths to offer instead.
func UnknownImport(path string, available []string) string {
	return fmt.Sprintf("package %s is not in this kernel; available: %s, and the standard library up to Go 1.13",
		path, strings.Join(available, ", "))
}

// Members is the text that replaces the interpreter's when a value has no method
// or field of a name.
func Members(variable, typ, wanted string, members []string) string {
	s := append([]string(nil), members...)
	sort.Strings(s)
	if len(s) == 0 {
		return fmt.Sprintf("%s (%s) has no %s; it has no methods or fields", variable, typ, wanted)
	}
	return fmt.Sprintf("%s (%s) has no %s; it has %s", variable, typ, wanted, strings.Join(s, ", "))
}
