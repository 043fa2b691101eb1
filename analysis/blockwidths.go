package analysis

import (
	"cmp"
	"math"
	"slices"

	"thinward/analysis/resample"
)

// deals is how often reflections are dealt to blocks by chance: the scatter of that many
// is known to a tenth.
const deals = 60

// widths holds what the standard errors of a curve by reflections and by blocks are worked
// out from, pairs in order of strength.
type widths struct {
	y, w    []float64
	block   []int32
	blocks  int
	windows []resample.Window
}

// newWidths sorts pairs by strength z as the curve does: those without one are left out,
// and equal ones keep their order.
func newWidths(z, y, w []float64, block []int32, blocks int, windows []resample.Window) *widths {
	var order []int
	for i, v := range z {
		if !math.IsNaN(v) {
			order = append(order, i)
		}
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(z[a], z[b]) })
	return &widths{y: take(y, order), w: take(w, order), block: take(block, order), blocks: blocks, windows: windows}
}

// ratio is the median over the windows of the error by blocks over that by reflections, and
// its scatter over deals. The error of the mean m of a window, sum(w y)/sum(w), is
// the root of the sum over its units of (sum of w (y - m) in the unit)^2, over
// sum(w); a unit is a reflection or a block.
func (c *widths) ratio(r *resample.Stream) (ratio, se float64) {
	single := make([]float64, len(c.windows))
	for g, win := range c.windows {
		single[g] = c.window(win, nil, nil)
	}
	sum := make([]float64, c.blocks)
	ratio = c.median(single, c.block, sum)
	dealt := make([]int32, len(c.block))
	var square float64
	for range deals {
		for i, k := range r.Perm(len(dealt)) {
			dealt[i] = c.block[k]
		}
		d := c.median(single, dealt, sum) - 1
		square += d * d / deals
	}
	return ratio, math.Sqrt(square)
}

// median over the windows of the error by blocks over the error by reflections; NaN when no
// window has one.
func (c *widths) median(single []float64, block []int32, sum []float64) float64 {
	var list []float64
	for g, win := range c.windows {
		if single[g] > 0 {
			list = append(list, math.Sqrt(c.window(win, block, sum)/single[g]))
		}
	}
	if len(list) == 0 {
		return math.NaN()
	}
	slices.Sort(list)
	k := len(list)
	return (list[(k-1)/2] + list[k/2]) / 2
}

// window is the sum of squares of one window by blocks, or by reflections when block is nil.
func (c *widths) window(win resample.Window, block []int32, sum []float64) float64 {
	var top, bottom float64
	for i := win.Lo; i < win.Hi; i++ {
		top += c.w[i] * c.y[i]
		bottom += c.w[i]
	}
	mean, square := top/bottom, 0.0
	clear(sum)
	for i := win.Lo; i < win.Hi; i++ {
		d := c.w[i] * (c.y[i] - mean)
		if block == nil {
			square += d * d
		} else {
			sum[block[i]] += d
		}
	}
	for _, v := range sum {
		square += v * v
	}
	return square
}
