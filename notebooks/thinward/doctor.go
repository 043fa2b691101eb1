package main

import (
	"context"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"thinward/notebooks/kernel"
	"thinward/notebooks/runner"
)

func (a *app) doctor() *cobra.Command {
	return &cobra.Command{
		Use:   "doctor",
		Short: "Check Go, kernel, Jupyter, browser and write access, and run one cell",
		Long: `Checks what thinward needs on this machine and says what is missing. FAIL is
needed, none is only wanted for Jupyter pages and for looking at reports.`,
		Example: "  thinward doctor",
		Args:    cobra.NoArgs,
		RunE: func(c *cobra.Command, _ []string) error {
			ok := true
			say := func(good, needed bool, what, detail string) {
				word := "ok  "
				switch {
				case !good && needed:
					word, ok = "FAIL", false
				case !good:
					word = "none"
				}
				fmt.Fprintf(a.out, "%s  %-10s %s\n", word, what, detail)
			}
			version, err := exec.CommandContext(c.Context(), "go", "version").Output()
			say(err == nil, true, "go", firstLine(string(version), err))
			binary, err := kernel.Ensure(c.Context(), nil)
			say(err == nil, true, "kernel", firstLine(binary, err))
			if err == nil {
				begin := time.Now()
				shown, err := oneCell(c.Context(), binary)
				say(err == nil, true, "one cell", firstLine(fmt.Sprintf("%s in %.1f s", shown, time.Since(begin).Seconds()), err))
			}
			for _, p := range [][]string{{"jupyter", "jupyter", "jupyter-notebook"}, {"browser", "chromium", "chromium-browser", "google-chrome", "firefox"}} {
				path := ""
				for _, name := range p[1:] {
					if found, err := exec.LookPath(name); err == nil {
						path = found
						break
					}
				}
				if path == "" {
					say(false, false, p[0], "not found; only needed to look at notebooks and pages")
				} else {
					say(true, false, p[0], path)
				}
			}
			dir, err := os.MkdirTemp(".", ".thinward-doctor-*")
			if err == nil {
				err = os.Remove(dir)
			}
			here, _ := filepath.Abs(".")
			say(err == nil, true, "writing", firstLine(here, err))
			if !ok {
				return fmt.Errorf("something that is needed does not work")
			}
			return nil
		},
	}
}

func firstLine(s string, err error) string {
	if err != nil {
		s = err.Error()
	}
	s, _, _ = strings.Cut(strings.TrimSpace(s), "\n")
	return s
}

// oneCell runs one cell in a fresh kernel and gives what it shows.
func oneCell(ctx context.Context, binary string) (string, error) {
	nb := &runner.Notebook{Cells: []*runner.Cell{{ID: "a", Type: "code", Source: "import \"thinward/notebooks/session\"\nsession.Version()"}}, Minor: 5}
	res, err := runner.Run(ctx, nb, &runner.Options{KernelPath: binary, Timeout: time.Minute})
	if err != nil {
		return "", err
	}
	for _, o := range res.Notebook.Cells[0].Outputs {
		if t := o.PlainText(); t != "" {
			return "version " + strings.TrimSpace(t), nil
		}
	}
	return "", fmt.Errorf("the cell showed nothing")
}
