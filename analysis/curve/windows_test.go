package curve

import (
	"fmt"
	"math"
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

func seedOf(name string) resample.Seed { return resample.NewSeed(1).At("curve test", name) }

func TestWindows(t *testing.T) {
	w := Windows(40000, 0, 0, 0)
	if len(w) != 200 || w[0] != (resample.Window{Lo: 0, Hi: 1000}) || w[199].Hi != 40000 || w[199].Len() != 1001 || w[100].Len() != 2000 {
		t.Errorf("%d windows, first %v, last %v, middle %v", len(w), w[0], w[199], w[100])
	}
	for _, n := range []int{1, 2, 7, 49, 50, 51, 99, 100, 120, 199, 200, 1000, 12345} {
		for _, share := range []float64{0, 0.01, 0.3, 1} {
			list := Windows(n, share, 0, 0)
			if len(list) != min(n, 200) {
				t.Fatalf("n %d: %d windows", n, len(list))
			}
			full := max(min(50, n), int(math.Round(max(share, 0.05*boolTo(share == 0))*float64(n))))
			longest := 0
			for g, v := range list {
				if v.Lo < 0 || v.Hi > n || v.Len() < min(50, n) || v.Len() > full {
					t.Fatalf("n %d share %g window %d: %v (full %d)", n, share, g, v, full)
				}
				if g > 0 && (v.Lo < list[g-1].Lo || v.Hi < list[g-1].Hi) {
					t.Fatalf("n %d share %g: window %d goes back", n, share, g)
				}
				longest = max(longest, v.Len())
			}
			if n >= 50 && share != 1 && longest != full {
				t.Errorf("n %d share %g: longest window %d, want %d", n, share, longest, full)
			}
			if list[0].Lo != 0 || list[len(list)-1].Hi != n {
				t.Errorf("n %d share %g: ends not reached", n, share)
			}
		}
	}
	if Windows(0, 0, 0, 0) != nil || !slices.Equal(Windows(9, 0.5, 1, 1), []resample.Window{{Lo: 2, Hi: 7}}) {
		t.Errorf("%v", Windows(9, 0.5, 1, 1))
	}
}

func boolTo(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

// NIST e-Handbook 6.4.2, supplier data; R filter.
func TestMovingMean(t *testing.T) {
	x := []float64{9, 8, 9, 12, 9, 12, 11, 7, 13, 9, 11, 10}
	var three []resample.Window
	for i := 2; i < len(x); i++ {
		three = append(three, resample.Window{Lo: i - 2, Hi: i + 1})
	}
	ma := must[[]float64](t)(MovingMean(x, nil, three))
	want := []float64{8.6666667, 9.6666667, 10, 11, 10.6666667, 10, 10.3333333, 9.6666667, 11, 10}
	floatcmp.CheckSlice(t, "moving average of 3", ma, want, 5e-8, 0)
	sse := 0.0
	for i, v := range ma {
		sse += (x[i+2] - v) * (x[i+2] - v)
	}
	floatcmp.Check(t, "SSE (handbook: MSE 2.42)", sse, 24.222222, 5e-7, 0)
	// 2x4: the mean of two neighbouring means of four.
	var four []resample.Window
	for i := 0; i+4 <= len(x); i++ {
		four = append(four, resample.Window{Lo: i, Hi: i + 4})
	}
	m4 := must[[]float64](t)(MovingMean(x, nil, four))
	var centred []float64
	for i := 1; i < len(m4); i++ {
		centred = append(centred, (m4[i-1]+m4[i])/2)
	}
	floatcmp.CheckSlice(t, "centred 2x4", centred, []float64{9.5, 10, 10.75, 10.375, 10.25, 10.375, 10, 10.375}, 1e-12, 0)
	// Weights as repeats, and no weight at all.
	got := must[[]float64](t)(MovingMean([]float64{1, 4, 10}, []float64{2, 1, 0}, []resample.Window{{Lo: 0, Hi: 2}, {Lo: 0, Hi: 3}, {Lo: 2, Hi: 3}}))
	floatcmp.CheckSlice(t, "weighted", got, []float64{2, 2, math.NaN()}, 1e-14, 0)
	for _, v := range must[[]float64](t)(MovingMean(slices.Repeat([]float64{0.1}, 12), nil, three)) {
		floatcmp.Check(t, "constant", v, 0.1, 0, 0)
	}
	if _, err := MovingMean([]float64{1, math.Inf(1)}, nil, nil); err == nil || err.Error() != "curve: MovingMean: value 1 is +Inf" {
		t.Errorf("error %v", err)
	}
}

// R isoreg.
func TestIsotonic(t *testing.T) {
	for _, c := range []struct{ y, w, want []float64 }{
		{[]float64{1, 0, 4, 3, 3, 5, 4, 2, 0}, nil, []float64{.5, .5, 3, 3, 3, 3, 3, 3, 3}},
		{[]float64{1, 2, 6, 2, 3, 5, 4, 8, 7}, nil, []float64{1, 2, 11.0 / 3, 11.0 / 3, 11.0 / 3, 4.5, 4.5, 7.5, 7.5}},
		{[]float64{3, 1}, []float64{1, 3}, []float64{1.5, 1.5}},
		{[]float64{1, 2, 2, 5}, nil, []float64{1, 2, 2, 5}},
		{nil, nil, []float64{}},
	} {
		got := must[[]float64](t)(Isotonic(c.y, c.w))
		floatcmp.CheckSlice(t, "isotonic", got, c.want, 1e-12, 0)
		floatcmp.CheckSlice(t, "again", must[[]float64](t)(Isotonic(got, c.w)), got, 1e-12, 0)
	}
	if _, err := Isotonic([]float64{1, 2}, []float64{1, 0}); err == nil || err.Error() != "curve: Isotonic: weight 1 is 0" {
		t.Errorf("error %v", err)
	}
}

func TestAxes(t *testing.T) {
	floatcmp.CheckSlice(t, "signed root", SignedRoot([]float64{-4, 0, 9, math.NaN()}), []float64{-2, 0, 3, math.NaN()}, 0, 0)
	x := []float64{1, 2, 2, 5}
	floatcmp.CheckSlice(t, "rank", RankAxis(x, []float64{0, 1, 2, 3, 5, 6, math.NaN()}), []float64{0, .125, .5, .75, .875, 1, math.NaN()}, 1e-15, 0)
	floatcmp.Check(t, "middle", middle(x, 0, 4), 2, 0, 0)
	floatcmp.Check(t, "middle", middle(x, 2, 4), 3.5, 0, 0)
	floatcmp.Check(t, "middle", middle(x, 1, 4), 2, 0, 0)
	order, missing := ascending([]float64{3, math.NaN(), 1, 3})
	if !slices.Equal(order, []int32{2, 0, 3}) || missing != 1 {
		t.Errorf("%v, %d missing", order, missing)
	}
}

func TestPanics(t *testing.T) {
	y := []float64{1, 2}
	for want, f := range map[string]func(){
		"curve: Windows: share 2, min 0, grid 0":                              func() { Windows(3, 2, 0, 0) },
		"curve: MovingMean: 1 weights for 2 values":                           func() { MovingMean(y, []float64{1}, nil) },
		"curve: MovingMean: window 0 [1, 3) is empty or outside the 2 values": func() { MovingMean(y, nil, []resample.Window{{Lo: 1, Hi: 3}}) },
		"curve: RankAxis: no values":                                          func() { RankAxis(nil, y) },
		"curve: RankAxis: x is not ascending at 1":                            func() { RankAxis([]float64{2, 1}, y) },
		"curve: LocalLine: 1 x for 2 y":                                       func() { LocalLine(bg, []float64{1}, y, nil, y, nil) },
		"curve: ByStrength: 1 strengths, 2 values, 0 S2, 0 blocks":            func() { ByStrength(bg, []float64{1}, y, nil, nil) },
		"curve: ByResolution: 1 s2, 2 thin, 2 thick, 0 blocks":                func() { ByResolution(bg, []float64{1}, y, y, nil) },
	} {
		func() {
			defer func() {
				if got := fmt.Sprint(recover()); got != want {
					t.Errorf("panic %q, want %q", got, want)
				}
			}()
			f()
		}()
	}
}

// Blom and Filliben values: R 4.2.2 and scipy 1.10.1; exact n = 10 expectations
// (Harter 1961) bound the error of Blom's approximation.
func TestScores(t *testing.T) {
	floatcmp.CheckSlice(t, "Blom 5", NormalScores(5)[2:], []float64{0, .49720057, 1.17976112}, 5e-9, 0)
	floatcmp.CheckSlice(t, "Blom 10", NormalScores(10)[5:], []float64{.12258084, .37546177, .65542351, 1.00049055, 1.54663527}, 5e-9, 0)
	floatcmp.CheckSlice(t, "Harter 10", NormalScores(10)[5:], []float64{.12266775, .37576470, .65605911, 1.0013570, 1.5387527}, 0.008, 0)
	floatcmp.CheckSlice(t, "half-normal 10", HalfNormalScores(10),
		[]float64{.07649613, .20002195, .32668990, .45885059, .59958854, .75338347, .92751629, 1.13566317, 1.41001049, 1.87367227}, 5e-9, 0)
	floatcmp.CheckSlice(t, "Filliben 10", OrderMedians(10)[5:], []float64{.12121409, .37109819, .64703803, .98494667, 1.49876728}, 5e-9, 0)
	m := OrderMedians(10)
	floatcmp.Check(t, "symmetry", m[0], -m[9], 1e-12, 0)
	if NormalScores(0) == nil || len(OrderMedians(-1)) != 0 {
		t.Error("no scores of nothing")
	}
	p := must[*ProbabilityPlot](t)(NewProbabilityPlot([]float64{1.2, 2.3, .4, -.7, 3.1, 1.9, .8, 1.5, -.2, 2.7}))
	floatcmp.Check(t, "slope", p.Slope, 1.3499191121, 1e-9, 0)
	floatcmp.Check(t, "intercept", p.Intercept, 1.3, 1e-12, 0)
	floatcmp.Check(t, "r", p.R, 0.9958152483, 1e-9, 0)
	for want, x := range map[string][]float64{
		"curve: NewProbabilityPlot: 2 values, need three": {1, 2},
		"curve: NewProbabilityPlot: all 3 values are 4":   {4, 4, 4},
		"curve: NewProbabilityPlot: value 1 is NaN":       {4, math.NaN(), 4},
	} {
		if _, err := NewProbabilityPlot(x); err == nil || err.Error() != want {
			t.Errorf("error %v, want %q", err, want)
		}
	}
}
