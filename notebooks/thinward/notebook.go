package main

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"thinward/notebooks/page"
	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

func (a *app) notebook() *cobra.Command {
	var out string
	var set []string
	var timeout time.Duration
	var trust, shell bool
	c := &cobra.Command{
		Use:   "run NOTEBOOK",
		Short: "Run a notebook without a Jupyter server",
		Long: `Runs the cells of a notebook in order, stops at the first that fails, and writes
the executed notebook and a page of it. NOTEBOOK is a file or the name of one
of the notebooks that come with thinward. A notebook runs code: one that did not
come with thinward runs only with --trust.`,
		Example: `  thinward run 01-intake.ipynb --set series=series.toml
  thinward run mine.ipynb --trust --out mine-executed.ipynb`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			values, err := parseSet(set)
			if err != nil {
				return err
			}
			nb, own, err := openNotebook(args[0])
			if err != nil {
				return err
			}
			if !own && !trust {
				return usageError{fmt.Errorf("%s did not come with thinward and runs code: read it, then give --trust", args[0])}
			}
			if out == "" {
				out = strings.TrimSuffix(filepath.Base(args[0]), ".ipynb") + "-executed.ipynb"
			}
			m := a.meter()
			binary, err := a.ensure(c.Context(), m)
			if err != nil {
				return err
			}
			limit := timeout
			if limit == 0 {
				limit = -1
			}
			res, failure := runner.Run(c.Context(), nb, &runner.Options{
				KernelPath: binary, Set: values, Timeout: limit, AllowShell: shell, Kill: a.kill,
				Progress: func(e runner.Event) {
					if e.Kind == runner.CellStarted {
						m.at("cells", 0, 0, e.Cell, e.Cells)
					}
				},
			})
			m.finish()
			if res == nil {
				return failure
			}
			data, err := res.Notebook.Bytes()
			if err != nil {
				return insideError{err}
			}
			opts := page.Options{Source: args[0], Command: "thinward run " + args[0] + setText(values), Version: session.Version(), Trusted: own}
			if failure != nil {
				opts.Failure = failureOf(failure, "")
			}
			html, err := page.Build(res.Notebook, nil, opts)
			if err != nil {
				return insideError{err}
			}
			target := strings.TrimSuffix(out, ".ipynb") + ".html"
			for _, f := range []struct {
				path string
				data []byte
			}{{out, data}, {target, html}} {
				if err := replaceFile(f.path, f.data); err != nil {
					return err
				}
			}
			if failure != nil {
				return failure
			}
			fmt.Fprintf(a.out, "%d cells ran. Open %s\n", res.Ran, target)
			return nil
		},
	}
	c.Flags().StringVarP(&out, "out", "o", "", "executed notebook (default: NOTEBOOK-executed.ipynb here); the page lies beside it")
	c.Flags().StringArrayVar(&set, "set", nil, "value of a parameter of the notebook, as name=value; may be repeated")
	c.Flags().DurationVar(&timeout, "timeout", 30*time.Minute, "longest time of one cell; 0 means no limit")
	c.Flags().BoolVar(&trust, "trust", false, "run a notebook that did not come with thinward")
	c.Flags().BoolVar(&shell, "allow-shell", false, "let cells run lines that begin with $")
	return c
}

// openNotebook reads a file, or else a notebook that comes with thinward; own
// says that the bytes are those of ours.
func openNotebook(name string) (nb *runner.Notebook, own bool, err error) {
	data, err := os.ReadFile(name)
	committedName := filepath.Base(name)
	if !strings.HasSuffix(committedName, ".ipynb") {
		committedName += ".ipynb"
	}
	ours, known := ownNotebook(committedName)
	if errors.Is(err, os.ErrNotExist) && known && filepath.Base(name) == name {
		data, err = ours, nil
	}
	if err != nil {
		return nil, false, fmt.Errorf("%s: cannot be read; the notebooks that come with thinward are %s", name, strings.Join(ownNames(), ", "))
	}
	nb, err = runner.ParseNotebook(data)
	if err != nil {
		return nil, false, fmt.Errorf("%s: %w", name, err)
	}
	return nb, known && string(data) == string(ours), nil
}

// replaceFile writes beside and renames.
func replaceFile(path string, data []byte) error {
	f, err := os.CreateTemp(filepath.Dir(path), ".thinward-*")
	if err != nil {
		return fmt.Errorf("%s cannot be written: %w", path, err)
	}
	defer os.Remove(f.Name())
	if _, err := f.Write(data); err != nil {
		f.Close()
		return err
	}
	if err := errors.Join(f.Chmod(0o644), f.Close()); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}
