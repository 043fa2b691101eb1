package analysis

import (
	"context"
	"errors"
	"fmt"
	"math"

	"thinward/analysis/curve"
)

// blockDeg is the width in degrees of a block of the rotation that is drawn as one.
const blockDeg = 2.5

// AngleBlocks is the curve against strength with its bands and its test when
// not single reflections but blocks of the rotation angle are drawn and flipped: what
// neighbouring frames share (scale, bending, drift) then counts as one. A reflection
// belongs to the block in which the most precise of its thin observations was made.
type AngleBlocks struct {
	Deg    float64   `json:"deg"`
	Blocks int       `json:"blocks"`
	Grid   []float64 `json:"grid"`
	Mean   []float64 `json:"mean"`
	Lo     []float64 `json:"lo"`
	Hi     []float64 `json:"hi"`
	LoSim  []float64 `json:"lo_sim"`
	HiSim  []float64 `json:"hi_sim"`
	P      float64   `json:"p"`
	// Width is the median over the curve of the standard error of its mean by blocks over
	// that by reflections: 1 where neighbours on the rotation share nothing.
	Width float64 `json:"width_ratio"`
	// WidthSE is the standard error of Width where they share nothing: how it scatters when
	// reflections are dealt to blocks of the same sizes by chance.
	WidthSE float64 `json:"width_ratio_se"`
	Why     string  `json:"why,omitempty"`
}

// BlockBands draws the curve of a contrast by angle blocks. Without angles, or with
// fewer than ten blocks, figures are NaN and Why says so.
func (s *Study) BlockBands(ctx context.Context, c Contrast) (*AngleBlocks, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	x, err := s.compareStep(ctx, c)
	if err != nil {
		return nil, err
	}
	return s.blockBands(ctx, x)
}

// leastBlocks is the number of blocks below which a bootstrap over them says nothing: ten
// keep the achieved confidence of a percentile interval within a few points (Efron & Tibshirani
// 1993, An Introduction to the Bootstrap, chapter 6, on few units).
const leastBlocks = 10

func (s *Study) blockBands(ctx context.Context, x *Compared) (*AngleBlocks, error) {
	out := &AngleBlocks{Deg: blockDeg, P: math.NaN(), Width: math.NaN(), WidthSE: math.NaN()}
	if x.Band == nil {
		out.Why = "there is no curve against strength"
		return out, nil
	}
	blocks, n, err := x.angleBlocks(blockDeg)
	if out.Blocks = n; err != nil {
		out.Why = err.Error()
		return out, nil
	}
	if n < leastBlocks {
		out.Why = fmt.Sprintf("%d blocks of %g degrees are too few to draw from", n, blockDeg)
		return out, nil
	}
	o := s.curveSettings(x, "angle blocks")
	o.S2, o.Resample.Blocks = x.Pairs.S2, blocks
	b, err := curve.ByStrength(ctx, x.Strengths.Z, x.Pairs.Eps(), weights(x.Pairs), o)
	if err != nil {
		if ctx.Err() != nil {
			return nil, ctx.Err()
		}
		out.Why = err.Error()
		return out, nil
	}
	out.Grid, out.Mean, out.Lo, out.Hi, out.LoSim, out.HiSim, out.P = b.Grid, b.Mean, b.Lo, b.Hi, b.LoSim, b.HiSim, b.P
	out.Width, out.WidthSE = newWidths(x.Strengths.Z, x.Pairs.Eps(), weights(x.Pairs), blocks, n, b.Windows).ratio(s.seed(s.Name(x.Contrast), "deal blocks").Stream(0))
	return out, nil
}

var errNoAngles = errors.New("the observations have no angles")

// angleBlocks numbers the blocks of the pairs from 0 and says how many there are.
func (x *Compared) angleBlocks(deg float64) ([]int32, int, error) {
	if x.thin.Phi == nil || x.Contrast.Across() {
		return nil, 0, errNoAngles
	}
	best := map[int32]int{}
	for o, u := range x.thin.Unique {
		if k, ok := best[u]; math.IsNaN(x.thin.Phi[o]) || ok && !(x.thin.Var[o] < x.thin.Var[k]) {
			continue
		}
		best[u] = o
	}
	number := map[int]int32{}
	out := make([]int32, x.Pairs.Len())
	for i, u := range x.Pairs.Unique {
		o, ok := best[u]
		if !ok {
			return nil, 0, errNoAngles
		}
		k := int(math.Floor(x.thin.Phi[o] / deg))
		if _, ok := number[k]; !ok {
			number[k] = int32(len(number))
		}
		out[i] = number[k]
	}
	return out, len(number), nil
}
