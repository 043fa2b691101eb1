package evidence

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// doubles are the columns of the regression of DoubleScattering, one entry an observation
// looked at.
type doubles struct {
	unique         []int32
	y, x, v, total []float64
}

func (c *Crossings) double() (*doubles, error) {
	if err := c.check(); err != nil {
		return nil, err
	}
	order, span := c.onFrames()
	step := 1 + (len(c.I)-1)/mostCrossings
	var rows []int32
	for o := 0; o < len(c.I); o += step {
		rows = append(rows, int32(o))
	}
	slices.SortFunc(rows, func(a, b int32) int { return cmp.Or(cmp.Compare(c.Frame[a], c.Frame[b]), cmp.Compare(a, b)) })
	unique := make([]int32, len(rows))
	y, x, v, total := make([]float64, len(rows)), make([]float64, len(rows)), make([]float64, len(rows)), make([]float64, len(rows))
	var list []int32
	strength := map[index]float64{}
	sum := 0.0
	for i, o := range rows {
		if i == 0 || c.Frame[o] != c.Frame[rows[i-1]] {
			list, sum = list[:0], 0
			clear(strength)
			c.near(order, span, c.Frame[o], func(n int32) {
				list = append(list, n)
				sum += c.Signal[n] / c.Scale[n]
			})
			slices.SortFunc(list, func(a, b int32) int {
				return cmp.Or(cmp.Compare(c.Signal[b]/c.Scale[b], c.Signal[a]/c.Scale[a]), cmp.Compare(a, b))
			})
			list = list[:min(len(list), mostOnFrame)]
			for _, n := range list {
				strength[index{c.H[n], c.K[n], c.L[n]}] = c.Signal[n] / c.Scale[n]
			}
		}
		for _, n := range list {
			rest := index{c.H[o] - c.H[n], c.K[o] - c.K[n], c.L[o] - c.L[n]}
			if j, ok := strength[rest]; ok {
				x[i] += j * c.Signal[n] / c.Scale[n]
			}
		}
		unique[i], y[i], v[i], total[i] = c.Unique[o], c.I[o], c.Var[o], sum
	}
	return &doubles{unique, y, x, v, total}, nil
}

// GainBin is one bin of the predictor of double scattering. Predictor is its mean and
// Gain the mean of the intensity less that of the equivalents, both within equivalents and
// over the noise of those; the predictor is then divided by its root mean square over all
// bins. SE is the standard error of Gain by its scatter.
type GainBin struct {
	N                   int
	Predictor, Gain, SE float64
}

// DoubleScatteringBins gives what DoubleScattering regresses in n bins of equal count, for
// drawing. Errors as there, and fewer than 10 n observations with an equivalent.
func DoubleScatteringBins(c *Crossings, n int) ([]GainBin, error) {
	d, err := c.double()
	if err != nil {
		return nil, err
	}
	w, err := newWithin(d.unique, d.y, d.x, d.v, d.total)
	if err != nil {
		return nil, err
	}
	type point struct{ p, g float64 }
	var list []point
	square := 0.0
	for o, u := range d.unique {
		if w.count[u] > 1 {
			scale := math.Sqrt(w.weight[u])
			list = append(list, point{w.x[o] * scale, w.y[o] * scale})
			square += w.x[o] * w.x[o] * w.weight[u]
		}
	}
	if n < 1 || len(list) < 10*n || square == 0 {
		return nil, fmt.Errorf("%d observations with an equivalent are too few to draw", len(list))
	}
	rms := math.Sqrt(square / float64(len(list)))
	slices.SortStableFunc(list, func(a, b point) int { return cmp.Compare(a.p, b.p) })
	out := make([]GainBin, n)
	for k := range out {
		part := list[k*len(list)/n : (k+1)*len(list)/n]
		b := &out[k]
		b.N = len(part)
		m, squares := float64(b.N), 0.0
		for _, q := range part {
			b.Predictor += q.p / m / rms
			b.Gain += q.g / m
		}
		for _, q := range part {
			squares += (q.g - b.Gain) * (q.g - b.Gain)
		}
		b.SE = math.Sqrt(squares / (m * (m - 1)))
	}
	return out, nil
}
