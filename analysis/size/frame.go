package size

import (
	"fmt"
	"math"
)

// frame is one leg of an estimate brought to units of each position's own
// shell means. Rows that are absent have weight 0 and finite values.
type frame struct {
	in           *Input
	w, u         []float64 // counts; weights in the moments, 0 without a strength
	z, y1, y2    []float64
	sum          []float64 // of w by shell
	mean1, mean2 []float64
}

// newFrame normalises by shell. Left out, when not nil, names rows that stay in
// the shell means but enter no moment: dropping them from the means as well
// would turn m into m + (1-m)(1 - mean of the rest/mean of all).
func newFrame(name string, in *Input, w []float64, leftOut []bool, gaps bool) (*frame, error) {
	if err := in.check(name, w, gaps); err != nil {
		return nil, err
	}
	n := len(in.Z)
	f := &frame{in: in, w: make([]float64, n), u: make([]float64, n)}
	axis := make([]float64, n)
	for i := range f.w {
		if math.IsNaN(in.Thin[i]) || math.IsNaN(in.Thick[i]) {
			continue
		}
		f.w[i] = 1
		if w != nil {
			f.w[i] = w[i]
		}
		if math.IsNaN(in.Z[i]) || (leftOut != nil && leftOut[i]) {
			continue
		}
		f.u[i] = 1
		if in.Precision != nil {
			f.u[i] = in.Precision[i]
		}
		axis[i] = in.Z[i]
	}
	used := make([]float64, n)
	for i := range used {
		if f.u[i] > 0 {
			used[i] = f.w[i]
		}
	}
	var err error
	if f.y1, f.mean1, err = overShell(in.Thin, f.w, in.Shell, in.Shells); err != nil {
		return nil, fmt.Errorf("size: %s: thin position: %w", name, err)
	}
	if f.y2, f.mean2, err = overShell(in.Thick, f.w, in.Shell, in.Shells); err != nil {
		return nil, fmt.Errorf("size: %s: thick position: %w", name, err)
	}
	if f.z, _, err = overShell(axis, used, in.Shell, in.Shells); err != nil {
		return nil, fmt.Errorf("size: %s: strength axis: %w", name, err)
	}
	f.sum = make([]float64, in.Shells)
	for i, s := range in.Shell {
		f.sum[s] += f.w[i]
	}
	return f, nil
}

// overShell divides v by its weighted mean in each shell; rows of weight 0
// become 1 and empty shells have mean 1.
func overShell(v, w []float64, shell []int32, shells int) (y, mean []float64, err error) {
	mean = make([]float64, shells)
	sum := make([]float64, shells)
	for i, s := range shell {
		if w[i] > 0 {
			mean[s] += w[i] * v[i]
			sum[s] += w[i]
		}
	}
	for s := range mean {
		if sum[s] == 0 {
			mean[s] = 1
			continue
		}
		if mean[s] /= sum[s]; !(mean[s] > 0) {
			return nil, nil, fmt.Errorf("the mean of shell %d is %g over %g reflections; fewer shells or a lower resolution limit are needed", s, mean[s], sum[s])
		}
	}
	y = make([]float64, len(v))
	for i, s := range shell {
		y[i] = 1
		if w[i] > 0 {
			y[i] = v[i] / mean[s]
		}
	}
	return y, mean, nil
}

// centred returns g less its mean in each shell under weights w u.
func (f *frame) centred(g []float64) []float64 {
	mean := make([]float64, f.in.Shells)
	sum := make([]float64, f.in.Shells)
	for i, s := range f.in.Shell {
		mean[s] += f.w[i] * f.u[i] * g[i]
		sum[s] += f.w[i] * f.u[i]
	}
	c := make([]float64, len(g))
	for i, s := range f.in.Shell {
		if f.w[i]*f.u[i] > 0 {
			c[i] = g[i] - mean[s]/sum[s]
		}
	}
	return c
}

// counts gives the weight of the reflections used in any of the legs, of those
// present in any, and the number of shells used.
func counts(legs []*frame) (used, present float64, shells int) {
	seen := make([]bool, legs[0].in.Shells)
	for i, s := range legs[0].in.Shell {
		var wu, wp float64
		for _, f := range legs {
			wp = math.Max(wp, f.w[i])
			if f.u[i] > 0 {
				wu = math.Max(wu, f.w[i])
			}
		}
		used += wu
		present += wp
		if wu > 0 && !seen[s] {
			seen[s] = true
			shells++
		}
	}
	return used, present, shells
}

// rowWeight is the count weight of row i, the same in every leg that has it.
func rowWeight(legs []*frame, i int) float64 {
	var w float64
	for _, f := range legs {
		w = max(w, f.w[i])
	}
	return w
}

// present returns legs without the rows that all of them lack, as a bootstrap draws a
// third of the rows not at all, and which rows these are; nil when it is all.
func present(legs []*frame) (out []*frame, rows []int) {
	for i := range legs[0].w {
		if rowWeight(legs, i) > 0 {
			rows = append(rows, i)
		}
	}
	if len(rows) == len(legs[0].w) {
		return legs, nil
	}
	out = make([]*frame, len(legs))
	for l, f := range legs {
		in := *f.in
		in.Shell = make([]int32, len(rows))
		for k, i := range rows {
			in.Shell[k] = f.in.Shell[i]
		}
		for _, v := range []*[]float64{&in.Z, &in.Thin, &in.Thick, &in.VarThin, &in.VarThick, &in.S2, &in.ThinA, &in.ThinB, &in.Exposure, &in.Precision} {
			*v = pick(*v, rows)
		}
		g := *f
		g.in = &in
		for _, v := range []*[]float64{&g.w, &g.u, &g.z, &g.y1, &g.y2} {
			*v = pick(*v, rows)
		}
		out[l] = &g
	}
	return out, rows
}

// pick gives some rows of v; nil stays nil.
func pick(v []float64, rows []int) []float64 {
	if v == nil {
		return nil
	}
	out := make([]float64, len(rows))
	for k, i := range rows {
		out[k] = v[i]
	}
	return out
}

// PrecisionWeights returns w = 1/(v + 2 (b max(z,0))^2), v the mean of both
// variances in own-shell units over the shell, z the axis, clipped at 6, and b
// the multiplicative error of one position. They use nothing of the single
// reflection but its axis strength, so that they bias no moment. NaN on the
// axis gives 0. Both variances are needed.
func PrecisionWeights(in *Input, b float64) ([]float64, error) {
	f, err := newFrame("PrecisionWeights", in, nil, nil, false)
	if err != nil {
		return nil, err
	}
	if in.VarThin == nil || in.VarThick == nil {
		return nil, fmt.Errorf("size: PrecisionWeights: both variances are needed")
	}
	v := make([]float64, in.Shells)
	for i, s := range in.Shell {
		v[s] += (in.VarThin[i]/(f.mean1[s]*f.mean1[s]) + in.VarThick[i]/(f.mean2[s]*f.mean2[s])) / f.sum[s]
	}
	out := make([]float64, len(in.Z))
	for i, s := range in.Shell {
		if math.IsNaN(in.Z[i]) {
			continue
		}
		bz := b * math.Min(math.Max(in.Z[i], 0), 6)
		d := v[s] + 2*bz*bz
		if !(d > 0) {
			return nil, fmt.Errorf("size: PrecisionWeights: variances of shell %d are 0", s)
		}
		out[i] = 1 / d
	}
	return out, nil
}
