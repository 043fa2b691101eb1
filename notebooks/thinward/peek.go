package main

import (
	"fmt"
	"io"
	"strings"

	"github.com/spf13/cobra"

	"thinward/io/cif"
	"thinward/io/delimited"
	"thinward/io/manifest"
)

// peekReport is what peek --json prints.
type peekReport struct {
	File   string      `json:"file"`
	Kind   string      `json:"kind"`
	Blocks []peekBlock `json:"blocks,omitempty"`
	Lists  []peekList  `json:"lists"`
}

type peekBlock struct {
	Code  string `json:"code"`
	Items int    `json:"items"`
	Loops int    `json:"loops"`
}

type peekList struct {
	Block     string         `json:"block,omitempty"`
	Category  string         `json:"category,omitempty"`
	Line      int            `json:"line,omitempty"`
	Merged    bool           `json:"merged"`
	Rows      int            `json:"rows"`
	Columns   []string       `json:"columns"`
	Intensity string         `json:"intensity,omitempty"`
	Sigma     string         `json:"sigma,omitempty"`
	Angle     string         `json:"angle,omitempty"`
	Frame     string         `json:"frame,omitempty"`
	Range     [2][3]int      `json:"index_range"`
	I         [2]float64     `json:"intensity_range"`
	Sets      map[string]int `json:"data_sets,omitempty"`
	Nulls     int            `json:"nulls"`
	Warnings  []string       `json:"warnings,omitempty"`
}

func (a *app) peek() *cobra.Command {
	c := &cobra.Command{
		Use:     "peek FILE",
		Short:   "What a reflection file holds: blocks, lists, columns, ranges; a syntax error with its line",
		Example: "  thinward peek L1-thin.cif.gz",
		Args:    cobra.ExactArgs(1),
		RunE: func(_ *cobra.Command, args []string) error {
			if err := readable(args[0]); err != nil {
				return err
			}
			r, err := peekFile(args[0])
			if err != nil {
				return err
			}
			if a.json {
				return writeJSON(a.out, r)
			}
			return r.print(a.out)
		},
	}
	c.Flags().BoolVar(&a.json, "json", false, "print JSON")
	return c
}

func peekFile(path string) (*peekReport, error) {
	isCIF, err := manifest.LooksLikeCIF(path)
	if err != nil {
		return nil, err
	}
	if !isCIF {
		return peekColumns(path)
	}
	f, err := cif.ReadFile(path)
	if err != nil {
		return nil, err
	}
	r := &peekReport{File: path, Kind: "CIF", Lists: []peekList{}}
	for _, b := range f.Blocks {
		r.Blocks = append(r.Blocks, peekBlock{Code: b.Code, Items: len(b.Items), Loops: len(b.Loops)})
	}
	for _, l := range f.Lists() {
		p := peekList{
			Block: l.Block, Category: l.Category, Line: l.Line, Merged: l.Merged, Rows: l.Rows, Columns: l.Columns, Intensity: l.Intensity, Sigma: l.Sigma,
			Angle: l.Angle, Frame: l.Frame, Range: [2][3]int{l.MinHKL, l.MaxHKL}, I: [2]float64{l.MinIntensity, l.MaxIntensity}, Nulls: l.Nulls,
		}
		for _, sets := range [][]cif.Set{l.DiffrnIDs, l.ScaleSets} {
			for _, s := range sets {
				if p.Sets == nil {
					p.Sets = map[string]int{}
				}
				p.Sets[s.Code] = s.Rows
			}
		}
		if l.Twin {
			p.Warnings = append(p.Warnings, "holds rows of several twin components and cannot be read")
		}
		r.Lists = append(r.Lists, p)
	}
	return r, nil
}

func peekColumns(path string) (*peekReport, error) {
	d, err := delimited.ReadFile(path, nil)
	if err != nil {
		return nil, fmt.Errorf("%w\n(column text without a header of names needs [columns] order = [...] in a manifest)", err)
	}
	p := peekList{Rows: d.Rows, Columns: d.Order, Category: d.Layout}
	c := d.Columns
	for i := range c.I {
		h := [3]int{int(c.H[i]), int(c.K[i]), int(c.L[i])}
		if i == 0 {
			p.Range, p.I = [2][3]int{h, h}, [2]float64{c.I[i], c.I[i]}
		}
		for k := range 3 {
			p.Range[0][k], p.Range[1][k] = min(p.Range[0][k], h[k]), max(p.Range[1][k], h[k])
		}
		p.I[0], p.I[1] = min(p.I[0], c.I[i]), max(p.I[1], c.I[i])
	}
	for _, s := range d.SetAside {
		p.Warnings = append(p.Warnings, fmt.Sprintf("%d rows are set aside: %s (first on line %d)", s.Count, s.Reason, s.FirstLine))
	}
	for _, w := range d.Warnings {
		p.Warnings = append(p.Warnings, w.Text)
	}
	return &peekReport{File: path, Kind: "column text", Lists: []peekList{p}}, nil
}

func (r *peekReport) print(w io.Writer) error {
	var b strings.Builder
	fmt.Fprintf(&b, "%s: %s\n", r.File, r.Kind)
	for _, k := range r.Blocks {
		fmt.Fprintf(&b, "  block %s: %d items, %d loops\n", k.Code, k.Items, k.Loops)
	}
	if len(r.Lists) == 0 {
		fmt.Fprintln(&b, "  no reflection list")
	}
	for _, l := range r.Lists {
		kind := "unmerged"
		if l.Merged {
			kind = "merged"
		}
		where := l.Category
		if l.Block != "" {
			where = fmt.Sprintf("%s in block %s, line %d", l.Category, l.Block, l.Line)
		}
		fmt.Fprintf(&b, "  list %s: %d rows, %s\n", where, l.Rows, kind)
		fmt.Fprintf(&b, "    columns   %s\n", strings.Join(l.Columns, " "))
		for _, c := range [][2]string{{"intensity", l.Intensity}, {"sigma", l.Sigma}, {"angle", l.Angle}, {"frame", l.Frame}} {
			if c[1] != "" {
				fmt.Fprintf(&b, "    %-9s %s\n", c[0], c[1])
			}
		}
		fmt.Fprintf(&b, "    indices   %d..%d %d..%d %d..%d, intensity %g to %g\n", l.Range[0][0], l.Range[1][0], l.Range[0][1], l.Range[1][1], l.Range[0][2], l.Range[1][2], l.I[0], l.I[1])
		if len(l.Sets) > 0 && len(l.Sets) < 40 {
			for _, k := range sortedCounts(l.Sets) {
				fmt.Fprintf(&b, "    data set  %s: %d rows\n", k, l.Sets[k])
			}
		} else if len(l.Sets) > 0 {
			fmt.Fprintf(&b, "    codes     %d different\n", len(l.Sets))
		}
		if l.Nulls > 0 {
			fmt.Fprintf(&b, "    nulls     %d\n", l.Nulls)
		}
		for _, s := range l.Warnings {
			fmt.Fprintf(&b, "    warning   %s\n", s)
		}
	}
	_, err := io.WriteString(w, b.String())
	return err
}

func sortedCounts(m map[string]int) []string {
	plain := map[string]string{}
	for k := range m {
		plain[k] = ""
	}
	return sortedKeys(plain)
}
