package main

import (
	"fmt"
	"strings"

	"thinward/analysis"
	"thinward/io/manifest"
)

// thinnestFirst says in which order the positions of each crystal are compared, a line
// for each order that there is.
func thinnestFirst(f *manifest.File) string {
	var said sayings
	for i := range f.Crystal {
		said.add("", f.Crystal[i].Name, "thinnest first: "+f.Crystal[i].ThinnestFirst())
	}
	var b strings.Builder
	for k := range said {
		fmt.Fprintln(&b, said[k].line())
	}
	return b.String()
}

// checkSet refuses values of --set that would be refused only after the series was read.
func checkSet(values map[string]string) error {
	if err := (&analysis.Settings{Axis: values["axis"]}).CheckAxis(); err != nil {
		return usageError{fmt.Errorf("--set %w", err)}
	}
	return nil
}
