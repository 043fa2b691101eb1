package notebooks_test

import (
	"fmt"
	"io/fs"

	"thinward/notebooks"
)

// The notebooks are part of the command, which therefore needs no files of its own.
func Example() {
	names, err := fs.Glob(notebooks.Files, "*.ipynb")
	fmt.Println(len(names), names[0], err)
	// Output:
	// 8 01-intake.ipynb <nil>
}
