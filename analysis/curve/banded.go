package curve

import (
	"context"
	"errors"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
	"thinward/analysis/resample"
)

// Settings steer ByStrength and ByResolution. nil and zero fields mean the defaults.
type Settings struct {
	// Share, Min and Grid are those of Windows; 0 = 0.05, 50, 200.
	Share     float64
	Min, Grid int
	// Local draws a local line (tricube, as many neighbours as a full window holds)
	// instead of the moving mean. The flip test stays that of the windows.
	Local bool
	// Plain draws the unweighted curve; the weights then serve the test alone.
	Plain bool
	// S2, parallel to the strengths, adds windows along the resolution to the flip
	// test, under the same flips; nil = strength alone.
	S2 []float64
	// NoTest leaves out the flip test.
	NoTest bool
	// Flips is the number of random flips of the test; 0 = as many as replicates.
	Flips int
	// Shells is the number of equal-count shells of ByResolution; 0 = 12.
	Shells int
	// Resample are the settings of the bootstrap and of the flips; Blocks is parallel
	// to the strengths.
	Resample resample.Settings
}

// Banded is a curve with its bands, one entry a grid point: the averaged curve,
// given this axis. Grid is the strength at the middle rank of each window.
type Banded struct {
	Grid, Mean, SE       []float64
	Lo, Hi, LoSim, HiSim []float64
	// N is the number of pairs behind each point.
	N       []int
	Windows []resample.Window
	Level   float64
	// Multiplier and AchievedSim are those of the simultaneous band, Achieved that of
	// the pointwise one at each point (see resample.BandSet).
	Multiplier, AchievedSim float64
	Achieved                []float64
	// P is the p-value of the flip test, NaN without one; Flip its details: set 0 is
	// the strength, set 1 the resolution.
	P    float64
	Flip *resample.FlipResult
	// Used and Unavailable count the pairs with and without a strength on this axis.
	Used, Unavailable int
	Warnings          []intensity.Warning
}

// ByStrength draws y (in eps units) against strength with weights w (S^2/v of each
// pair, nil = all 1), with bootstrap bands and the flip test of w y.
//
// A strength of NaN means that the axis does not reach this pair: it is left out,
// also from the windows along the resolution, and counted. Pairs of equal strength
// keep their order. It panics when lengths differ; no pair with a strength, and a
// value that is not finite, are errors. Inputs are not changed.
func ByStrength(ctx context.Context, strength, y, w []float64, o *Settings) (*Banded, error) {
	var s Settings
	if o != nil {
		s = *o
	}
	if err := checkPairs(strength, y, w, s.S2, s.Resample.Blocks); err != nil {
		return nil, err
	}
	order, missing := ascending(strength)
	if len(order) == 0 {
		return nil, fmt.Errorf("curve: ByStrength: none of %d pairs has a strength", len(strength))
	}
	p := pairs{x: pick(strength, order), y: pick(y, order), w: pick(w, order), s2: pick(s.S2, order)}
	if s.Resample.Blocks != nil {
		blocks := make([]int32, len(order))
		for k, i := range order {
			blocks[k] = s.Resample.Blocks[i]
		}
		s.Resample.Blocks = blocks
	}
	windows := Windows(len(order), s.Share, s.Min, s.Grid)
	b := &Banded{Windows: windows, Used: len(order), Unavailable: missing, P: math.NaN()}
	for _, win := range windows {
		b.Grid = append(b.Grid, middle(p.x, win.Lo, win.Hi))
		b.N = append(b.N, win.Len())
	}
	set, err := p.bands(ctx, b, &s)
	if err != nil {
		return nil, err
	}
	b.Mean, b.SE, b.Lo, b.Hi, b.LoSim, b.HiSim = set.Mean, set.SE, set.Lo, set.Hi, set.LoSim, set.HiSim
	b.Level, b.Multiplier, b.AchievedSim, b.Achieved, b.Warnings = set.Level, set.Multiplier, set.AchievedSim, set.Achieved, set.Warnings
	if s.NoTest {
		return b, nil
	}
	if b.Flip, err = p.test(ctx, windows, &s); err != nil {
		return nil, err
	}
	b.P = b.Flip.P
	return b, nil
}

type pairs struct{ x, y, w, s2 []float64 }

