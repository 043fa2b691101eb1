package analysis

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat"

	"thinward/analysis/difference"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/size"
)

// One crystal without deviations, its thick position with a curb or an offset and
// no exchange: the bracket holds 0, since the leading model, with a curb and an offset, is
// in it. By one slope alone even the end that deviations would take down lies above 0.
func TestBracketOfOneCrystal(t *testing.T) {
	for _, c := range []cell{{sigma: 1, curb: 0.02}, {sigma: 1, offset: 0.02}} {
		p := c.plan(1)
		p.Crystals = p.Crystals[:1]
		s, x := sized(t, p)
		e := x.Result.Exchange
		if b := x.Result.Bracket; !(b.Lo <= 0 && b.Hi >= 0) || b.Lo != e.Lo || b.Hi != e.Hi || !math.IsNaN(e.M) {
			t.Errorf("%+v: bracket %+v, exchange %+v", c, b, e)
		}
		alone, err := size.ExchangeCross(s.bracketLegs(x, difference.AxisHalfThick), nil, nil)
		if err != nil {
			t.Fatal(err)
		}
		if !(alone.Lo > 0) {
			t.Errorf("%+v: the instrument gives %.4f to %.4f, which shows nothing", c, alone.Lo, alone.Hi)
		}
	}
}

// Reported sigmas of one position that are all wrong by one factor change nothing: the
// noise model takes the factor up, in the variances of pairs too.
func TestSizesIgnoreAFactorOnSigmas(t *testing.T) {
	read := func(factor float64) (m, se, a, v float64) {
		s, x := sized(t, cell{m: 0.05, deviation: 0.3, sigma: factor}.plan(1))
		return x.Result.Exchange.M, x.Result.Exchange.SE, s.scaled[0].Noise.Position[0].A, stat.Mean(x.Input.VarThin, nil)
	}
	m, se, a, v := read(1)
	mHalf, seHalf, aHalf, vHalf := read(0.5)
	floatcmp.CheckSlice(t, "m, its error and a", []float64{mHalf, seHalf, aHalf / 2}, []float64{m, se, a}, 1e-4, 1e-6)
	floatcmp.Check(t, "variances of the thin position", vHalf, v, 0, 1e-3)
}
