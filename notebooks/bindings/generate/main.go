// Command generate writes the interpreter's tables from directives.txt.
package main

import (
	"context"
	"flag"
	"fmt"
	"os"
	"path/filepath"

	"thinward/notebooks/bindings/table"
)

func main() {
	root := flag.String("root", ".", "the folder of go.mod")
	flag.Parse()
	if err := run(*root); err != nil {
		fmt.Fprintln(os.Stderr, "generate:", err)
		os.Exit(1)
	}
}

func run(root string) error {
	dir := filepath.Join(root, "notebooks", "bindings")
	text, err := os.ReadFile(filepath.Join(dir, "directives.txt"))
	if err != nil {
		return err
	}
	directives, err := table.ParseDirectives(string(text))
	if err != nil {
		return fmt.Errorf("directives.txt: %w", err)
	}
	files, err := table.Files(context.Background(), root, directives)
	if err != nil {
		return err
	}
	return table.Save(dir, files)
}
