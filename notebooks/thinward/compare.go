package main

import (
	"fmt"
	"math"
	"strings"
	"text/tabwriter"

	"github.com/spf13/cobra"

	"thinward/analysis"
	"thinward/io/result"
)

// comparisonReport is what compare --json prints.
type comparisonReport struct {
	First       string              `json:"first"`
	Second      string              `json:"second"`
	SameInputs  bool                `json:"same_inputs"`
	Numbers     int                 `json:"numbers"`
	Differ      int                 `json:"differ"`
	Main        []mainNumbers       `json:"main"`
	Differences []result.Difference `json:"differences"`
}

// mainNumbers are the numbers one looks at first, of one contrast in two reports.
type mainNumbers struct {
	Contrast string          `json:"contrast"`
	Primary  bool            `json:"primary"`
	Numbers  []mainNumber    `json:"numbers"`
	In       map[string]bool `json:"in"`
}

type mainNumber struct {
	Name   string            `json:"name"`
	First  analysis.Interval `json:"first"`
	Second analysis.Interval `json:"second"`
}

func (a *app) compare() *cobra.Command {
	var all bool
	c := &cobra.Command{
		Use:   "compare DIR DIR",
		Short: "Two reports side by side: the main numbers, and which numbers differ",
		Example: `  thinward compare monday friday
  thinward compare monday friday --all`,
		Args: cobra.ExactArgs(2),
		RunE: func(_ *cobra.Command, args []string) error {
			first, err := openReport(args[0])
			if err != nil {
				return err
			}
			second, err := openReport(args[1])
			if err != nil {
				return err
			}
			r := compareReports(args, first.result, second.result)
			if a.json {
				return result.EncodeAny(a.out, *r)
			}
			return a.printComparison(r, all)
		},
	}
	c.Flags().BoolVar(&all, "all", false, "list every difference")
	c.Flags().BoolVar(&a.json, "json", false, "print JSON, every difference included")
	return c
}

func compareReports(names []string, first, second *analysis.Result) *comparisonReport {
	c := result.Compare(first, second, tolerance)
	r := &comparisonReport{First: names[0], Second: names[1], SameInputs: sameInputs(first, second), Numbers: c.Numbers, Differ: len(c.Differences), Differences: c.Differences}
	at := map[string]int{}
	for side, x := range []*analysis.Result{first, second} {
		for i := range x.Contrasts {
			k := &x.Contrasts[i]
			name := contrastText(k)
			j, known := at[name]
			if !known {
				j = len(r.Main)
				at[name] = j
				r.Main = append(r.Main, mainNumbers{Contrast: name, Primary: k.Primary, In: map[string]bool{"first": false, "second": false}})
				for _, n := range numberNames {
					missing := analysis.Interval{Value: math.NaN(), Lo: math.NaN(), Hi: math.NaN()}
					r.Main[j].Numbers = append(r.Main[j].Numbers, mainNumber{Name: n, First: missing, Second: missing})
				}
			}
			r.Main[j].In[[]string{"first", "second"}[side]] = true
			for n, v := range numbersOf(x, k) {
				if side == 0 {
					r.Main[j].Numbers[n].First = v
				} else {
					r.Main[j].Numbers[n].Second = v
				}
			}
		}
	}
	return r
}

var numberNames = []string{"m", "q", "o", "r", "p of the curve", "forbidden, thin", "forbidden, thick"}

