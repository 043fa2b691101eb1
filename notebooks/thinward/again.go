package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"sort"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"thinward/analysis"
	"thinward/io/result"
	"thinward/notebooks/session"
)

// tolerance is the relative difference up to which two numbers count as the
// same: processors of two kinds round differently in the last digits.
const tolerance = 1e-9

// listed is how many differences are shown unless all are asked for.
const listed = 20

type againOptions struct {
	series     string
	trust, all bool
	timeout    time.Duration
}

func (a *app) again() *cobra.Command {
	var o againOptions
	c := &cobra.Command{
		Use:   "again DIR|FILE.zip",
		Short: "Run a finished report again and say whether every number comes out the same",
		Long: `Makes sure that manifest and inputs are those of the report, runs its notebook
again in a temporary folder, and compares every number and word of result.json
and pairs.csv. The exit status is 1 when any differs by more than 1e-9 of
itself. A report whose notebook is not the one that comes with thinward runs
the code of whoever wrote it: read it first, then give --trust.`,
		Example: `  thinward again out
  thinward again tarn.zip
  thinward again out --series elsewhere/series.toml --all`,
		Args: cobra.ExactArgs(1),
		RunE: func(c *cobra.Command, args []string) error {
			dir := args[0]
			if strings.EqualFold(filepath.Ext(dir), ".zip") {
				tmp, err := os.MkdirTemp("", "thinward-again-")
				if err != nil {
					return err
				}
				defer os.RemoveAll(tmp)
				if err := unpackBundle(dir, tmp); err != nil {
					return err
				}
				dir = filepath.Join(tmp, bundleReport)
				if o.series == "" {
					o.series = filepath.Join(tmp, bundleInputs, bundleManifest)
				}
			}
			return a.repeat(c.Context(), dir, o)
		},
	}
	c.Flags().StringVar(&o.series, "series", "", "where the manifest lies now, if it was moved")
	c.Flags().BoolVar(&o.trust, "trust", false, "run a notebook that did not come with thinward")
	c.Flags().BoolVar(&o.all, "all", false, "list every difference")
	c.Flags().DurationVar(&o.timeout, "timeout", 30*time.Minute, "longest time of one cell; 0 means no limit")
	return c
}

// repeat runs the report in dir again and compares.
func (a *app) repeat(ctx context.Context, dir string, o againOptions) error {
	old, err := openReport(dir)
	if err != nil {
		return err
	}
	series, _, err := old.source(o.series)
	if err != nil {
		return err
	}
	nb, own, err := old.code()
	if err != nil {
		return err
	}
	if !own && !o.trust {
		return usageError{fmt.Errorf("the notebook of this report is not the one that comes with this version of thinward, and runs code: read %s, then give --trust", filepath.Join(dir, notebookFile))}
	}
	tmp, err := os.MkdirTemp("", "thinward-again-")
	if err != nil {
		return err
	}
	defer os.RemoveAll(tmp)
	m := a.meter()
	binary, err := a.ensure(ctx, m)
	if err != nil {
		return err
	}
	set := map[string]string{}
	for name, value := range old.provenance.Set {
		set[name] = value
	}
	set["series"] = series
	if _, err := a.runNotebook(ctx, m, nb, binary, set, o.timeout, session.OutEnv+"="+tmp); err != nil {
		m.stop()
		return err
	}
	m.finish()
	fresh, err := openReport(tmp)
	if err != nil {
		return insideError{fmt.Errorf("the notebook ended well and left no numbers: %w", err)}
	}
	return a.verdict(old, fresh, o.all)
}

// verdict says whether two reports agree; it is an error when they do not.
func (a *app) verdict(old, fresh *report, all bool) error {
	renameInputs(old.result, fresh.result)
	c := result.Compare(old.result, fresh.result, tolerance)
	pairs, n, largest, err := comparePairFiles(old.dir, fresh.dir, all)
	if err != nil {
		return err
	}
	if v, w := versionOf(old.result), versionOf(fresh.result); v != w {
		fmt.Fprintf(a.out, "The report was made with thinward %s, this is %s.\n", v, w)
	}
	if len(c.Differences)+n == 0 {
		if c.Identical && largest == 0 {
			fmt.Fprintf(a.out, "Identical: %d numbers, %d words, and every pair.\n", c.Numbers, c.Words)
			return nil
		}
		fmt.Fprintf(a.out, "The same: %d numbers, %d words and every pair agree to %.1g of themselves or better.\n", c.Numbers, c.Words, max(c.Largest, largest))
		return nil
	}
	list := append(c.Differences, pairs...)
	printDifferences(a, list, len(c.Differences)+n, all)
	return fmt.Errorf("not what the report recorded: %s", plural(len(c.Differences)+n, "difference"))
}

func versionOf(r *analysis.Result) string {
	if r.Environment == nil {
		return "of an unknown version"
	}
	return r.Environment.Thinward
}

func printDifferences(a *app, list []result.Difference, n int, all bool) {
	sort.SliceStable(list, func(i, j int) bool { return list[i].Number && !list[j].Number })
	for i := range list {
		if i == listed && !all {
			break
		}
		fmt.Fprintln(a.out, list[i].String())
	}
	if !all && n > listed {
		fmt.Fprintf(a.out, "... and %d more; --all lists them\n", n-listed)
	}
}

// renameInputs gives the inputs of a fresh run the paths that the old one had
// where their bytes are the same: a bundle keeps files at places of its own.
func renameInputs(old, fresh *analysis.Result) {
	if len(old.Inputs) != len(fresh.Inputs) {
		return
	}
	for i := range old.Inputs {
		if old.Inputs[i].SHA256 == fresh.Inputs[i].SHA256 {
			fresh.Inputs[i].Path = old.Inputs[i].Path
		}
	}
}

func comparePairFiles(old, fresh string, all bool) ([]result.Difference, int, float64, error) {
	a, err := readPairs(old)
	if err != nil {
		return nil, 0, 0, err
	}
	b, err := readPairs(fresh)
	if err != nil {
		return nil, 0, 0, err
	}
	most := listed
	if all {
		most = 0
	}
	list, n, largest := result.ComparePairs(a, b, tolerance, most)
	return list, n, largest, nil
}

func readPairs(dir string) ([]analysis.PairRow, error) {
	path := filepath.Join(dir, session.PairsFile)
	f, err := os.Open(path)
	if errors.Is(err, os.ErrNotExist) {
		return nil, fmt.Errorf("%s: the report has no pairs", path)
	}
	if err != nil {
		return nil, err
	}
	defer f.Close()
	rows, err := result.ReadPairs(f)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return rows, nil
}
