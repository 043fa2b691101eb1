package main

import (
	"context"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
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

// listed is how many differences of each step are shown unless all are asked for.
const listed = 3

// longWords is the length up to which the words of both sides are shown in the
// short list.
const longWords = 160

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
and pairs.csv. A table says step by step how many were compared, how many differ
and by how much. The exit status is 1 when any differs by more than 1e-9 of
itself. A report whose notebook is not the one that comes with thinward runs
the code of whoever wrote it: read it first, then give --trust.`,
		Example: `  thinward again out
  thinward again tarn.zip
  thinward again out --series elsewhere/series.toml --all
  thinward again out --json > verdict.json`,
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
	c.Flags().BoolVar(&a.json, "json", false, "print JSON, every difference included")
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

// repetition is what again --json prints.
type repetition struct {
	Report      string              `json:"report"`
	MadeWith    string              `json:"made_with"`
	This        string              `json:"this"`
	Identical   bool                `json:"identical"`
	Same        bool                `json:"same"`
	Tolerance   float64             `json:"tolerance"`
	Largest     float64             `json:"largest_relative"`
	Steps       []stepAgreement     `json:"steps"`
	Differences []result.Difference `json:"differences"`
}

// verdict says whether two reports agree; it is an error when they do not.
func (a *app) verdict(old, fresh *report, all bool) error {
	renameInputs(old.result, fresh.result)
	c := result.Compare(old.result, fresh.result, tolerance)
	pairs, err := comparePairFiles(old.dir, fresh.dir)
	if err != nil {
		return err
	}
	list := append(c.Differences, pairs.differences...)
	steps := agreements(old.result, fresh.result, c.Differences)
	steps = withPairs(steps, pairs)
	r := &repetition{Report: old.dir, MadeWith: versionOf(old.result), This: versionOf(fresh.result), Identical: c.Identical && pairs.largest == 0 && len(list) == 0,
		Same: len(list) == 0, Tolerance: tolerance, Largest: math.Max(c.Largest, pairs.largest), Steps: steps, Differences: list}
	if a.json {
		err = result.EncodeAny(a.out, *r)
	} else {
		err = a.printRepetition(r, c, all)
	}
	if err == nil && !r.Same {
		err = fmt.Errorf("not what the report recorded: %s", plural(len(list), "difference"))
	}
	return err
}

func (a *app) printRepetition(r *repetition, c *result.Comparison, all bool) error {
	if r.MadeWith != r.This {
		fmt.Fprintf(a.out, "The report was made with thinward %s, this is %s.\n", r.MadeWith, r.This)
	}
	if err := printAgreements(a.out, r.Steps); err != nil {
		return err
	}
	switch {
	case r.Identical:
		fmt.Fprintf(a.out, "Identical: %d numbers, %d words, and every pair.\n", c.Numbers, c.Words)
	case r.Same:
		fmt.Fprintf(a.out, "The same: %d numbers, %d words and every pair agree to %.1g of themselves or better.\n", c.Numbers, c.Words, r.Largest)
	default:
		printDifferences(a, r.Differences, all)
	}
	return nil
}

// withPairs puts the line of the pairs behind that of the differences.
func withPairs(steps []stepAgreement, p *pairsAgreement) []stepAgreement {
	columns := len(result.PairColumns())
	line := stepAgreement{Step: pairsStep, Numbers: p.rows * (columns - pairWords), Words: p.rows * pairWords, Differ: len(p.differences), Largest: p.largest}
	for i := range p.differences {
		if r := p.differences[i].Relative; !math.IsInf(r, 0) {
			line.Largest = math.Max(line.Largest, r)
		}
	}
	for i := range steps {
		if steps[i].Step == "differences" {
			return slices.Insert(steps, i+1, line)
		}
	}
	return append(steps, line)
}

func versionOf(r *analysis.Result) string {
	if r.Environment == nil {
		return "of an unknown version"
	}
	return r.Environment.Thinward
}

// printDifferences lists the first differences of each step, or all, numbers
// before words.
func printDifferences(a *app, list []result.Difference, all bool) {
	most := listed
	if all {
		most = 0
	}
	sorted := slices.Clone(list)
	sort.SliceStable(sorted, func(i, j int) bool { return sorted[i].Number && !sorted[j].Number })
	shown := firstOfEach(sorted, most)
	for i := range shown {
		text := shown[i].String()
		if !all && !shown[i].Number && len(text) > longWords {
			text = shown[i].Path + ": other words"
		}
		fmt.Fprintln(a.out, text)
	}
	if n := len(list) - len(shown); n > 0 {
		fmt.Fprintf(a.out, "... and %d more; --all lists them\n", n)
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

// pairWords is how many columns of pairs.csv hold words: crystal, thin, thick,
// strength_axis, class, flags.
const pairWords = 6

// pairsAgreement is what a comparison of two files of pairs found.
type pairsAgreement struct {
	rows        int
	differences []result.Difference
	largest     float64 // relative, within the tolerance
}

func comparePairFiles(old, fresh string) (*pairsAgreement, error) {
	a, err := readPairs(old)
	if err != nil {
		return nil, err
	}
	b, err := readPairs(fresh)
	if err != nil {
		return nil, err
	}
	p := &pairsAgreement{rows: len(a)}
	p.differences, _, p.largest = result.ComparePairs(a, b, tolerance, 0)
	return p, nil
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