func numbersOf(r *analysis.Result, c *analysis.ContrastResult) []analysis.Interval {
	thick := c.ThickCrystal
	if thick == "" {
		thick = c.Crystal
	}
	alone := func(v float64) analysis.Interval { return analysis.Interval{Value: v, Lo: math.NaN(), Hi: math.NaN()} }
	forbidden := func(crystal, position string) analysis.Interval {
		for _, f := range r.Forbidden {
			if f.Crystal == crystal && f.Position == position && f.Element == "all" && f.N > 0 {
				return analysis.Interval{Value: f.Ratio, Lo: f.Ratio - 1.96*f.SU, Hi: f.Ratio + 1.96*f.SU}
			}
		}
		return alone(math.NaN())
	}
	return []analysis.Interval{
		{Value: c.Exchange.M, Lo: c.Exchange.Lo, Hi: c.Exchange.Hi}, {Value: c.Curb.Q, Lo: c.Curb.Lo, Hi: c.Curb.Hi}, {Value: c.Offset.O, Lo: c.Offset.Lo, Hi: c.Offset.Hi},
		{Value: c.Correlation.R, Lo: c.Correlation.Lo, Hi: c.Correlation.Hi}, alone(c.Strength.P), forbidden(c.Crystal, c.Thin), forbidden(thick, c.Thick),
	}
}

// contrastText gives "L1: thin - thick", or "L1/thin - L2/thick".
func contrastText(c *analysis.ContrastResult) string {
	if c.ThickCrystal != "" {
		return fmt.Sprintf("%s/%s - %s/%s", c.Crystal, c.Thin, c.ThickCrystal, c.Thick)
	}
	return fmt.Sprintf("%s: %s - %s", c.Crystal, c.Thin, c.Thick)
}

func sameInputs(a, b *analysis.Result) bool {
	if len(a.Inputs) != len(b.Inputs) {
		return false
	}
	for i := range a.Inputs {
		if a.Inputs[i].SHA256 != b.Inputs[i].SHA256 {
			return false
		}
	}
	return true
}

func (a *app) printComparison(r *comparisonReport, all bool) error {
	t := tabwriter.NewWriter(a.out, 0, 0, 2, ' ', 0)
	fmt.Fprintf(t, "contrast\tnumber\t%s\t%s\t\n", r.First, r.Second)
	for _, c := range r.Main {
		if !c.Primary && !all {
			continue
		}
		for i, n := range c.Numbers {
			name := ""
			if i == 0 {
				name = c.Contrast
			}
			mark := ""
			if !sameNumber(n.First, n.Second) {
				mark = "differs"
			}
			fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\n", name, n.Name, intervalText(n.First), intervalText(n.Second), mark)
		}
	}
	if err := t.Flush(); err != nil {
		return err
	}
	if all {
		fmt.Fprintln(a.out)
		printDifferences(a, r.Differences, r.Differ, true)
	}
	inputs := "different inputs"
	if r.SameInputs {
		inputs = "the same inputs"
	}
	switch {
	case r.Differ == 0:
		fmt.Fprintf(a.out, "The two reports have %s and say the same: %d numbers agree.\n", inputs, r.Numbers)
	case all:
		fmt.Fprintf(a.out, "The two reports have %s and %s.\n", inputs, plural(r.Differ, "difference"))
	default:
		fmt.Fprintf(a.out, "The two reports have %s and %s; --all lists them.\n", inputs, plural(r.Differ, "difference"))
	}
	return nil
}

func sameNumber(a, b analysis.Interval) bool {
	for _, p := range [][2]float64{{a.Value, b.Value}, {a.Lo, b.Lo}, {a.Hi, b.Hi}} {
		if p[0] != p[1] && !(math.IsNaN(p[0]) && math.IsNaN(p[1])) {
			return false
		}
	}
	return true
}

// intervalText writes a value with its interval where it has one.
func intervalText(v analysis.Interval) string {
	switch {
	case math.IsNaN(v.Value):
		return "-"
	case math.IsNaN(v.Lo) && math.IsNaN(v.Hi):
		return fmt.Sprintf("%.4f", v.Value)
	}
	return fmt.Sprintf("%.4f (%s to %s)", v.Value, endText(v.Lo), endText(v.Hi))
}

func endText(v float64) string {
	if math.IsInf(v, 0) {
		return strings.TrimPrefix(strings.ToLower(fmt.Sprint(v)), "+")
	}
	return fmt.Sprintf("%.4f", v)
}
