package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/difference"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// Blocks that flicker in the thick positions make reflections of one block alike: bands by
// blocks are wider. Without it they are as wide as by reflections.
func TestAngleBlocksSeeWhatFramesShare(t *testing.T) {
	width := func(p *simulate.Plan) (mean float64) {
		s := studyOf(t, p, &Settings{Replicates: 400, Flips: 200})
		for _, c := range s.primaryContrasts() {
			b, err := s.BlockBands(context.Background(), c)
			if err != nil {
				t.Fatal(err)
			}
			r := s.compared[c].Result
			if b.Blocks < 40 || b.Blocks > 50 || b.Why != "" || !(b.P > 0 && b.P <= 1) {
				t.Errorf("%d blocks over 120 degrees, p = %g: %s", b.Blocks, b.P, b.Why)
			}
			floatcmp.CheckSlice(t, "the curve itself", b.Mean, r.Strength.Mean, 1e-12, 0)
			if r.AngleBlocks == nil || r.AngleBlocks.Width != b.Width {
				t.Errorf("the result holds %+v", r.AngleBlocks)
			}
			mean += b.Width / 3
		}
		return mean
	}
	calm := width(simulate.Sound(3))
	flicker := width(simulate.Flawed(simulate.FlawFlicker, 3))
	t.Logf("width by blocks over that by reflections: %.3f, with flicker %.3f", calm, flicker)
	if !(calm > 0.9 && calm < 1.1) || !(flicker > calm+0.15) {
		t.Errorf("ratio %.3f without, %.3f with flicker", calm, flicker)
	}
}

func TestAngleBlocksOfPairs(t *testing.T) {
	x := &Compared{thin: &intensity.Scaled{Unique: []int32{0, 0, 1, 2}, Phi: []float64{1, 6, 1.2, -0.1}, Var: []float64{4, 1, 1, 1}}}
	x.Pairs = &difference.Pairs{Unique: []int32{0, 1, 2}, Thin: make([]float64, 3)}
	got, n, err := x.angleBlocks(2.5)
	if err != nil || n != 3 || got[0] == got[1] || got[1] == got[2] || got[0] == got[2] {
		t.Errorf("blocks %v of %d, %v: the better observation of reflection 0 is at 6 degrees", got, n, err)
	}
	x.thin.Var[0] = 0.5
	if got, n, _ = x.angleBlocks(2.5); n != 2 || got[0] != got[1] {
		t.Errorf("blocks %v of %d: now at 1 degree, with reflection 1", got, n)
	}
	x.thin.Phi[3] = math.NaN()
	if _, _, err = x.angleBlocks(2.5); err == nil {
		t.Error("a reflection without an angle has a block")
	}
}
