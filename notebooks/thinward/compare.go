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
	SameSeries  bool                `json:"same_series"`
	Series      [2]string           `json:"series"`
	SameInputs  bool                `json:"same_inputs"`
	Numbers     int                 `json:"numbers"`
	Differ      int                 `json:"differ"`
	Main        []mainNumbers       `json:"main"`
	Steps       []stepAgreement     `json:"steps"`
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
		Long: `Sets the main numbers of the primary contrasts side by side, counts step by step
how many numbers and words differ and by how much, and lists the first of them.
Two reports count as of one series when their titles are the same or any of
their inputs is.`,
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
	r := &comparisonReport{First: names[0], Second: names[1], Series: [2]string{first.Series, second.Series}, SameSeries: sameSeries(first, second),
		SameInputs: sameInputs(first, second), Numbers: c.Numbers, Differ: len(c.Differences), Differences: c.Differences,
		Steps: agreements(first, second, c.Differences)}
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

// sameSeries tells whether two reports can be of the same crystals: one title, or
// an input in common.
func sameSeries(a, b *analysis.Result) bool {
	if a.Series == b.Series {
		return true
	}
	sums := map[string]bool{}
	for i := range a.Inputs {
		sums[a.Inputs[i].SHA256] = true
	}
	for i := range b.Inputs {
		if sums[b.Inputs[i].SHA256] {
			return true
		}
	}
	return false
}

func (a *app) printComparison(r *comparisonReport, all bool) error {
	if !r.SameSeries {
		fmt.Fprintf(a.out, "Different series: %q and %q have no input in common. Contrasts of one name need not be of one crystal.\n\n", r.Series[0], r.Series[1])
	}
	if err := a.printMain(r, all); err != nil {
		return err
	}
	inputs := "different inputs"
	if r.SameInputs {
		inputs = "the same inputs"
	}
	if r.Differ == 0 {
		fmt.Fprintf(a.out, "The two reports have %s and say the same: %d numbers agree.\n", inputs, r.Numbers)
		return nil
	}
	fmt.Fprintln(a.out)
	if err := printAgreements(a.out, r.Steps); err != nil {
		return err
	}
	fmt.Fprintln(a.out)
	if all || r.SameSeries {
		printDifferences(a, r.Differences, all)
	}
	more := ""
	if !all && !r.SameSeries {
		more = "; --all lists them"
	}
	fmt.Fprintf(a.out, "The two reports have %s and %s%s.\n", inputs, plural(r.Differ, "difference"), more)
	return nil
}

// printMain writes the main numbers of the primary contrasts that both reports
// have; those of one report alone are only named.
func (a *app) printMain(r *comparisonReport, all bool) error {
	t := tabwriter.NewWriter(a.out, 0, 0, 2, ' ', 0)
	var alone [2][]string
	shown := 0
	for _, c := range r.Main {
		switch {
		case !c.In["second"]:
			alone[0] = append(alone[0], c.Contrast)
			continue
		case !c.In["first"]:
			alone[1] = append(alone[1], c.Contrast)
			continue
		case !c.Primary && !all:
			continue
		}
		if shown++; shown == 1 {
			fmt.Fprintf(t, "contrast\tnumber\t%s\t%s\t\n", r.First, r.Second)
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
	for side, names := range alone {
		if len(names) > 0 {
			fmt.Fprintf(a.out, "Only in %s: %s.\n", []string{r.First, r.Second}[side], shortList(names, 6))
		}
	}
	return nil
}

// shortList joins the first names and counts the rest.
func shortList(names []string, most int) string {
	if len(names) <= most {
		return strings.Join(names, "; ")
	}
	return fmt.Sprintf("%s; and %d more", strings.Join(names[:most], "; "), len(names)-most)
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
