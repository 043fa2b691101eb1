package analysis_test

import (
	"go/ast"
	"go/format"
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
)

// rank orders our packages: one may import only what ranks lower. What is not
// listed may not exist.
var rank = map[string]int{
	"thinward/analysis/internal/parallel": 0,
	"thinward/analysis/internal/floatcmp": 0,
	"thinward/analysis/figure":            0,
	"thinward/analysis/crystal":           1,
	"thinward/analysis/electron":          2,
	"thinward/analysis/intensity":         2,
	"thinward/analysis/scaling":           3,
	"thinward/analysis/difference":        3,
	"thinward/analysis/resample":          4,
	"thinward/analysis/curve":             5,
	"thinward/analysis/size":              6,
	"thinward/analysis/evidence":          7,
	"thinward/analysis/pool":              7,
	"thinward/analysis/simulate":          8,
	"thinward/analysis":                   9,
	"thinward/io/internal/text":           10,
	"thinward/io/cif":                     11,
	"thinward/io/delimited":               11,
	"thinward/io/manifest":                12,
	"thinward/io/result":                  12,
	"thinward/notebooks":                  0,
	"thinward/notebooks/session":          20,
	"thinward/notebooks/runner":           22,
	"thinward/notebooks/kernel":           21,
	"thinward/notebooks/page":             23,
	"thinward/notebooks/thinward":         30,
}

// elsewhere are packages of tools and tables that nothing of the above imports
// except as those who run or build the kernel need them.
var elsewhere = []string{"thinward/notebooks/bindings", "thinward/notebooks/kernel/", "thinward/notebooks/runner/", "thinward/notebooks/tests"}

func module(t *testing.T) string {
	t.Helper()
	dir, err := filepath.Abs("..")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(filepath.Join(dir, "go.mod")); err != nil {
		t.Fatal(err)
	}
	return dir
}

// goFiles calls f for every Go file of the module.
func goFiles(t *testing.T, f func(rel string, src []byte, file *ast.File, set *token.FileSet)) {
	t.Helper()
	root := module(t)
	n := 0
	err := filepath.WalkDir(root, func(path string, d fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if d.IsDir() {
			if name := d.Name(); name == "testdata" || name == "zz_try" || strings.HasPrefix(name, ".") && path != root {
				return filepath.SkipDir
			}
			return nil
		}
		if !strings.HasSuffix(path, ".go") {
			return nil
		}
		src, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		set := token.NewFileSet()
		file, err := parser.ParseFile(set, path, src, parser.ParseComments)
		if err != nil {
			return err
		}
		rel, err := filepath.Rel(root, path)
		if err != nil {
			return err
		}
		n++
		f(filepath.ToSlash(rel), src, file, set)
		return nil
	})
	if err != nil {
		t.Fatal(err)
	}
	if n < 100 {
		t.Fatalf("only %d Go files were found: the walk is broken", n)
	}
}

func TestLayers(t *testing.T) {
	goFiles(t, func(rel string, _ []byte, file *ast.File, _ *token.FileSet) {
		if strings.HasSuffix(rel, "_test.go") {
			return
		}
		from := "thinward/" + filepath.ToSlash(filepath.Dir(rel))
		if other(from) {
			return
		}
		own, known := rank[from]
		if !known {
			t.Errorf("%s: package %s has no place in the layers", rel, from)
			return
		}
		for _, spec := range file.Imports {
			path, _ := strconv.Unquote(spec.Path.Value)
			if !strings.HasPrefix(path, "thinward/") {
				continue
			}
			if other(path) && from != "thinward/notebooks/runner" && from != "thinward/notebooks/kernel" {
				t.Errorf("%s imports %s, which only tools may", rel, path)
				continue
			}
			if r, ok := rank[path]; ok && r >= own {
				t.Errorf("%s: %s (layer %d) imports %s (layer %d)", rel, from, own, path, r)
			}
			if from == "thinward/analysis/figure" {
				t.Errorf("%s: figure imports %s, and may import none of ours", rel, path)
			}
		}
	})
}

func other(path string) bool {
	for _, p := range elsewhere {
		if strings.HasPrefix(path, p) {
			return true
		}
	}
	return false
}

// TestGoroutinesStartInOnePlace: a panic in a goroutine ends the kernel, so
// analysis and io start them where it is caught.
func TestGoroutinesStartInOnePlace(t *testing.T) {
	allowed := map[string]bool{"analysis/internal/parallel/parallel.go": true, "io/internal/text/source.go": true}
	goFiles(t, func(rel string, _ []byte, file *ast.File, set *token.FileSet) {
		if strings.HasSuffix(rel, "_test.go") || allowed[rel] || !strings.HasPrefix(rel, "analysis/") && !strings.HasPrefix(rel, "io/") {
			return
		}
		ast.Inspect(file, func(n ast.Node) bool {
			if g, ok := n.(*ast.GoStmt); ok {
				t.Errorf("%s:%d: a goroutine starts here", rel, set.Position(g.Pos()).Line)
			}
			return true
		})
	})
}

// TestNoComparisonThatNaNPasses: |got-want| > tol is false for NaN.
func TestNoComparisonThatNaNPasses(t *testing.T) {
	bad := regexp.MustCompile(`math\.Abs\([^)]*\)\s*>=?\s*(tol|eps|1e-|[0-9.]+e-)`)
	goFiles(t, func(rel string, src []byte, _ *ast.File, _ *token.FileSet) {
		if !strings.HasSuffix(rel, "_test.go") || strings.HasSuffix(rel, "layers_test.go") {
			return
		}
		for i, line := range strings.Split(string(src), "\n") {
			if bad.MatchString(line) {
				t.Errorf("%s:%d: use floatcmp: %s", rel, i+1, strings.TrimSpace(line))
			}
		}
	})
}

func TestFormatted(t *testing.T) {
	goFiles(t, func(rel string, src []byte, _ *ast.File, _ *token.FileSet) {
		out, err := format.Source(src)
		if err != nil {
			t.Errorf("%s: %v", rel, err)
		} else if string(out) != string(src) {
			t.Errorf("%s is not gofmt'd", rel)
		}
	})
}

// TestTopLevel: the top level of the module is fixed.
func TestTopLevel(t *testing.T) {
	allowed := map[string]bool{
		"analysis": true, "io": true, "notebooks": true, "fixtures": true,
		"go.mod": true, "go.sum": true, "README.md": true, "DEVELOPERS.md": true, "LICENSE": true, "out": true,
	}
	entries, err := os.ReadDir(module(t))
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if !strings.HasPrefix(e.Name(), ".") && !allowed[e.Name()] {
			t.Errorf("%s does not belong to the top level", e.Name())
		}
	}
}
