package curve

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"

	"thinward/analysis/internal/parallel"
)

// LocalSettings steer LocalLine; nil and zero fields mean the defaults.
type LocalSettings struct {
	// Neighbours is the number q of nearest points in each fit; 0 = Share of them,
	// at least 50 (all when there are fewer).
	Neighbours int
	// Share is the share of points in each fit when Neighbours is 0; 0 = 0.05.
	Share float64
	// Robust is the number of robustness iterations; 0 = none. With more than 5000
	// points the residuals are taken from 1000 fitted points, joined by lines.
	Robust int
	// Workers is the number of goroutines; 0 = GOMAXPROCS.
	Workers int
}

const (
	robustAll  = 5000
	robustGrid = 1000
)

// LocalLine fits, at each value of at, a straight line to the q nearest points
// with tricube weights (1 - (d/h)^3)^3, h the distance of the q-th nearest, times w
// (nil = all 1), and returns its value there: LOESS of degree 1 (Cleveland 1979,
// J. Am. Stat. Assoc. 74:829; Cleveland & Devlin 1988). Robustness iterations
// multiply the weights by the bisquare of residual/(6 median |residual|).
//
// x is ascending. Where the points in reach have one x only, or none has weight
// but those at distance h, the weighted mean is returned; with no weight at all,
// NaN. It panics when lengths differ; x not ascending, a value that is not finite,
// a negative weight, no points, or q < 2 are errors. Inputs are not changed.
func LocalLine(ctx context.Context, x, y, w, at []float64, o *LocalSettings) ([]float64, error) {
	if len(x) != len(y) {
		panic(fmt.Sprintf("curve: LocalLine: %d x for %d y", len(x), len(y)))
	}
	var s LocalSettings
	if o != nil {
		s = *o
	}
	if err := checkColumn("LocalLine", y, w); err != nil {
		return nil, err
	}
	if len(x) == 0 {
		return nil, errors.New("curve: LocalLine: no points")
	}
	for i, v := range x {
		if math.IsNaN(v) || math.IsInf(v, 0) || (i > 0 && v < x[i-1]) {
			return nil, fmt.Errorf("curve: LocalLine: x is not ascending and finite at %d", i)
		}
	}
	for i, v := range at {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return nil, fmt.Errorf("curve: LocalLine: point %d to fit at is %g", i, v)
		}
	}
	q := s.Neighbours
	if q == 0 {
		share := s.Share
		if share == 0 {
			share = DefaultShare
		}
		q = max(DefaultMin, int(math.Ceil(share*float64(len(x)))))
	}
	if q < 2 {
		return nil, fmt.Errorf("curve: LocalLine: %d neighbours, need two", q)
	}
	l := &localLine{x: x, y: y, w: w, q: min(q, len(x)), workers: s.Workers}
	for range s.Robust {
		if err := l.downweigh(ctx); err != nil {
			return nil, err
		}
	}
	return l.fit(ctx, at)
}

type localLine struct {
	x, y, w []float64
	robust  []float64
	q       int
	workers int
}

func (l *localLine) fit(ctx context.Context, at []float64) ([]float64, error) {
	out := make([]float64, len(at))
	const block = 32
	err := parallel.For(ctx, (len(at)+block-1)/block, l.workers, func(ctx context.Context, b int) error {
		for i := b * block; i < min(len(at), (b+1)*block); i++ {
			if ctx.Err() != nil {
				return ctx.Err()
			}
			out[i] = l.value(at[i])
		}
		return nil
	})
	return out, err
}

// nearest returns the range of the q points nearest to x0 and the distance of the
// farthest of them.
func (l *localLine) nearest(x0 float64) (lo, hi int, h float64) {
	// The best range starts at the first lo whose left end is not farther than the
	// point that would come in on the right.
	n := len(l.x)
	lo = sort.Search(n-l.q, func(i int) bool { return x0-l.x[i] <= l.x[i+l.q]-x0 })
	hi = lo + l.q
	return lo, hi, math.Max(x0-l.x[lo], l.x[hi-1]-x0)
}

