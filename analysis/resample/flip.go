package resample

import (
	"context"
	"errors"
)

// FlipSet is one ordering of the elements and its windows. Order[k] is the
// element at rank k; nil = the elements in their own order. An order may leave
// elements out, but names none twice. Windows are ranges of ranks.
type FlipSet struct {
	Order   []int32
	Windows []Window
}

// FlipResult is the outcome of FlipTest.
type FlipResult struct {
	// P is the joint p-value, Stat the observed maximum, found in window Window of
	// set Set.
	P, Stat     float64
	Set, Window int
	// Observed holds the signed statistic, Adjusted its single-step adjusted p-value,
	// by set and window; SetP the p-value of each set by itself.
	Observed, Adjusted [][]float64
	SetP               []float64
	// Count flips of Flips reached Stat. Exact: all were enumerated, P = Count/Flips;
	// otherwise P = (1+Count)/(1+Flips).
	Count, Flips int
	Exact        bool
	// Smallest is the smallest p-value these units and flips can give.
	Smallest float64
	Units    int
}

// FlipTest tests symmetry about zero.
func FlipTest(ctx context.Context, y []float64, sets []FlipSet, o *Settings) (*FlipResult, error) {
	return nil, errors.New("resample: FlipTest has no body yet")
}
