package runner

import (
	"context"
	"fmt"
	"os"
	"strings"
	"testing"
	"time"

	"thinward/notebooks/kernel"
)

// kernelPath is the binary all tests run, from the cache it shares with the
// command.
var kernelPath string

func TestMain(m *testing.M) {
	said := false
	path, err := kernel.Ensure(context.Background(), &kernel.Settings{Progress: func(p kernel.Progress) {
		if !said && p.Total > 50 {
			said = true
			fmt.Fprintf(os.Stderr, "building the kernel, %d packages: about a minute on two cores\n", p.Total)
		}
	}})
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	kernelPath = path
	os.Exit(m.Run())
}

// code makes a notebook of code cells.
func code(cells ...string) *Notebook {
	nb := &Notebook{Minor: 5}
	for i, c := range cells {
		nb.Cells = append(nb.Cells, &Cell{ID: fmt.Sprint("c", i), Type: "code", Source: c})
	}
	return nb
}

// do runs cells with a limit that no test should reach.
func do(t *testing.T, o Options, cells ...string) (*Result, error) {
	t.Helper()
	o.KernelPath = kernelPath
	if o.Timeout == 0 {
		o.Timeout = time.Minute
	}
	ctx, cancel := context.WithTimeout(context.Background(), 2*time.Minute)
	defer cancel()
	return Run(ctx, code(cells...), &o)
}

// must runs cells that end well and gives the plain text of each.
func must(t *testing.T, o Options, cells ...string) []string {
	t.Helper()
	res, err := do(t, o, cells...)
	if err != nil {
		t.Fatal(err)
	}
	return texts(res.Notebook)
}

// texts gives the plain texts of each code cell, joined.
func texts(nb *Notebook) []string {
	var out []string
	for _, c := range nb.Cells {
		var parts []string
		for i := range c.Outputs {
			parts = append(parts, c.Outputs[i].PlainText())
		}
		out = append(out, strings.Join(parts, "|"))
	}
	return out
}
