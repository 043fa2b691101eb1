package main

import (
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"

	"thinward/analysis"
	"thinward/io/result"
)

// stepAgreement says how far two results agree in what one step found. Numbers
// and Words count what at least one of them holds, Differ what is not the same
// within the tolerance, OnlyOne those among them that one does not hold at all.
// Largest is the largest relative difference of two finite numbers.
type stepAgreement struct {
	Step    string  `json:"step"`
	Numbers int     `json:"numbers"`
	Words   int     `json:"words"`
	Differ  int     `json:"differ"`
	OnlyOne int     `json:"only_one"`
	Largest float64 `json:"largest_relative"`
}

// stepOrder are the steps in the order of the report, with the keys of
// result.json that hold what each found. The pairs stand in a file of their own.
var stepOrder = []struct {
	step string
	keys []string
}{
	{"inputs", []string{"schema", "series", "seed", "inputs"}},
	{"intake", []string{"intake", "indexing", "common_reflections", "intake_remarks", "centring", "turns"}},
	{"scaling", []string{"scaling"}},
	{"differences", []string{"contrasts"}},
	{pairsStep, []string{"pairs"}},
	{"forbidden", []string{"forbidden"}},
	{"quality", []string{"quality", "distributions", "friedel_mates"}},
	{"crystals", []string{"crystals", "thickness"}},
	{"controls", []string{"controls"}},
	{"specification", []string{"specification"}},
	{"ledger", []string{"ledger"}},
	{"expectation", []string{"expectation", "matters"}},
	{"answers", []string{"answers", "warnings"}},
}

const pairsStep = "pairs"

// stepOf gives the step that a place such as "contrasts[L1, thin, thick].pairs"
// belongs to; a key that no step is known for is its own.
func stepOf(path string) string {
	key := path
	if i := strings.IndexAny(path, ".["); i >= 0 {
		key = path[:i]
	}
	for _, s := range stepOrder {
		for _, k := range s.keys {
			if k == key {
				return s.step
			}
		}
	}
	return key
}

// agreements sorts a comparison of two results by step. Steps that neither holds
// are left out.
func agreements(first, second *analysis.Result, differences []result.Difference) []stepAgreement {
	at := map[string]*stepAgreement{}
	var order []string
	of := func(path string) *stepAgreement {
		step := stepOf(path)
		if at[step] == nil {
			at[step] = &stepAgreement{Step: step}
			order = append(order, step)
		}
		return at[step]
	}
	other := map[string]result.Leaf{}
	for _, l := range result.Leaves(first) {
		other[l.Path] = l
		of(l.Path).count(l.IsNumber)
	}
	for _, l := range result.Leaves(second) {
		x, both := other[l.Path]
		switch {
		case !both:
			of(l.Path).count(l.IsNumber)
		case l.IsNumber && x.IsNumber:
			of(l.Path).apart(x.Number, l.Number)
		}
	}
	for i := range differences {
		d := &differences[i]
		a := of(d.Path)
		a.Differ++
		if d.First == "" || d.Second == "" {
			a.OnlyOne++
		}
	}
	var out []stepAgreement
	for _, s := range stepOrder {
		if a := at[s.step]; a != nil {
			out = append(out, *a)
			delete(at, s.step)
		}
	}
	for _, step := range order {
		if a := at[step]; a != nil {
			out = append(out, *a)
		}
	}
	return out
}

func (a *stepAgreement) count(number bool) {
	if number {
		a.Numbers++
	} else {
		a.Words++
	}
}

func (a *stepAgreement) apart(x, y float64) {
	d := math.Abs(x-y) / math.Max(math.Abs(x), math.Abs(y))
	if x != y && d > a.Largest && !math.IsInf(d, 0) {
		a.Largest = d
	}
}

// printAgreements writes the table of steps. Where one side lacks places, they
// have a column of their own.
func printAgreements(w io.Writer, list []stepAgreement) error {
	alone := false
	for i := range list {
		alone = alone || list[i].OnlyOne > 0
	}
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprint(t, "step\tnumbers\twords\tdiffer\t")
	if alone {
		fmt.Fprint(t, "only in one\t")
	}
	fmt.Fprint(t, "largest relative difference\t\n")
	for i := range list {
		a := &list[i]
		fmt.Fprintf(t, "%s\t%d\t%d\t%d\t", a.Step, a.Numbers, a.Words, a.Differ)
		if alone {
			fmt.Fprintf(t, "%d\t", a.OnlyOne)
		}
		largest := "0"
		if a.Largest > 0 {
			largest = fmt.Sprintf("%.1e", a.Largest)
		}
		fmt.Fprintf(t, "%s\t\n", largest)
	}
	return t.Flush()
}

// firstOfEach shortens a list to the first few of each step; a most of 0 keeps
// all.
func firstOfEach(list []result.Difference, most int) []result.Difference {
	if most == 0 {
		return list
	}
	seen := map[string]int{}
	var out []result.Difference
	for i := range list {
		step := stepOf(list[i].Path)
		if seen[step]++; seen[step] <= most {
			out = append(out, list[i])
		}
	}
	return out
}
