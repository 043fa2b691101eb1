//go:build !kernel

package bindings_test

import (
	"bytes"
	"context"
	"io/fs"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"runtime"
	"slices"
	"strings"
	"testing"

	"thinward/notebooks/bindings"
	"thinward/notebooks/bindings/table"
	"thinward/notebooks/kernel"
)

var madeFrom = regexp.MustCompile(`(?m)^// Standard library of (go[0-9.]+)\.$`)

// TestTablesAreFresh makes all tables anew and compares them with those in the
// tree. Tables of the standard library are compared under the Go version they
// were made with: another one exports other names.
func TestTablesAreFresh(t *testing.T) {
	text, err := os.ReadFile("directives.txt")
	if err != nil {
		t.Fatal(err)
	}
	directives, err := table.ParseDirectives(string(text))
	if err != nil {
		t.Fatal(err)
	}
	want, err := table.Files(context.Background(), filepath.Join("..", ".."), directives)
	if err != nil {
		t.Fatal(err)
	}
	fresh := t.TempDir()
	if err := table.Save(fresh, want); err != nil {
		t.Fatal(err)
	}
	for name := range want {
		made, err := os.ReadFile(filepath.Join(fresh, name))
		if err != nil {
			t.Fatal(err)
		}
		have, err := os.ReadFile(name)
		if err != nil {
			t.Errorf("%v; run go generate ./notebooks/bindings", err)
			continue
		}
		if m := madeFrom.FindSubmatch(have); m != nil && !strings.HasPrefix(runtime.Version()+".", string(m[1])+".") {
			t.Logf("%s was made with %s", name, m[1])
			continue
		}
		if !bytes.Equal(made, have) {
			t.Errorf("%s is stale; run go generate ./notebooks/bindings", name)
		}
	}
	err = filepath.WalkDir("tables", func(path string, d fs.DirEntry, err error) error {
		if err == nil && !d.IsDir() && want[filepath.ToSlash(path)] == nil {
			t.Errorf("%s is not made any more; run go generate ./notebooks/bindings", path)
		}
		return err
	})
	if err != nil {
		t.Error(err)
	}
}

// TestInTheInterpreter runs the tests that link the interpreter. They need the
// tag under which the tables are compiled; the first time, compiling the
// interpreter takes about 40 s on two cores. The kernel is made of the same
// packages; waiting for it keeps two builds from compiling them at once.
func TestInTheInterpreter(t *testing.T) {
	if _, err := kernel.Ensure(context.Background(), nil); err != nil {
		t.Fatal(err)
	}
	cmd := exec.Command("go", "test", "-tags", "kernel", "-v", ".")
	out, err := cmd.CombinedOutput()
	if err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	for _, name := range []string{"TestEveryMethodValue", "TestFixtureThroughTheInterpreter"} {
		if !bytes.Contains(out, []byte("--- PASS: "+name)) {
			t.Errorf("%s did not run:\n%s", name, out)
		}
	}
}

func TestHolds(t *testing.T) {
	for path, want := range map[string]bool{
		"thinward/notebooks/session": true, "fmt": true, "display": true, "gonum.org/v1/plot": true,
		"thinward/notebooks/runner": false, "example.org/x": false, "slices": false, "": false,
	} {
		if got := bindings.Holds(path); got != want {
			t.Errorf("Holds(%q) = %v", path, got)
		}
	}
	if !slices.IsSorted(bindings.Bound()) || !slices.IsSorted(bindings.Standard()) {
		t.Error("the lists are not sorted")
	}
	bindings.Bound()[0] = "changed"
	if bindings.Bound()[0] == "changed" {
		t.Error("Bound gives its own list away")
	}
}