// weight is the tricube of point i times its own weight.
func (l *localLine) weight(i int, x0, h float64) float64 {
	k := 1.0
	if h > 0 {
		u := math.Abs(l.x[i]-x0) / h
		k = 1 - float64(u*u)*u
		k = float64(k*k) * k
	}
	if l.w != nil {
		k *= l.w[i]
	}
	return k
}

func (l *localLine) value(x0 float64) float64 {
	lo, hi, h := l.nearest(x0)
	weight := func(i int) float64 {
		k := l.weight(i, x0, h)
		if l.robust != nil {
			k *= l.robust[i]
		}
		return k
	}
	// Sums about the weighted centre: two passes keep what x and y have in common
	// from eating the digits.
	var s, sx, sy float64
	for i := lo; i < hi; i++ {
		k := weight(i)
		s += k
		sx += float64(k * (l.x[i] - x0))
		sy += float64(k * (l.y[i] - l.y[lo]))
	}
	if !(s > 0) {
		return l.plainMean(lo, hi)
	}
	mx, my := sx/s, sy/s
	var xx, xy float64
	for i := lo; i < hi; i++ {
		k := weight(i)
		dx := l.x[i] - x0 - mx
		xx += float64(k * float64(dx*dx))
		xy += float64(k * float64(dx*(l.y[i]-l.y[lo]-my)))
	}
	mean := l.y[lo] + my
	// Cleveland's guard: no slope from points closer together than 0.001 h.
	if !(xx > 1e-6*h*h*s) {
		return mean
	}
	return mean - float64(xy/xx*mx)
}

// plainMean serves where the kernel leaves nothing: all q points at distance h.
func (l *localLine) plainMean(lo, hi int) float64 {
	var s, sy float64
	for i := lo; i < hi; i++ {
		k := 1.0
		if l.w != nil {
			k = l.w[i]
		}
		if l.robust != nil {
			k *= l.robust[i]
		}
		s += k
		sy += float64(k * (l.y[i] - l.y[lo]))
	}
	if !(s > 0) {
		return math.NaN()
	}
	return l.y[lo] + sy/s
}

// downweigh sets the robustness weights from the residuals of the present fit.
func (l *localLine) downweigh(ctx context.Context) error {
	fit, err := l.atPoints(ctx)
	if err != nil {
		return err
	}
	size := make([]float64, len(fit))
	for i := range fit {
		size[i] = math.Abs(l.y[i] - fit[i])
	}
	sorted := slices.Clone(size)
	slices.Sort(sorted)
	n := len(sorted)
	scale := 6 * (sorted[(n-1)/2] + sorted[n/2]) / 2
	robust := make([]float64, n)
	for i, r := range size {
		robust[i] = 1
		if scale > 0 {
			u := r / scale
			robust[i] = 0
			if u < 1 {
				robust[i] = (1 - float64(u*u)) * (1 - float64(u*u))
			}
		}
	}
	l.robust = robust
	return nil
}

// atPoints is the fit at every x; for many points it is joined by lines between
// fewer fits.
func (l *localLine) atPoints(ctx context.Context) ([]float64, error) {
	n := len(l.x)
	if n <= robustAll {
		return l.fit(ctx, l.x)
	}
	knots := make([]float64, robustGrid)
	for k := range knots {
		knots[k] = l.x[k*(n-1)/(robustGrid-1)]
	}
	knots = slices.Compact(knots)
	v, err := l.fit(ctx, knots)
	if err != nil {
		return nil, err
	}
	out := make([]float64, n)
	k := 0
	for i, x := range l.x {
		for k+2 < len(knots) && x > knots[k+1] {
			k++
		}
		out[i] = v[k]
		if k+1 < len(knots) {
			f := (x - knots[k]) / (knots[k+1] - knots[k])
			out[i] += float64(f * (v[k+1] - v[k]))
		}
	}
	return out, nil
}
