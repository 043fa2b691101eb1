package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"thinward/analysis"
	"thinward/io/manifest"
	"thinward/io/result"
	"thinward/notebooks"
	"thinward/notebooks/kernel"
	"thinward/notebooks/page"
	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

// Names of the files beside those of session.
const (
	pageFile     = "report.html"
	notebookFile = "report.ipynb"
	logFile      = "report.log"
)

func (a *app) examine() *cobra.Command {
	var out string
	var set []string
	var timeout time.Duration
	c := &cobra.Command{
		Use:   "examine SERIES.toml",
		Short: "Make the report of a series: report.html, report.ipynb, pairs.csv, result.json",
		Long: `Makes the report of a series: report.html, report.ipynb, pairs.csv, result.json.

Values that --set changes:
  seed        of all random numbers; 0 takes that of the manifest
  axis        crystals, bracket, third, inverse-variance, thin, thick or mean: the
              strength that leads; empty takes crystals where there are two or more
  replicates  resamplings behind each interval (default 2000)
  long        true for more replicas behind the controls`,
		Example: `  thinward examine fixtures/tarn/series.toml
  thinward examine series.toml --out monday --set replicates=5000 --set long=true`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			values, err := parseSet(set)
			if err != nil {
				return err
			}
			if _, ok := values["series"]; ok {
				return usageError{errors.New("the series is the argument of examine, not a value to set")}
			}
			if err := checkSet(values); err != nil {
				return err
			}
			return a.report(c.Context(), args[0], out, values, timeout)
		},
	}
	c.Flags().StringVarP(&out, "out", "o", "out", "folder for the results; it is made if need be, and a report in it is replaced")
	c.Flags().StringArrayVar(&set, "set", nil, "value of a parameter of the notebook, as name=value; may be repeated")
	c.Flags().DurationVar(&timeout, "timeout", 30*time.Minute, "longest time of one cell; 0 means no limit")
	return c
}

func parseSet(set []string) (map[string]string, error) {
	values := map[string]string{}
	for _, s := range set {
		name, value, ok := strings.Cut(s, "=")
		if !ok || name == "" {
			return nil, usageError{fmt.Errorf("--set %s: write name=value", s)}
		}
		values[name] = value
	}
	return values, nil
}

// report runs the committed report notebook on one series.
func (a *app) report(ctx context.Context, series, out string, set map[string]string, timeout time.Duration) error {
	file, err := manifest.Read(series)
	if err != nil {
		return err
	}
	folder, err := openFolder(out)
	if err != nil {
		return err
	}
	defer folder.close()
	nb, err := committed(notebookFile)
	if err != nil {
		return err
	}
	if err := recordProvenance(folder, series, set); err != nil {
		return err
	}
	if !a.quiet {
		positions := 0
		for i := range file.Crystal {
			positions += len(file.Crystal[i].Position)
		}
		fmt.Fprintf(a.err, "thinward examine: %s   %s, %s\n", file.Title, plural(len(file.Crystal), "crystal"), plural(positions, "position"))
		fmt.Fprint(a.err, thinnestFirst(file))
	}
	m := a.meter()
	binary, err := a.ensure(ctx, m)
	if err != nil {
		return err
	}
	set["series"] = series
	res, failure := a.runNotebook(ctx, m, nb, binary, set, timeout, session.OutEnv+"="+folder.tmp)
	if res == nil {
		m.stop()
		return failure
	}
	stopped := ""
	if failure == nil {
		m.finish()
	} else {
		stopped = m.stop()
	}
	return a.deliver(folder, res, failure, stopped, pageOptions{
		title: file.Title, source: series, again: fmt.Sprintf("thinward examine %s%s", series, setText(set)), trusted: true, elapsed: res.Elapsed,
	})
}

func setText(set map[string]string) string {
	var b strings.Builder
	for _, name := range sortedKeys(set) {
		if name != "series" {
			fmt.Fprintf(&b, " --set %s=%s", name, set[name])
		}
	}
	return b.String()
}

func committed(name string) (*runner.Notebook, error) {
	data, err := notebooks.Files.ReadFile(name)
	if err != nil {
		return nil, insideError{err}
	}
	nb, err := runner.ParseNotebook(data)
	if err != nil {
		return nil, insideError{err}
	}
	return nb, nil
}

// manyPackages is the number of packages from which on a build is announced.
const manyPackages = 20

// ensure builds the kernel when it is missing.
func (a *app) ensure(ctx context.Context, m *meter) (string, error) {
	said := false
	path, err := kernel.Ensure(ctx, &kernel.Settings{Progress: func(p kernel.Progress) {
		m.at("kernel", 0, 0, p.Done, p.Total)
		if !said && p.Total > manyPackages {
			said = true
			m.note(fmt.Sprintf("The kernel is compiled, once for this version: %d packages, about a minute on two cores.", p.Total))
		}
	}})
	if err != nil {
		m.stop()
		var build *kernel.BuildError
		if errors.As(err, &build) {
			return "", insideError{err}
		}
		return "", err
	}
	m.finish()
	return path, nil
}

