package docs_test

import (
	"fmt"
	"os"
	"path/filepath"

	"thinward/notebooks/kernel/docs"
)

func ExampleExtract() {
	dir, err := os.MkdirTemp("", "")
	if err != nil {
		fmt.Println(err)
		return
	}
	defer os.RemoveAll(dir)
	source := "package wide\n\n// Len counts points.\nfunc Len(x []float64) int { return len(x) }\n"
	if err := os.WriteFile(filepath.Join(dir, "wide.go"), []byte(source), 0o600); err != nil {
		fmt.Println(err)
		return
	}
	p, err := docs.Extract("example/wide", dir, []string{"wide.go"})
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Println(p.Entries["Len"].Text())
	// Output:
	// func Len(x []float64) int
	//
	// Len counts points.
}
