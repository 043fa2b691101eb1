package main

import (
	"math"
	"reflect"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"thinward/analysis"
	"thinward/io/result"
)

func TestAgreements(t *testing.T) {
	sample := func() *analysis.Result {
		return &analysis.Result{Series: "Tarn", Contrasts: []analysis.ContrastResult{{Crystal: "L1", Thin: "thin", Thick: "thick", Pairs: 8, Exchange: analysis.Exchange{M: 0.1, SE: math.NaN()}}},
			Ledger: []analysis.LedgerEntry{{Check: "dose", Value: 1, Verdict: "fine"}}}
	}
	a, b := sample(), sample()
	b.Series = "Slate"
	b.Contrasts[0].Pairs = 10
	b.Contrasts[0].Exchange.M = 0.1 * (1 + 1e-12)
	b.Contrasts[0].Exchange.SE = 0.1
	b.Ledger = append(b.Ledger, analysis.LedgerEntry{Check: "ice", Value: 2, Verdict: "fine"})
	c := result.Compare(a, b, tolerance)
	byStep := map[string]stepAgreement{}
	for _, s := range agreements(a, b, c.Differences) {
		byStep[s.Step] = s
	}
	for _, want := range []stepAgreement{
		{Step: "inputs", Words: 3, Differ: 1},
		// The count differs by 2 of 10; the error of m is no number on one side, which has no size.
		{Step: "differences", Differ: 2, Largest: 0.2},
		{Step: "ledger", Numbers: 2, Differ: 4, OnlyOne: 4},
	} {
		got := byStep[want.Step]
		if want.Numbers == 0 {
			got.Numbers = 0
		}
		if want.Words == 0 {
			got.Words = 0
		}
		if diff := cmp.Diff(want, got, cmpopts.EquateApprox(1e-12, 0)); diff != "" {
			t.Errorf("%s (-want +got):\n%s", want.Step, diff)
		}
	}
	differ := 0
	for _, s := range agreements(a, b, c.Differences) {
		differ += s.Differ
	}
	if differ != len(c.Differences) {
		t.Errorf("%d differences are counted, %d were found", differ, len(c.Differences))
	}
	for _, s := range agreements(a, sample(), nil) {
		if s.Differ != 0 || s.Largest != 0 {
			t.Errorf("the same results: %+v", s)
		}
	}
}

// Every key of a result has a step, so that no line of the table is a bare key.
func TestEveryKeyHasAStep(t *testing.T) {
	steps := map[string]bool{}
	for _, s := range stepOrder {
		steps[s.step] = true
	}
	for f := range reflect.TypeFor[analysis.Result]().Fields() {
		key, _, _ := strings.Cut(f.Tag.Get("json"), ",")
		if key == "environment" || key == "timing" {
			continue // not compared
		}
		if step := stepOf(key + "[a].b"); !steps[step] {
			t.Errorf("%s belongs to no step: give it one in stepOrder", key)
		}
	}
}

func TestFirstOfEach(t *testing.T) {
	list := []result.Difference{{Path: "intake[a].x"}, {Path: "intake[b].x"}, {Path: "indexing[a].x"}, {Path: "pairs[a].z"}, {Path: "odd.x"}}
	var got []string
	for _, d := range firstOfEach(list, 2) {
		got = append(got, d.Path)
	}
	if diff := cmp.Diff([]string{"intake[a].x", "intake[b].x", "pairs[a].z", "odd.x"}, got); diff != "" {
		t.Errorf("(-want +got):\n%s", diff)
	}
	if len(firstOfEach(list, 0)) != len(list) {
		t.Error("0 does not keep all")
	}
	if got := shortList([]string{"a", "b", "c"}, 2); got != "a; b; and 1 more" {
		t.Error(got)
	}
}
