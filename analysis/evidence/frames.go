package evidence

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// Crossings are the observations of one position as a detector sees them. Signal is
// the expected recorded intensity of each (scale times joint intensity), Scale its
// scale; I and Var are on the common scale, and Own is the mean of the reflection in
// this position on it. All are parallel.
type Crossings struct {
	H, K, L       []int16
	Unique, Frame []int32
	I, Var, Own   []float64
	Signal, Scale []float64
}

type index struct{ h, k, l int16 }

// check refuses columns that do not belong together or have no frames.
func (c *Crossings) check() error {
	n := len(c.I)
	for _, k := range []int{len(c.H), len(c.K), len(c.L), len(c.Unique), len(c.Var), len(c.Own), len(c.Signal), len(c.Scale)} {
		if k != n {
			return fmt.Errorf("evidence: Crossings: columns differ in length")
		}
	}
	if len(c.Frame) != n || n == 0 {
		return fmt.Errorf("no frame numbers: which reflections stood on one frame is not known")
	}
	return nil
}

// onFrames lists the observations in the order of frames, and for each frame
// where its observations begin and end.
func (c *Crossings) onFrames() (order []int32, span map[int32][2]int) {
	order = make([]int32, len(c.Frame))
	for o := range order {
		order[o] = int32(o)
	}
	slices.SortFunc(order, func(a, b int32) int { return cmp.Or(cmp.Compare(c.Frame[a], c.Frame[b]), cmp.Compare(a, b)) })
	span = map[int32][2]int{}
	for i := 0; i < len(order); {
		f := c.Frame[order[i]]
		j := i
		for j < len(order) && c.Frame[order[j]] == f {
			j++
		}
		span[f] = [2]int{i, j}
		i = j
	}
	return order, span
}

// near calls f for every observation within one frame of frame.
func (c *Crossings) near(order []int32, span map[int32][2]int, frame int32, f func(o int32)) {
	for d := int32(-1); d <= 1; d++ {
		s := span[frame+d]
		for _, o := range order[s[0]:s[1]] {
			f(o)
		}
	}
}

// Bleed asks whether an observation gains when its neighbours in the lattice
// (one index up or down) stood on the same frame or the next: spots that overlap,
// or a background that runs. The predictor is the sum of the neighbours' signals,
// the slope the share of it that leaks in, taken within equivalents. Errors: no
// frames, no equivalents, no neighbours on common frames.
func Bleed(c *Crossings) (*Slope, error) {
	if err := c.check(); err != nil {
		return nil, err
	}
	byIndex := map[index][]int32{}
	for o := range c.I {
		k := index{c.H[o], c.K[o], c.L[o]}
		byIndex[k] = append(byIndex[k], int32(o))
	}
	x := make([]float64, len(c.I))
	for o := range x {
		for _, d := range [6]index{{h: 1}, {h: -1}, {k: 1}, {k: -1}, {l: 1}, {l: -1}} {
			for _, n := range byIndex[index{c.H[o] + d.h, c.K[o] + d.k, c.L[o] + d.l}] {
				if gap := c.Frame[n] - c.Frame[o]; gap >= -1 && gap <= 1 {
					x[o] += c.Signal[n] / c.Scale[o]
				}
			}
		}
	}
	return WithinEquivalents(c.Unique, c.settled(), x, c.Var, nil)
}

// settled is the intensity with what the frames around it stand off their scale
// taken out: J times the mean relative residual of the other observations within
// two frames. What is left of the scale would else look like a gain wherever
// neighbours are many.
func (c *Crossings) settled() []float64 {
	sum, weight := map[int32]float64{}, map[int32]float64{}
	own := func(o int) (r, w float64) {
		if !(c.Own[o] > 0) || math.IsInf(c.Var[o], 1) {
			return 0, 0
		}
		return c.I[o]/c.Own[o] - 1, c.Own[o] * c.Own[o] / c.Var[o]
	}
	for o, f := range c.Frame {
		r, w := own(o)
		sum[f] += w * r
		weight[f] += w
	}
	out := make([]float64, len(c.I))
	for o, f := range c.Frame {
		r, w := own(o)
		s, all := -w*r, -w
		for d := int32(-2); d <= 2; d++ {
			s += sum[f+d]
			all += weight[f+d]
		}
		out[o] = c.I[o]
		if all > 1e-9*w {
			out[o] -= math.Max(c.Own[o], 0) * s / all
		}
	}
	return out
}

// mostOnFrame bounds the reflections of a frame that DoubleScattering combines,
// strongest first, and mostCrossings the observations it looks at.
const (
	mostOnFrame   = 80
	mostCrossings = 20000
)

// DoubleScattering asks whether an observation h gains when pairs g, h-g were
// excited on its frame: U(h) = sum J_g J_(h-g) over the reflections on the frame,
// within equivalents, the frame's total as covariate. It is drawn without a verdict:
// what frames leave of their scale can look the same. Errors as of Bleed.
func DoubleScattering(c *Crossings) (*Slope, error) {
	d, err := c.double()
	if err != nil {
		return nil, err
	}
	return WithinEquivalents(d.unique, d.y, d.x, d.v, d.total)
}

// Jitter is the relative scatter Tau of whole frames, by moments
// (DerSimonian & Laird 1986, Control. Clin. Trials 7:177) from the mean relative
// residuals of the frames; Q is their weighted square sum with DF degrees of freedom.
type Jitter struct {
	Tau float64
	Q   float64
	DF  int
}

// FrameJitter measures how far whole frames stand off their scale. Residuals are
// from the position's own means, I/J - 1 with weights J^2/Var, so that deviations which
// equivalents share drop out; observations of J not above 0 are left out. Errors:
// no frames, fewer than 10 frames.
func FrameJitter(c *Crossings) (*Jitter, error) {
	if err := c.check(); err != nil {
		return nil, err
	}
	sum, weight := map[int32]float64{}, map[int32]float64{}
	for o, f := range c.Frame {
		j := c.Own[o]
		if !(j > 0) || math.IsInf(c.Var[o], 1) {
			continue
		}
		w := j * j / c.Var[o]
		sum[f] += w * (c.I[o]/j - 1)
		weight[f] += w
	}
	frames := make([]int32, 0, len(sum))
	for f := range sum {
		frames = append(frames, f)
	}
	if len(frames) < 10 {
		return nil, fmt.Errorf("%d frames are too few to judge them", len(frames))
	}
	slices.Sort(frames)
	var sw, sw2, mean float64
	for _, f := range frames {
		sw += weight[f]
		sw2 += weight[f] * weight[f]
		mean += sum[f]
	}
	mean /= sw
	out := &Jitter{DF: len(frames) - 1}
	for _, f := range frames {
		d := sum[f]/weight[f] - mean
		out.Q += weight[f] * d * d
	}
	out.Tau = math.Sqrt(math.Max(0, (out.Q-float64(out.DF))/(sw-sw2/sw)))
	return out, nil
}
