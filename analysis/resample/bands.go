package resample

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// BandSet holds bootstrap bands of an averaged curve, one entry a window.
type BandSet struct {
	// Mean is the (weighted) mean of each window, SE its bootstrap standard error.
	Mean, SE []float64
	// Lo and Hi are the pointwise percentile band, LoSim and HiSim the simultaneous
	// band Mean -+ Multiplier*SE. An interval that the data cannot support is -Inf, +Inf.
	Lo, Hi, LoSim, HiSim []float64
	// N is the number of elements, Units the number of resampled units in each window.
	N, Units []int
	// Multiplier is the max-t multiplier, AchievedSim the share of draws within the
	// simultaneous band everywhere; Achieved is the share of draws within the
	// pointwise band, by window.
	Multiplier, AchievedSim float64
	Achieved                []float64
	Level                   float64
	Replicates              int
	Scheme                  Scheme
	Warnings                []intensity.Warning
}

// maxExactDraws bounds replicates times windows of an enumerated band.
const maxExactDraws = 20_000_000

// Bands bootstraps the means of y over windows.
//
// y holds one value an element, in rank order; w its weights, nil = all 1. The
// mean of a window is sum(w y)/sum(w). Ranks are not computed again in a
// replicate: the windows stay where they are, so the band is that of the averaged
// curve, given this axis. Units (elements, or Settings.Blocks) get Poisson weights
// (see PoissonWeights); below 30 units they are drawn multinomially, or all
// resamples are enumerated with their probabilities (at most Settings.ExactLimit
// of them, and at most 2e7 divided by the number of windows).
//
// The pointwise band runs between the (R+1)p-th ordered draws (percentile
// interval: Efron & Tibshirani 1993, section 13.3; type 6 of Quantile). The
// simultaneous band is Mean -+ c SE, c the Level-quantile of max over windows of
// |draw - Mean|/SE. A window with fewer units than UnitsNeeded(Level) gets an
// infinite interval and a warning and stays out of the maximum; a replicate in
// which a window drew nothing counts against both ends.
//
// It is an error when y is empty, when y or w is not finite, w negative, a window
// empty, outside y or without weight. It panics when the lengths of y, w and
// Blocks differ. y and w are not changed.
func Bands(ctx context.Context, y, w []float64, windows []Window, o *Settings) (*BandSet, error) {
	s, err := o.filled()
	if err != nil {
		return nil, err
	}
	if err := checkBands(y, w, windows); err != nil {
		return nil, err
	}
	u := unitsOf(len(y), s.Blocks)
	grid := len(windows)
	m := newSampler(u.n, s.Seed.At("bands"), &s, maxExactDraws/max(grid, 1))
	p := newPass(y, w, windows, u, m.table)
	b := &BandSet{Level: s.Level, Replicates: m.total, Scheme: m.scheme, Units: u.countIn(windows)}
	for g, win := range windows {
		b.N = append(b.N, win.Len())
		if !(p.plainWeight[g] > 0) {
			return nil, fmt.Errorf("resample: Bands: window %d [%d, %d) has no weight", g, win.Lo, win.Hi)
		}
	}
	b.Mean = slices.Clone(p.plainMean)
	draws := make([]float64, m.total*grid)
	err = eachReplicate(ctx, m.total, &s, p.scratch, func(t *passScratch, r int) error {
		m.fill(r, t.units)
		p.run(t, draws[r*grid:(r+1)*grid])
		return nil
	})
	if err != nil {
		return nil, err
	}
	if err := b.summarise(ctx, draws, m.prob, &s); err != nil {
		return nil, err
	}
	for _, list := range [][]float64{b.Mean, b.Lo, b.Hi, b.LoSim, b.HiSim} {
		for g := range list {
			list[g] += p.centre
		}
	}
	return b, nil
}

func checkBands(y, w []float64, windows []Window) error {
	if w != nil && len(w) != len(y) {
		panic(fmt.Sprintf("resample: Bands: %d weights for %d values", len(w), len(y)))
	}
	if len(y) == 0 {
		return errors.New("resample: Bands: no values")
	}
	for i, v := range y {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("resample: Bands: value %d is %g", i, v)
		}
	}
	for i, v := range w {
		if !(v >= 0) || math.IsInf(v, 0) {
			return fmt.Errorf("resample: Bands: weight %d is %g", i, v)
		}
	}
	for g, win := range windows {
		if win.Lo < 0 || win.Hi > len(y) || win.Lo >= win.Hi {
			return fmt.Errorf("resample: Bands: window %d [%d, %d) is empty or outside the %d values", g, win.Lo, win.Hi, len(y))
		}
	}
	return nil
}