// runNotebook runs nb with progress. A nil result means that nothing ran.
func (a *app) runNotebook(ctx context.Context, m *meter, nb *runner.Notebook, binary string, set map[string]string, timeout time.Duration, env ...string) (*runner.Result, error) {
	if timeout == 0 {
		timeout = -1
	}
	return runner.Run(ctx, nb, &runner.Options{
		KernelPath: binary, Env: env, Set: set, Timeout: timeout, Kill: a.kill,
		Progress: func(e runner.Event) {
			switch {
			case e.Kind == runner.CellProgress && e.Progress != nil:
				m.at(e.Progress.Step, e.Progress.Index, e.Progress.Steps, e.Progress.Done, e.Progress.Total)
			case e.Kind == runner.CellStarted && m.step == "":
				m.at(startStep, 0, 0, e.Cell, e.Cells)
			}
		},
	})
}

type pageOptions struct {
	title, source, again string
	trusted              bool
	elapsed              time.Duration
}

// deliver writes notebook and page beside what the session saved, moves all into
// place, and says the answer. With a failure the page carries a banner and the
// numbers so far are kept.
func (a *app) deliver(f *folder, res *runner.Result, failure error, stopped string, o pageOptions) error {
	data, err := res.Notebook.Bytes()
	if err != nil {
		return insideError{err}
	}
	if err := f.write(notebookFile, data); err != nil {
		return err
	}
	var r *analysis.Result
	for _, name := range []string{session.ResultFile, session.PartialFile} {
		if data, err := f.read(name); err == nil {
			if r, err = result.Decode(data); err != nil {
				return insideError{err}
			}
			break
		}
	}
	if failure == nil {
		f.drop(session.PartialFile)
	}
	opts := page.Options{Title: o.title, Series: o.title, Source: o.source, Command: o.again, Version: session.Version(), Trusted: o.trusted}
	if failure != nil {
		opts.Failure = failureOf(failure, stopped)
		if err := f.write(logFile, []byte(failure.Error()+"\n")); err != nil {
			return err
		}
	}
	html, err := page.Build(res.Notebook, r, opts)
	if err != nil {
		return insideError{errors.Join(failure, err)}
	}
	if err := f.write(pageFile, html); err != nil {
		return err
	}
	if err := f.commit(failure != nil); err != nil {
		return err
	}
	if failure != nil {
		if stopped != "" {
			fmt.Fprintf(a.err, "stopped in step %s; what was done so far: %s\n", stopped, filepath.Join(f.out, pageFile))
		}
		return failure
	}
	if r != nil {
		fmt.Fprintln(a.out, a.plainText(oneLine(r)))
	}
	fmt.Fprintln(a.out, "Open", filepath.Join(f.out, pageFile))
	return nil
}

func failureOf(err error, step string) *page.Failure {
	f := &page.Failure{Step: step, Text: err.Error()}
	var cell *runner.CellError
	if errors.As(err, &cell) {
		f.Cell, f.Text, f.Remedy = cell.Cell, cell.Text, cell.Remedy
		if cell.Step != "" {
			f.Step = cell.Step
		}
	}
	return f
}

// oneLine is the last line a run prints: the answer, and how much speaks against it.
func oneLine(r *analysis.Result) string {
	against := tally(r) + "."
	for _, a := range r.Answers {
		if a.Section == "sizes" {
			return fmt.Sprintf("%s %s %s", a.Question, a.Text, against)
		}
	}
	return against
}

// tally counts the failing checks of the ledger and controls, where there are any, the
// cautions, and the warnings.
func tally(r *analysis.Result) string {
	fails, cautions := 0, 0
	for _, e := range r.Ledger {
		switch e.Verdict {
		case analysis.VerdictFails:
			fails++
		case analysis.VerdictCaution:
			cautions++
		}
	}
	var parts []string
	if fails > 0 {
		parts = append(parts, plural(fails, "failing check"))
	}
	if n := len(r.FailingControls()); n > 0 {
		parts = append(parts, plural(n, "failing control"))
	}
	parts = append(parts, plural(cautions, "caution"))
	if n := r.WarningCount(); n > 0 {
		parts = append(parts, plural(n, "warning"))
	}
	return strings.Join(parts, ", ")
}

// plainText replaces what a terminal without UTF-8 cannot show.
func (a *app) plainText(s string) string {
	if utf8Terminal() {
		return s
	}
	return strings.NewReplacer("\u2212", "-", "\u2013", "-", "\u00b1", "+-", "\u221e", "inf", "\u03bc", "mu", "\u00c5\u00b2", "A^2").Replace(s)
}

func plural(n int, word string) string {
	if n != 1 {
		word += "s"
	}
	return fmt.Sprintf("%d %s", n, word)
}

// readable reports a path that cannot be read as a fault of the request.
func readable(path string) error {
	if _, err := os.Stat(path); err != nil {
		var p *os.PathError
		if errors.As(err, &p) {
			return fmt.Errorf("%s: %v", path, p.Err)
		}
		return err
	}
	return nil
}
