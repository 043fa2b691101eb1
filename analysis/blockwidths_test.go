package analysis

import (
	"math"
	"testing"

	"thinward/analysis/curve"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// Closed forms: blocks of one reflection each are the reflections; where every reflection
// stands twice beside itself and each two are a block, the error is sqrt(2) times as large.
func TestWidthsOfBlocks(t *testing.T) {
	const n = 400
	r := resample.NewSeed(3).At("widths").Stream(0)
	z, y, w, own, twos := make([]float64, n), make([]float64, n), make([]float64, n), make([]int32, n), make([]int32, n)
	for i := range z {
		z[i], own[i], twos[i] = float64(i), int32(i), int32(i/2)
		y[i], w[i] = r.Normal(), 0.5+r.Float64()
		if i%2 == 1 {
			y[i], w[i] = y[i-1], w[i-1]
		}
	}
	// Windows that cut no block.
	windows := []resample.Window{{Lo: 0, Hi: 100}, {Lo: 50, Hi: 150}, {Lo: 300, Hi: 400}}
	ratio, se := newWidths(z, y, w, own, n, windows).ratio(r)
	floatcmp.Check(t, "blocks of one", ratio, 1, 1e-12, 0)
	floatcmp.Check(t, "their scatter", se, 0, 1e-12, 0)
	ratio, _ = newWidths(z, y, w, twos, n/2, windows).ratio(r)
	floatcmp.Check(t, "blocks of twins", ratio, math.Sqrt2, 1e-12, 0)
	z[0], z[1] = math.NaN(), math.NaN()
	c := newWidths(z, y, w, twos, n/2, nil)
	if len(c.y) != n-2 || c.block[0] != 1 {
		t.Errorf("%d pairs, the first of block %d", len(c.y), c.block[0])
	}
}

// Where blocks share nothing the ratio scatters about 1 by the error that is claimed, here
// over 40 samples: to 11 % (1/sqrt(2 n)), four of which are let pass. What they share
// shows: variance 1 + (k-1) rho for k reflections of a block in a window.
func TestWidthsScatterAsClaimed(t *testing.T) {
	const n, blocks, repeats = 1500, 48, 40
	windows := curve.Windows(n, 0.05, 50, 200)
	sample := func(r *resample.Stream, shared float64) (ratio, se float64) {
		common := make([]float64, blocks)
		for b := range common {
			common[b] = shared * r.Normal()
		}
		z, y, w, block := make([]float64, n), make([]float64, n), make([]float64, n), make([]int32, n)
		for i := range z {
			block[i] = int32(r.Intn(blocks))
			z[i], w[i], y[i] = r.Float64(), 1, r.Normal()+common[block[i]]
		}
		return newWidths(z, y, w, block, blocks, windows).ratio(r)
	}
	var mean, square, claimed, wide float64
	for k := range repeats {
		r := resample.NewSeed(5).At("scatter").Stream(k)
		ratio, se := sample(r, 0)
		mean += ratio / repeats
		square += (ratio - 1) * (ratio - 1) / repeats
		claimed += se / repeats
		ratio, _ = sample(r, 1)
		wide += ratio / repeats
	}
	t.Logf("ratio %.3f, scatter %.4f, claimed %.4f; shared %.3f", mean, math.Sqrt(square), claimed, wide)
	floatcmp.Check(t, "scatter over claimed error", math.Sqrt(square)/claimed, 1, 0.45, 0)
	floatcmp.Check(t, "ratio", mean, 1, 0.03, 0)
	// A window of 75 has 75/48 others of a block beside each reflection; rho is 0.5.
	floatcmp.Check(t, "shared", wide, math.Sqrt(1+74.0/blocks*0.5), 0.06, 0)
}
