package result

import (
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
)

func TestCompareSame(t *testing.T) {
	c := Compare(whole(), whole(), 1e-9)
	if !c.Identical || len(c.Differences) != 0 || c.Numbers < 300 || c.Words < 50 {
		t.Errorf("%+v", c)
	}
}

func TestCompare(t *testing.T) {
	make := func() *analysis.Result {
		return &analysis.Result{Schema: analysis.Schema, Contrasts: []analysis.ContrastResult{
			{Crystal: "L1", Thin: "thin", Thick: "thick", Pairs: 10, Exchange: analysis.Exchange{M: 0.1, Hi: math.Inf(1), SE: math.NaN(), Model: "(m)"}},
			{Crystal: "L2", Thin: "thin", Thick: "thick", Pairs: 20},
		}}
	}
	for _, c := range []struct {
		name   string
		change func(*analysis.Result)
		want   []Difference
		same   bool
	}{
		{"nothing", func(*analysis.Result) {}, nil, true},
		{"environment and timing", func(r *analysis.Result) {
			r.Environment, r.Timing = &analysis.Environment{Go: "x"}, []analysis.StepTime{{Step: "s", Seconds: 1}}
		}, nil, true},
		{"within the tolerance", func(r *analysis.Result) { r.Contrasts[0].Exchange.M = 0.1 * (1 + 5e-10) }, nil, false},
		{"beyond it", func(r *analysis.Result) { r.Contrasts[0].Exchange.M = 0.2 }, []Difference{
			{Path: "contrasts[L1, thin, thick].exchange.m", First: "0.1", Second: "0.2", Relative: 0.5, Number: true}}, false},
		{"a count", func(r *analysis.Result) { r.Contrasts[1].Pairs = 25 }, []Difference{
			{Path: "contrasts[L2, thin, thick].pairs", First: "20", Second: "25", Relative: 0.2, Number: true}}, false},
		{"a word", func(r *analysis.Result) { r.Contrasts[0].Exchange.Model = "(m,q)" }, []Difference{
			{Path: "contrasts[L1, thin, thick].exchange.model", First: `"(m)"`, Second: `"(m,q)"`, Relative: math.Inf(1)}}, false},
		{"no longer a number", func(r *analysis.Result) { r.Contrasts[0].Exchange.M = math.NaN() }, []Difference{
			{Path: "contrasts[L1, thin, thick].exchange.m", First: "0.1", Second: "not a number", Relative: math.Inf(1), Number: true}}, false},
		{"no longer infinite", func(r *analysis.Result) { r.Contrasts[0].Exchange.Hi = 3 }, []Difference{
			{Path: "contrasts[L1, thin, thick].exchange.hi", First: "+Inf", Second: "3", Relative: math.Inf(1), Number: true}}, false},
		{"order", func(r *analysis.Result) { r.Contrasts[0], r.Contrasts[1] = r.Contrasts[1], r.Contrasts[0] }, nil, true},
		{"one more", func(r *analysis.Result) {
			r.Ledger = []analysis.LedgerEntry{{Check: "dose", Value: 1, Verdict: "fine"}}
		}, []Difference{
			{Path: "ledger[dose].check", Second: `"dose"`, Relative: math.Inf(1)}, {Path: "ledger[dose].value", Second: "1", Relative: math.Inf(1), Number: true},
			{Path: "ledger[dose].verdict", Second: `"fine"`, Relative: math.Inf(1)}, {Path: "ledger[dose].why", Second: `""`, Relative: math.Inf(1)}}, false},
	} {
		r := make()
		c.change(r)
		got := Compare(make(), r, 1e-9)
		if diff := cmp.Diff(c.want, got.Differences, cmpopts.EquateApprox(1e-12, 0)); diff != "" || got.Identical != c.same {
			t.Errorf("%s: identical %v, (-want +got):\n%s", c.name, got.Identical, diff)
		}
		back := Compare(r, make(), 1e-9)
		if len(back.Differences) != len(c.want) {
			t.Errorf("%s: the other way round %d differences, want %d", c.name, len(back.Differences), len(c.want))
		}
	}
}

// A list whose entries carry no name of their own is told by number.
func TestLeafPathsAreUnique(t *testing.T) {
	seen := map[string]bool{}
	for _, l := range Leaves(whole()) {
		if seen[l.Path] {
			t.Errorf("%s stands twice", l.Path)
		}
		seen[l.Path] = true
	}
	if Leaves(nil) != nil {
		t.Error("nil has leaves")
	}
}

func TestComparePairs(t *testing.T) {
	a, b := somePairs(), somePairs()
	if list, n, _ := ComparePairs(a, b, 0, 0); n != 0 || list != nil {
		t.Errorf("same rows: %v", list)
	}
	b[0].Z *= 1 + 1e-12
	if list, n, largest := ComparePairs(a, b, 1e-9, 0); n != 0 || !(largest > 5e-13 && largest < 2e-12) {
		t.Errorf("within: %v, %g", list, largest)
	}
	b[0].Z *= 2
	b[0].DI = math.NaN()
	b[1].Class = "top"
	list, n, _ := ComparePairs(a, b, 1e-9, 2)
	if n != 3 || len(list) != 2 || list[0].Path != "pairs[L1: thin - thick, 1 -2 3].dI" || list[0].Second != "" || list[1].Path != "pairs[L1: thin - thick, 1 -2 3].z" {
		t.Errorf("%d: %+v", n, list)
	}
	if list, n, _ := ComparePairs(a, b[:1], 1e-9, 0); n != 1 || list[0].First != "2 rows" {
		t.Errorf("length: %+v", list)
	}
}
