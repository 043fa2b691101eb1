package curve

import (
	"context"
	"errors"
	"fmt"
	"math"

	"thinward/analysis/intensity"
	"thinward/analysis/resample"
)

// Shells is the curve by resolution.
type Shells struct {
	// S2Lo, S2Hi and S2 are the least, greatest and mean sin^2(theta)/lambda^2 of
	// each shell, 1/angstrom^2; N the reflections in it.
	S2Lo, S2Hi, S2 []float64
	N              []int
	// LnRatio is ln(<thick>/<thin>) of each shell with its bands, on the scale of the
	// given intensities; Overall that of all reflections together.
	LnRatio, SE, Lo, Hi, LoSim, HiSim []float64
	Overall                           float64
	// DeltaB is B_thick - B_thin (angstrom^2) of the line LnRatio = Intercept - 2
	// DeltaB s^2 with weights 1/SE^2, and Share the share of the weighted variation
	// between shells that the line takes, noise included.
	DeltaB, DeltaBSE, DeltaBLo, DeltaBHi float64
	Intercept, Share                     float64
	// Rest is what B does not explain, with its bands; Chi2 of Rest on DF degrees of
	// freedom and its tail P.
	Rest, RestLo, RestHi, RestLoSim, RestHiSim []float64
	Chi2                                       float64
	DF                                         int
	P                                          float64
	Level, Multiplier                          float64
	Warnings                                   []intensity.Warning
}

// DefaultShells is the number of shells of ByResolution.
const DefaultShells = 12

// CodeWeakShell marks shells whose mean intensity is not clear of zero.
const CodeWeakShell = "weak-shell"

// clearOfZero is how many standard errors both sums of a shell must lie above 0.
const clearOfZero = 5

// ByResolution draws ln(<thick>/<thin>) by shell of s2 (sin^2(theta)/lambda^2,
// 1/angstrom^2), a ratio of sums over Settings.Shells equal-count shells, with
// bootstrap bands over reflections (or Settings.Resample.Blocks).
//
// thin and thick are intensities of the same reflections under one overall scale
// each and no B, or the line takes away what it should show. A shell in which
// either mean is not five standard errors above zero is NaN with an infinite band
// and a warning. With fewer than three shells left the line, Rest and their
// figures are NaN. It panics when lengths differ; no reflections, fewer than two
// in a shell, a value that is not finite, or no usable shell are errors.
func ByResolution(ctx context.Context, s2, thin, thick []float64, o *Settings) (*Shells, error) {
	var s Settings
	if o != nil {
		s = *o
	}
	if len(thin) != len(s2) || len(thick) != len(s2) || (s.Resample.Blocks != nil && len(s.Resample.Blocks) != len(s2)) {
		panic(fmt.Sprintf("curve: ByResolution: %d s2, %d thin, %d thick, %d blocks", len(s2), len(thin), len(thick), len(s.Resample.Blocks)))
	}
	for _, list := range [][]float64{s2, thin, thick} {
		if err := checkColumn("ByResolution", list, nil); err != nil {
			return nil, err
		}
	}
	shells := s.Shells
	if shells == 0 {
		shells = DefaultShells
	}
	if shells < 1 || len(s2) < 2*shells {
		return nil, fmt.Errorf("curve: ByResolution: %d reflections for %d shells", len(s2), shells)
	}
	order, _ := ascending(s2)
	c := &Shells{}
	var used []resample.Window
	var of []int
	sorted := pick(s2, order)
	a, b := pick(thin, order), pick(thick, order)
	for k := range shells {
		w := resample.Window{Lo: k * len(order) / shells, Hi: (k + 1) * len(order) / shells}
		c.S2Lo, c.S2Hi = append(c.S2Lo, sorted[w.Lo]), append(c.S2Hi, sorted[w.Hi-1])
		c.S2, c.N = append(c.S2, meanOf(sorted[w.Lo:w.Hi], nil)), append(c.N, w.Len())
		if standsClear(a[w.Lo:w.Hi]) && standsClear(b[w.Lo:w.Hi]) {
			used, of = append(used, w), append(of, k)
		}
	}
	if len(used) == 0 {
		return nil, errors.New("curve: ByResolution: no shell has a mean intensity clear of zero")
	}
	if bad := shells - len(used); bad > 0 {
		c.Warnings = append(c.Warnings, intensity.Warning{Code: CodeWeakShell, Where: "resolution",
			Text: fmt.Sprintf("%d of %d shells have a mean intensity that is not %d standard errors above zero and are left out", bad, shells, clearOfZero)})
	}
	ro := s.Resample
	ro.NoBCa = true
	if ro.Blocks != nil {
		ro.Blocks = make([]int32, len(order))
		for k, i := range order {
			ro.Blocks[k] = s.Resample.Blocks[i]
		}
	}
	c.Overall = math.Log(meanOf(thick, nil) / meanOf(thin, nil))
	draws, err := resample.Scalars(ctx, len(order), lnRatios(a, b, used), &ro)
	if err != nil {
		return nil, err
	}
	if err := c.fill(ctx, draws, of, &ro); err != nil {
		return nil, err
	}
	return c, nil
}

// standsClear reports whether the mean of x is well above zero.
func standsClear(x []float64) bool {
	m, ss := meanOf(x, nil), 0.0
	for _, v := range x {
		ss += float64((v - m) * (v - m))
	}
	n := float64(len(x))
	return m > clearOfZero*math.Sqrt(ss/n/(n-1))
}

func lnRatios(thin, thick []float64, windows []resample.Window) func([]float64) ([]float64, error) {
	return func(w []float64) ([]float64, error) {
		out := make([]float64, len(windows))
		for k, win := range windows {
			var a, b float64
			for i := win.Lo; i < win.Hi; i++ {
				a += float64(w[i] * thin[i])
				b += float64(w[i] * thick[i])
			}
			out[k] = math.Log(b / a)
		}
		return out, nil
	}
}
