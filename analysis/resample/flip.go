package resample

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
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

// exactFlipUnits is the number of units up to which all flips are enumerated.
const exactFlipUnits = 16

// FlipTest tests whether y is symmetric about zero, unit by unit, against a shift
// anywhere along one or several orderings.
//
// The statistic of a window is t = sum(y)/sqrt(sum(y^2)), whose denominator no
// flip changes; that of the test is max |t| over all windows of all sets, every
// set under the same flips (single-step max-T: Westfall & Young 1993). With
// y = D S/v for a difference D of variance v and local mean S it is the weighted
// self-normalised maximum: weights S^2/v on D/S. A unit is an element (a whole
// reflection, never an observation) or a group of Settings.Blocks, flipped as one.
// Up to 16 units all flips are enumerated; otherwise Settings.Replicates of them
// are drawn, bit u mod 64 of word u/64 of a stream deciding unit u. With
// Settings.Sum the statistic is |sum(y)|.
//
// It answers only whether there is a pattern at all. Sums that a scale fit has
// tied down, such as a slope or a contrast of strong reflections, are not to be
// tested this way.
//
// It is an error when y is empty or not finite, when there is no window, an order
// names an element outside y or twice, or a window is empty or outside its order.
// It panics when Blocks and y differ in length. y and sets are not changed.
func FlipTest(ctx context.Context, y []float64, sets []FlipSet, o *Settings) (*FlipResult, error) {
	s, err := o.filled()
	if err != nil {
		return nil, err
	}
	if err := checkFlips(y, sets); err != nil {
		return nil, err
	}
	u := unitsOf(len(y), s.Blocks)
	passes := make([]*flipPass, len(sets))
	for i, set := range sets {
		passes[i] = newFlipPass(y, set, u, s.Sum)
	}
	res := &FlipResult{Units: u.n, Flips: s.Replicates, Smallest: 1 / float64(1+s.Replicates), SetP: make([]float64, len(sets))}
	if u.n <= exactFlipUnits {
		res.Exact, res.Flips = true, 1<<u.n
		res.Smallest = 2 / float64(res.Flips)
	}
	observe(res, passes, u.n)
	seed := s.Seed.At("flips")
	tops := make([]float64, res.Flips*len(sets))
	scratch := func() *flipScratch { return newFlipScratch(u.n, passes) }
	err = eachReplicate(ctx, res.Flips, &s, scratch, func(t *flipScratch, r int) error {
		if res.Exact {
			t.words[0] = uint64(r)
		} else {
			st := seed.Stream(r)
			for i := range t.words {
				t.words[i] = st.src.Uint64()
			}
		}
		for i, p := range passes {
			tops[r*len(sets)+i] = p.run(t, nil)
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	res.judge(tops, s.Sum, y)
	return res, nil
}

func checkFlips(y []float64, sets []FlipSet) error {
	if len(y) == 0 {
		return errors.New("resample: FlipTest: no values")
	}
	for i, v := range y {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("resample: FlipTest: value %d is %g", i, v)
		}
	}
	windows := 0
	seen := make([]int, len(y))
	for i, set := range sets {
		n := len(y)
		if set.Order != nil {
			n = len(set.Order)
		}
		for k, e := range set.Order {
			if e < 0 || int(e) >= len(y) {
				return fmt.Errorf("resample: FlipTest: set %d rank %d names element %d of %d", i, k, e, len(y))
			}
			if seen[e] == i+1 {
				return fmt.Errorf("resample: FlipTest: set %d names element %d twice", i, e)
			}
			seen[e] = i + 1
		}
		for g, w := range set.Windows {
			if w.Lo < 0 || w.Hi > n || w.Lo >= w.Hi {
				return fmt.Errorf("resample: FlipTest: set %d window %d [%d, %d) is empty or outside its %d ranks", i, g, w.Lo, w.Hi, n)
			}
			windows++
		}
	}
	if windows == 0 {
		return errors.New("resample: FlipTest: no windows")
	}
	return nil
}

func observe(res *FlipResult, passes []*flipPass, n int) {
	t := newFlipScratch(n, passes)
	res.Stat = -1
	for i, p := range passes {
		got := make([]float64, len(p.lo))
		p.run(t, got)
		res.Observed = append(res.Observed, got)
		for g, v := range got {
			if math.Abs(v) > res.Stat {
				res.Stat, res.Set, res.Window = math.Abs(v), i, g
			}
		}
	}
}

// judge turns the maxima of the flips, by flip and set, into p-values. A flip
// that differs from the observed statistic by rounding alone counts as equal.
func (res *FlipResult) judge(tops []float64, sum bool, y []float64) {
	size := math.Sqrt(float64(len(y)))
	if sum {
		size = 0
		for _, v := range y {
			size += math.Abs(v)
		}
	}
	tol := 1e-12 * size
	k := len(res.SetP)
	joint := make([]float64, res.Flips)
	own := make([]float64, res.Flips)
	for r := range joint {
		joint[r] = slices.Max(tops[r*k : (r+1)*k])
	}
	slices.Sort(joint)
	reached := func(x []float64, stat float64) int {
		at, _ := slices.BinarySearch(x, stat-tol)
		return len(x) - at
	}
	p := func(count int) float64 {
		if res.Exact {
			return float64(count) / float64(res.Flips)
		}
		return float64(1+count) / float64(1+res.Flips)
	}
	res.Count = reached(joint, res.Stat)
	res.P = p(res.Count)
	for i, got := range res.Observed {
		for r := range own {
			own[r] = tops[r*k+i]
		}
		slices.Sort(own)
		most := 0.0
		adjusted := make([]float64, len(got))
		for g, v := range got {
			most = math.Max(most, math.Abs(v))
			adjusted[g] = p(reached(joint, math.Abs(v)))
		}
		res.Adjusted = append(res.Adjusted, adjusted)
		res.SetP[i] = p(reached(own, most))
	}
}