func checkPairs(strength, y, w, s2 []float64, blocks []int32) error {
	n := len(strength)
	if len(y) != n || (s2 != nil && len(s2) != n) || (blocks != nil && len(blocks) != n) {
		panic(fmt.Sprintf("curve: ByStrength: %d strengths, %d values, %d S2, %d blocks", n, len(y), len(s2), len(blocks)))
	}
	if err := checkColumn("ByStrength", y, w); err != nil {
		return err
	}
	for i, v := range strength {
		if math.IsInf(v, 0) {
			return fmt.Errorf("curve: ByStrength: strength %d is %g", i, v)
		}
	}
	for i, v := range s2 {
		if math.IsNaN(v) || math.IsInf(v, 0) {
			return fmt.Errorf("curve: ByStrength: S2 %d is %g", i, v)
		}
	}
	return nil
}

func (p *pairs) bands(ctx context.Context, b *Banded, s *Settings) (*resample.BandSet, error) {
	w := p.w
	if s.Plain {
		w = nil
	}
	if !s.Local {
		return resample.Bands(ctx, p.y, w, b.Windows, &s.Resample)
	}
	q := 0
	for _, win := range b.Windows {
		q = max(q, win.Len())
	}
	line := newFixedLine(p.x, p.y, w, b.Grid, q)
	for g := range b.N {
		b.N[g] = q
	}
	o := s.Resample
	o.NoBCa = true
	draws, err := resample.Scalars(ctx, len(p.x), line.values, &o)
	if err != nil {
		return nil, err
	}
	set, err := resample.BandsOf(ctx, draws, &s.Resample)
	if err != nil {
		return nil, err
	}
	for _, list := range [][]float64{set.Mean, set.Lo, set.Hi, set.LoSim, set.HiSim} {
		for g := range list {
			list[g] += line.centre
		}
	}
	return set, nil
}

func (p *pairs) test(ctx context.Context, windows []resample.Window, s *Settings) (*resample.FlipResult, error) {
	z := slices.Clone(p.y)
	if p.w != nil {
		for i := range z {
			z[i] *= p.w[i]
		}
	}
	sets := []resample.FlipSet{{Windows: windows}}
	if p.s2 != nil {
		order, _ := ascending(p.s2)
		sets = append(sets, resample.FlipSet{Order: order, Windows: windows})
	}
	o := s.Resample
	if s.Flips > 0 {
		o.Replicates = s.Flips
	}
	return resample.FlipTest(ctx, z, sets, &o)
}

// fixedLine is a local line at fixed points with fixed kernels, for many sets of
// weights: one pass over five precomputed columns a point. Values are those of y
// less centre.
type fixedLine struct {
	centre float64
	points []kernel
}

type kernel struct {
	lo                  int
	h                   float64
	k, kx, kxx, ky, kxy []float64
}

func newFixedLine(x, y, w, at []float64, q int) *fixedLine {
	l := &localLine{x: x, y: y, w: w, q: min(max(q, 2), len(x))}
	f := &fixedLine{centre: meanOf(y, w)}
	for _, x0 := range at {
		lo, hi, h := l.nearest(x0)
		c := kernel{lo: lo, h: h}
		for i := lo; i < hi; i++ {
			k, dx := l.weight(i, x0, h), l.x[i]-x0
			c.k = append(c.k, k)
			c.kx = append(c.kx, k*dx)
			c.kxx = append(c.kxx, k*dx*dx)
			c.ky = append(c.ky, k*(y[i]-f.centre))
			c.kxy = append(c.kxy, k*dx*(y[i]-f.centre))
		}
		f.points = append(f.points, c)
	}
	return f
}

var errNothingDrawn = errors.New("curve: a local line has no weight left")

func (f *fixedLine) values(weights []float64) ([]float64, error) {
	out := make([]float64, len(f.points))
	for g := range f.points {
		c := &f.points[g]
		var s, sx, sxx, sy, sxy float64
		for j, v := range weights[c.lo : c.lo+len(c.k)] {
			if v == 0 {
				continue
			}
			s += float64(v * c.k[j])
			sx += float64(v * c.kx[j])
			sxx += float64(v * c.kxx[j])
			sy += float64(v * c.ky[j])
			sxy += float64(v * c.kxy[j])
		}
		if !(s > 0) {
			return nil, errNothingDrawn
		}
		mx, my := sx/s, sy/s
		out[g] = my
		if xx := sxx/s - float64(mx*mx); xx > 1e-6*c.h*c.h {
			out[g] = my - float64((sxy/s-float64(mx*my))/xx*mx)
		}
	}
	return out, nil
}
