package tests

import (
	"context"
	"fmt"
	"os"
	"path/filepath"
	"sort"
	"testing"

	"thinward/analysis/simulate"
	"thinward/io/manifest"
	"thinward/notebooks"
	"thinward/notebooks/kernel"
	"thinward/notebooks/runner"
)

// kernelPath is the binary all tests run, root the folder of our go.mod, coarse
// the manifest of the demonstration to lower resolution, a third of its size, which
// all notebooks but the report run on to save time.
var kernelPath, root, coarse string

func TestMain(m *testing.M) {
	// Nothing here may need a network: what is not in the module cache is an error.
	os.Setenv("GOPROXY", "off")
	var err error
	if root, err = filepath.Abs(filepath.Join("..", "..")); err == nil {
		kernelPath, err = kernel.Ensure(context.Background(), nil)
	}
	// Only now: the flags are part of the key of the kernel, which is the same as that
	// of the other tests.
	os.Setenv("GOFLAGS", "-mod=readonly")
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	dir, err := os.MkdirTemp("", "thinward-coarse-*")
	if err == nil {
		plan := simulate.Tarn()
		plan.Title, plan.DMin = "Tarn peptide to lower resolution", 1.6
		coarse = filepath.Join(dir, "series.toml")
		err = manifest.Invent(context.Background(), plan, dir)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	status := m.Run()
	os.RemoveAll(dir)
	os.Exit(status)
}

// names lists the committed notebooks in order.
func names(t *testing.T) []string {
	t.Helper()
	entries, err := notebooks.Files.ReadDir(".")
	if err != nil {
		t.Fatal(err)
	}
	var list []string
	for _, e := range entries {
		list = append(list, e.Name())
	}
	sort.Strings(list)
	if len(list) != 8 {
		t.Fatalf("%d notebooks, want 8: %v", len(list), list)
	}
	return list
}

func open(t *testing.T, name string) *runner.Notebook {
	t.Helper()
	data, err := notebooks.Files.ReadFile(name)
	if err != nil {
		t.Fatal(err)
	}
	nb, err := runner.ParseNotebook(data)
	if err != nil {
		t.Fatal(err)
	}
	return nb
}

// missing skips a test for want of a program; where everything has to be there it
// fails.
func missing(t *testing.T, what string, err error) {
	t.Helper()
	if os.Getenv("THINWARD_NEED_ALL") != "" {
		t.Fatalf("%s is needed here: %v", what, err)
	}
	t.Skipf("%s is not installed: %v", what, err)
}
