package analysis

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/difference"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

// Angles spread evenly over +-60 degrees: the lowest 40 % reach to 24 degrees, the highest from
// 36 to 60, and the mean of 1/cos from a to b is the integral of sec, ln(tan(pi/4 + x/2)).
func TestTiltParts(t *testing.T) {
	const n = 20000
	p := &intensity.Scaled{Unique: make([]int32, n)}
	for k := range n {
		p.Phi, p.Var = append(p.Phi, 10-60+120*(float64(k)+0.5)/n), append(p.Var, 2)
	}
	low, high := tiltParts(p.Phi, 10)
	mean := func(a, b float64) float64 {
		f := func(deg float64) float64 { return math.Log(math.Tan(math.Pi/4 + deg*math.Pi/360)) }
		return (f(b) - f(a)) / ((b - a) * math.Pi / 180)
	}
	pairs := &difference.Pairs{Unique: []int32{0}, Thin: []float64{1}}
	floatcmp.Check(t, "extra way", extraWay(p, pairs, low, high, 10), mean(36, 60)-mean(0, 24), 1e-3, 0)
	floatcmp.Check(t, "low", float64(len(low)), 0.4*n, 3, 0)
	floatcmp.Check(t, "high", float64(len(high)), 0.4*n, 3, 0)
	for _, o := range high {
		if d := math.Abs(p.Phi[o] - 10); d < 35.9 {
			t.Fatalf("%g degrees count as high", d)
		}
	}
	// Weights: an observation at 60 degrees three times as good as one at 0 on the high side, one
	// at 0 on the low side.
	two := &intensity.Scaled{Unique: []int32{0, 0, 0}, Phi: []float64{0, 0, 60}, Var: []float64{1, 3, 1}}
	floatcmp.Check(t, "mean way", meanWay(two, 0), (1+1.0/3+2)/(2+1.0/3), 1e-12, 0)
	floatcmp.Check(t, "edge-on", wayOf(90, 0), 1/math.Cos(85*math.Pi/180), 1e-9, 0)
	floatcmp.Check(t, "weighted", extraWay(two, pairs, []int{0}, []int{1, 2}, 0), 0.75*2+0.25-1, 1e-12, 0)
}

// In a slab whose exchange grows as 1 - (1-m)^(1/cos), mu grows by -ln(1-m) for every
// thickness of way: the slope within the position is -ln(1-m)/t. Without it there is none.
func TestTiltSlope(t *testing.T) {
	const m = 0.25
	for _, thickens := range []bool{true, false} {
		plan := smallPlan(3)
		plan.DMin = 1.2
		for i := range plan.Crystals {
			for j := range plan.Crystals[i].Positions {
				p := &plan.Crystals[i].Positions[j]
				p.Exchange, p.Curb, p.Offset, p.Deviation, p.TiltThickens = 0, 0, 0, 0, false
				if j == len(plan.Crystals[i].Positions)-1 {
					p.Exchange, p.TiltThickens = m, thickens
				}
			}
		}
		plan.Common.Exchange, plan.Common.Deviation, plan.Common.Curb, plan.Common.Offset, plan.Common.TiltThickens = 0, 0, 0, 0, false
		s := studyOf(t, plan, &Settings{Replicates: 20, Flips: 20})
		ctx := context.Background()
		sum, weight, chi2 := 0.0, 0.0, 0.0
		for _, c := range s.Contrasts() {
			if !c.Primary {
				continue
			}
			x, err := s.Compare(ctx, c)
			if err != nil {
				t.Fatal(err)
			}
			got, err := s.tiltSlope(ctx, x)
			if err != nil {
				t.Fatal(err)
			}
			if got.Why != "" || !(got.ExtraNM > 20) || got.Pairs < 100 {
				t.Fatalf("%+v", got)
			}
			p := s.Series.Crystals[c.Crystal].Positions[c.Thick]
			want := 0.0
			if thickens {
				want = -math.Log(1-m) / p.ThicknessNM * 100
			}
			se := (got.Slope.Hi - got.Slope.Value) / 1.959963985
			sum += (got.Slope.Value - want) / (se * se)
			weight += 1 / (se * se)
			chi2 += (got.Slope.Value - want) * (got.Slope.Value - want) / (se * se)
			step := p.ThicknessNM*meanWay(x.thick, 0) - s.Series.Crystals[c.Crystal].Positions[c.Thin].ThicknessNM*meanWay(x.thin, 0)
			floatcmp.Check(t, "slope between", got.Between.Value, -math.Log(1-x.Result.Exchange.M)*100/step, 0, 1e-12)
			if !(step > p.ThicknessNM-s.Series.Crystals[c.Crystal].Positions[c.Thin].ThicknessNM) {
				t.Errorf("the way through a tilted slab grows by %g nm only", step)
			}
			floatcmp.Check(t, "slope of m", got.Slope.Value, -math.Log(1-got.M.Value)*100/got.ExtraNM, 0, 1e-12)
			t.Logf("thickens %v, %s: %.3f (%.3f to %.3f) per 100 nm, true %.3f; between positions %.3f (%.3f to %.3f); way %.0f nm, %d pairs", thickens, got.Crystal, got.Slope.Value, got.Slope.Lo, got.Slope.Hi, want, got.Between.Value, got.Between.Lo, got.Between.Hi, got.ExtraNM, got.Pairs)
			if thickens && !(got.Slope.Lo > 0) || !(got.Between.Lo > 0) {
				t.Errorf("%s: %+v", got.Crystal, got)
			}
		}
		// All crystals together: within three standard errors of the truth.
		floatcmp.Check(t, "distance from the truth over its error", sum/math.Sqrt(weight), 0, 3, 0)
		// The 0.1 % point of chi-squared with three degrees of freedom.
		if !(chi2 < 16.27) {
			t.Errorf("chi squared %.1f", chi2)
		}
	}
}

func TestTiltSlopeSaysWhatIsMissing(t *testing.T) {
	series := seriesOf(t, smallPlan(2))
	last := len(series.Crystals[0].Positions) - 1
	series.Crystals[0].Positions[last].HasTiltZero = false
	rows := *series.Crystals[1].Positions[last].Rows
	rows.Phi = nil
	series.Crystals[1].Positions[last].Rows = &rows
	s, err := New(series, &Settings{Replicates: 20, Flips: 20})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := s.Join(context.Background()); err != nil {
		t.Fatal(err)
	}
	list := s.pooled.thickness.Tilt
	if len(list) != 2 || list[0].Why == "" || list[1].Why != "no rotation angles" || !math.IsNaN(list[0].Slope.Value) || !math.IsInf(list[1].Slope.Hi, 1) {
		t.Errorf("%+v", list)
	}
}
