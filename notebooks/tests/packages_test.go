package tests

import (
	"context"
	"fmt"
	"go/ast"
	gobuild "go/build"
	"go/parser"
	"go/token"
	"go/types"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"thinward/notebooks/bindings/load"
)

// TestEveryPackageHasAnExample wants one that runs: an Example function whose
// comment says what it prints. Commands, tables and fixtures have none to give.
func TestEveryPackageHasAnExample(t *testing.T) {
	set, err := load.Packages(context.Background(), root, "./...")
	if err != nil {
		t.Fatal(err)
	}
	n := 0
	for _, path := range set.Named() {
		if set.Name(path) == "main" || path == "thinward/notebooks/tests" || path == "thinward/notebooks/bindings/fixture" {
			continue
		}
		n++
		dir, _ := set.Sources(path)
		if !hasExample(t, dir) {
			t.Errorf("%s has no Example with an output comment", path)
		}
	}
	if n < 25 {
		t.Errorf("only %d packages were looked at", n)
	}
}

func hasExample(t *testing.T, dir string) bool {
	t.Helper()
	tests, err := filepath.Glob(filepath.Join(dir, "*_test.go"))
	if err != nil {
		t.Fatal(err)
	}
	for _, name := range tests {
		file, err := parser.ParseFile(token.NewFileSet(), name, nil, parser.ParseComments)
		if err != nil {
			t.Fatal(err)
		}
		for _, d := range file.Decls {
			f, ok := d.(*ast.FuncDecl)
			if !ok || f.Recv != nil || !strings.HasPrefix(f.Name.Name, "Example") {
				continue
			}
			for _, c := range file.Comments {
				if c.Pos() > f.Pos() && c.End() < f.End() && strings.HasPrefix(c.Text(), "Output:") {
					return true
				}
			}
		}
	}
	return false
}

// TestTypesElsewhere checks the types of our sources as other systems choose them
// and as their word length makes them: a file that one system lacks, or a constant
// that does not fit an int of 32 bits. The packages of others are those of this
// machine; .ci/elsewhere compiles all.
func TestTypesElsewhere(t *testing.T) {
	set, err := load.Packages(context.Background(), root, "./...")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range [][2]string{{"windows", "amd64"}, {"darwin", "arm64"}, {"linux", "386"}} {
		t.Run(fmt.Sprint(c[0], "-", c[1]), func(t *testing.T) {
			choose := gobuild.Default
			choose.GOOS, choose.GOARCH, choose.CgoEnabled = c[0], c[1], false
			n := 0
			for _, path := range set.Named() {
				dir, _ := set.Sources(path)
				if dir == "" {
					continue
				}
				n += checkTypes(t, &choose, set, path, dir)
			}
			if n < 150 {
				t.Errorf("only %d files were checked", n)
			}
		})
	}
}

func checkTypes(t *testing.T, choose *gobuild.Context, set *load.Set, path, dir string) int {
	t.Helper()
	p, err := choose.ImportDir(dir, 0)
	if err != nil {
		t.Errorf("%s: %v", path, err)
		return 0
	}
	files := token.NewFileSet()
	var parsed []*ast.File
	for _, name := range p.GoFiles {
		f, err := parser.ParseFile(files, filepath.Join(dir, name), nil, parser.SkipObjectResolution)
		if err != nil {
			t.Error(err)
			return 0
		}
		parsed = append(parsed, f)
	}
	config := types.Config{Importer: set, Sizes: types.SizesFor("gc", choose.GOARCH), Error: func(err error) {
		// The bounds of an int are taken from this machine's package math.
		if !strings.Contains(err.Error(), "math.MaxInt (") && !strings.Contains(err.Error(), "math.MinInt (") {
			t.Errorf("%s: %v", path, err)
		}
	}}
	// Errors are told one by one.
	_, _ = config.Check(path, files, parsed, nil)
	return len(parsed)
}

// TestElsewhereScript keeps the script and the test above in
// step.
func TestElsewhereScript(t *testing.T) {
	text, err := os.ReadFile(filepath.Join(root, ".ci", "elsewhere"))
	if err != nil {
		t.Fatal(err)
	}
	for _, system := range []string{"windows/amd64", "darwin/arm64", "linux/386"} {
		if !strings.Contains(string(text), system) {
			t.Errorf(".ci/elsewhere leaves out %s", system)
		}
	}
}