// summarise fills everything but Mean, N and Units from draws, row by row the
// replicates and column by column the windows.
func (b *BandSet) summarise(ctx context.Context, draws, prob []float64, s *Settings) error {
	grid := len(b.Mean)
	for _, list := range []*[]float64{&b.SE, &b.Lo, &b.Hi, &b.LoSim, &b.HiSim, &b.Achieved} {
		*list = make([]float64, grid)
	}
	need := UnitsNeeded(s.Level)
	alpha := (1 - s.Level) / 2
	failed := make([]float64, grid)
	quiet := *s
	quiet.Progress = nil
	column := func() []float64 { return make([]float64, b.Replicates) }
	err := eachReplicate(ctx, grid, &quiet, column, func(x []float64, g int) error {
		for r := range x {
			x[r] = draws[r*grid+g]
		}
		l := newLaw(x, prob)
		_, b.SE[g] = l.moments()
		b.Lo[g], b.Hi[g] = l.lower(alpha), l.upper(1-alpha)
		if b.Units[g] < need {
			b.Lo[g], b.Hi[g] = math.Inf(-1), math.Inf(1)
		}
		b.Achieved[g] = l.share(b.Lo[g], b.Hi[g])
		failed[g] = l.failed
		return nil
	})
	if err != nil {
		return err
	}
	b.simultaneous(draws, prob, need)
	b.warn(failed, need)
	return nil
}

func (b *BandSet) simultaneous(draws, prob []float64, need int) {
	grid := len(b.Mean)
	inv := make([]float64, grid)
	supported := false
	for g := range inv {
		if b.Units[g] >= need {
			supported = true
			if b.SE[g] > 0 {
				inv[g] = 1 / b.SE[g]
			}
		}
	}
	top := make([]float64, b.Replicates)
	for r := range top {
		row := draws[r*grid : (r+1)*grid]
		most := 0.0
		for g, v := range row {
			d := math.Abs(v-b.Mean[g]) * inv[g]
			if d > most {
				most = d
			} else if d != d && b.Units[g] >= need {
				most = math.Inf(1)
			}
		}
		top[r] = most
	}
	l := newLaw(top, prob)
	b.Multiplier = l.upper(b.Level)
	if !supported {
		b.Multiplier = math.Inf(1)
	}
	b.AchievedSim = l.share(0, b.Multiplier)
	for g := range inv {
		if b.Units[g] < need || math.IsInf(b.Multiplier, 1) {
			b.LoSim[g], b.HiSim[g] = math.Inf(-1), math.Inf(1)
			continue
		}
		half := b.Multiplier * b.SE[g]
		b.LoSim[g], b.HiSim[g] = b.Mean[g]-half, b.Mean[g]+half
	}
}

func (b *BandSet) warn(failed []float64, need int) {
	few, bad, open := 0, 0, 0
	fewest := math.MaxInt
	for g := range b.Mean {
		switch {
		case b.Units[g] < need:
			few++
			fewest = min(fewest, b.Units[g])
		case math.IsInf(b.Lo[g], -1) || math.IsInf(b.Hi[g], 1):
			open++
		}
		if failed[g] > 0 {
			bad++
		}
	}
	n := len(b.Mean)
	if few > 0 {
		b.Warnings = append(b.Warnings, warning(CodeFewUnits, fmt.Sprintf(
			"%d of %d windows hold fewer than %d units (as few as %d); an interval at %g %% needs %d, so theirs is infinite",
			few, n, need, fewest, 100*b.Level, need), "bands"))
	}
	if bad > 0 {
		b.Warnings = append(b.Warnings, warning(CodeFailedDraws, fmt.Sprintf(
			"%d of %d windows were empty in some replicates; those count against both ends of the interval", bad, n), "bands"))
	}
	if open > 0 || (n > few && math.IsInf(b.Multiplier, 1)) {
		b.Warnings = append(b.Warnings, warning(CodeFewDraws, fmt.Sprintf(
			"%d replicates cannot reach the ends of a %g %% interval everywhere; those intervals are infinite", b.Replicates, 100*b.Level), "bands"))
	}
}
