package main

import (
	"io/fs"

	"thinward/notebooks"
)

// ownNotebook gives a notebook that comes with thinward.
func ownNotebook(name string) ([]byte, bool) {
	data, err := notebooks.Files.ReadFile(name)
	return data, err == nil
}

func ownNames() []string {
	names, _ := fs.Glob(notebooks.Files, "*.ipynb")
	return names
}
