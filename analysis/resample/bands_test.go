package resample

import (
	"context"
	"errors"
	"math"
	"os"
	"slices"
	"testing"
	"time"

	"gonum.org/v1/gonum/stat"

	"thinward/analysis/internal/floatcmp"
)

func sameBands(t *testing.T, a, b *BandSet, what string) {
	t.Helper()
	for _, p := range [][2][]float64{{a.Mean, b.Mean}, {a.SE, b.SE}, {a.Lo, b.Lo}, {a.Hi, b.Hi}, {a.LoSim, b.LoSim}, {a.HiSim, b.HiSim}, {a.Achieved, b.Achieved}} {
		if !slices.Equal(p[0], p[1]) {
			t.Fatalf("%s: bits differ", what)
		}
	}
	if a.Multiplier != b.Multiplier || a.AchievedSim != b.AchievedSim {
		t.Fatalf("%s: multiplier differs", what)
	}
}

func TestBandsSameBits(t *testing.T) {
	y := normals(5003, 1)
	w := make([]float64, len(y))
	blocks := make([]int32, len(y))
	for i := range w {
		w[i], blocks[i] = math.Exp(y[i]), int32(i*7919%211)
	}
	win := gridWindows(len(y), 250, 40)
	for _, c := range []struct {
		what string
		w    []float64
		o    Settings
	}{
		{"plain", nil, Settings{}},
		{"weighted", w, Settings{Level: 0.9}},
		{"blocks", w, Settings{Blocks: blocks}},
	} {
		var first *BandSet
		for _, workers := range []int{1, 2, 7, 0} {
			o := c.o
			o.Workers, o.Replicates, o.Seed = workers, 400, NewSeed(3).At("L1")
			b := must[*BandSet](t)(Bands(bg, y, c.w, win, &o))
			if first == nil {
				first = b
			}
			sameBands(t, first, b, c.what)
		}
		other := c.o
		other.Replicates, other.Seed = 400, NewSeed(3).At("L2")
		if b := must[*BandSet](t)(Bands(bg, y, c.w, win, &other)); slices.Equal(b.Lo, first.Lo) {
			t.Errorf("%s: another seed gives the same band", c.what)
		}
	}
}

// A slow, plain computation of the same bands from the public weights.
func TestBandsAgainstPlainLoop(t *testing.T) {
	n := 203
	y := normals(n, 2)
	w := make([]float64, n)
	for i := range w {
		w[i] = 0.2 + float64(i%5)
	}
	w[17] = 0
	win := []Window{{0, 50}, {3, 91}, {40, 140}, {150, 203}, {0, 203}}
	const reps = 199
	seed := NewSeed(77)
	for _, weights := range [][]float64{nil, w} {
		b := must[*BandSet](t)(Bands(bg, y, weights, win, &Settings{Replicates: reps, Seed: seed}))
		draws := make([][]float64, len(win))
		top := make([]float64, reps)
		c := make([]float64, n)
		mean := func(win Window, c []float64) float64 {
			var s, d float64
			for i := win.Lo; i < win.Hi; i++ {
				f := c[i]
				if weights != nil {
					f *= weights[i]
				}
				s += f * y[i]
				d += f
			}
			return s / d
		}
		for r := range reps {
			PoissonWeights(seed.At("bands").Stream(r), c)
			for g := range win {
				draws[g] = append(draws[g], mean(win[g], c))
			}
		}
		for g := range win {
			floatcmp.Check(t, "mean", b.Mean[g], mean(win[g], onesOf(n)), 1e-13, 0)
			se := stat.StdDev(draws[g], nil)
			floatcmp.Check(t, "SE", b.SE[g], se, 0, 1e-11)
			for r := range reps {
				top[r] = math.Max(top[r], math.Abs(draws[g][r]-mean(win[g], onesOf(n)))/se)
			}
			slices.Sort(draws[g])
			// 199 replicates: (R+1)p is the 5th and the 195th.
			floatcmp.Check(t, "lo", b.Lo[g], draws[g][4], 1e-12, 0)
			floatcmp.Check(t, "hi", b.Hi[g], draws[g][194], 1e-12, 0)
			floatcmp.Check(t, "achieved", b.Achieved[g], 191.0/199, 1e-12, 0)
		}
		slices.Sort(top)
		floatcmp.Check(t, "multiplier", b.Multiplier, top[189], 1e-10, 0)
		floatcmp.Check(t, "simultaneous", b.HiSim[1], b.Mean[1]+b.Multiplier*b.SE[1], 1e-12, 0)
	}
}

// The bootstrap error of a mean of m values is sqrt((m-1)/m) s/sqrt(m) and, with
// Poisson weights, that over sqrt(1) to order 1/m: closed
// form (Efron & Tibshirani 1993, An Introduction to the Bootstrap, chapter 5).
func TestBandsErrorOfMean(t *testing.T) {
	y := normals(1000, 4)
	b := must[*BandSet](t)(Bands(bg, y, nil, []Window{{0, 1000}, {100, 400}}, &Settings{Replicates: 6000}))
	for g, w := range []Window{{0, 1000}, {100, 400}} {
		m := float64(w.Len())
		want := math.Sqrt((m-1)/m) * stat.StdDev(y[w.Lo:w.Hi], nil) / math.Sqrt(m)
		floatcmp.Check(t, "SE", b.SE[g], want, 4*want/math.Sqrt(2*6000), 0)
		floatcmp.Check(t, "half width", (b.Hi[g]-b.Lo[g])/2, 1.96*want, 0, 0.05)
	}
}

func TestBandsExactMatchesScalars(t *testing.T) {
	b := must[*BandSet](t)(Bands(bg, mouseCtl, nil, []Window{{0, 9}}, nil))
	floatcmp.Check(t, "SE", b.SE[0], 13.3488592732, 1e-9, 0)
	if b.Scheme != SchemeExact || b.Replicates != 24310 {
		t.Errorf("%v with %d resamples", b.Scheme, b.Replicates)
	}
	s := must[*ScalarBoot](t)(Scalars(bg, 9, weightedMean(mouseCtl), &Settings{NoBCa: true}))
	floatcmp.Check(t, "lo", b.Lo[0], s.Lo[0], 1e-9, 0)
	floatcmp.Check(t, "hi", b.Hi[0], s.Hi[0], 1e-9, 0)
	never := must[*BandSet](t)(Bands(bg, mouseCtl, nil, []Window{{0, 9}}, &Settings{ExactLimit: -1, Replicates: 20000}))
	if never.Scheme != SchemeMultinomial {
		t.Errorf("scheme %v", never.Scheme)
	}
	floatcmp.Check(t, "multinomial SE", never.SE[0], 13.3488592732, 0, 4/math.Sqrt(2*20000))
}

// Independent windows: the multiplier is Sidak's, between one window's 1.96 and
// Bonferroni's: normal quantiles at (1 + 0.95^(1/K))/2 and 1 - 0.025/K by R qnorm, for
// K = 1, 5, 20, 50.
func TestBandsMultiplier(t *testing.T) {
	for _, c := range []struct {
		k                 int
		sidak, bonferroni float64
	}{{1, 1.95996398454, 1.95996398454}, {5, 2.56876316801, 2.57582930355}, {20, 3.01599453349, 3.02334143974}, {50, 3.28347981613, 3.29052673149}} {
		y := normals(c.k*200, uint64(c.k))
		var win []Window
		for g := range c.k {
			win = append(win, Window{200 * g, 200 * (g + 1)})
		}
		b := must[*BandSet](t)(Bands(bg, y, nil, win, &Settings{Replicates: 8000}))
		floatcmp.Check(t, "independent windows", b.Multiplier, c.sidak, 0.1, 0)
		floatcmp.Check(t, "achieved", b.AchievedSim, 0.95, 1e-3, 0)
		same := make([]Window, c.k)
		for g := range same {
			same[g] = Window{0, c.k * 200}
		}
		one := must[*BandSet](t)(Bands(bg, y, nil, same, &Settings{Replicates: 8000}))
		floatcmp.Check(t, "identical windows", one.Multiplier, 1.95996398454, 0.06, 0)
		over := must[*BandSet](t)(Bands(bg, y, nil, gridWindows(len(y), 150, c.k+1), &Settings{Replicates: 4000}))
		if !(over.Multiplier > 1.85 && over.Multiplier < normQuantile((1+math.Pow(.95, 1/float64(c.k+1)))/2)+0.1) {
			t.Errorf("overlapping windows: multiplier %g", over.Multiplier)
		}
	}
}

func TestBandsIdentities(t *testing.T) {
	n := 1000
	y := normals(n, 5)
	win := gridWindows(n, 100, 20)
	o := &Settings{Replicates: 300, Seed: NewSeed(9)}
	base := must[*BandSet](t)(Bands(bg, y, nil, win, o))
	flat := make([]float64, n)
	triple, minus, far := slices.Clone(flat), slices.Clone(flat), slices.Clone(flat)
	for i := range y {
		flat[i], triple[i], minus[i], far[i] = 0.1, 3*y[i], -y[i], 1e9+y[i]
	}
	b := must[*BandSet](t)(Bands(bg, flat, nil, win, o))
	for g := range win {
		if b.Mean[g] != 0.1 || b.Lo[g] != 0.1 || b.Hi[g] != 0.1 || b.LoSim[g] != 0.1 || b.HiSim[g] != 0.1 || b.SE[g] != 0 {
			t.Fatalf("constant in, window %d: %g %g %g", g, b.Mean[g], b.Lo[g], b.Hi[g])
		}
	}
	b = must[*BandSet](t)(Bands(bg, triple, nil, win, o))
	m := must[*BandSet](t)(Bands(bg, minus, nil, win, o))
	f := must[*BandSet](t)(Bands(bg, far, nil, win, o))
	for g := range win {
		floatcmp.Check(t, "scaled", b.Lo[g], 3*base.Lo[g], 1e-13, 1e-12)
		floatcmp.Check(t, "scaled", b.HiSim[g], 3*base.HiSim[g], 1e-13, 1e-12)
		floatcmp.Check(t, "mirrored", m.Lo[g], -base.Hi[g], 1e-13, 1e-12)
		floatcmp.Check(t, "mirrored", m.HiSim[g], -base.LoSim[g], 1e-13, 1e-12)
		// mean/sd = 1e9: the values carry 1e-7, and no more may be lost.
		floatcmp.Check(t, "far from zero", f.Lo[g]-1e9, base.Lo[g], 3e-7, 0)
		floatcmp.Check(t, "far from zero", f.SE[g], base.SE[g], 3e-7, 0)
	}
	// Any order inside a window that all windows share: the plain mean stays.
	whole := []Window{{0, n}}
	rev := slices.Clone(y)
	slices.Reverse(rev)
	p, q := must[*BandSet](t)(Bands(bg, y, nil, whole, o)), must[*BandSet](t)(Bands(bg, rev, nil, whole, o))
	floatcmp.Check(t, "permuted", q.Mean[0], p.Mean[0], 1e-14, 0)
	// Weights all 2 are weights all 1.
	two := make([]float64, n)
	for i := range two {
		two[i] = 2
	}
	w := must[*BandSet](t)(Bands(bg, y, two, win, o))
	floatcmp.CheckSlice(t, "weights all 2", w.Lo, base.Lo, 1e-13, 0)
	// Own blocks are no blocks.
	ids := make([]int32, n)
	for i := range ids {
		ids[i] = int32(5*n - 3*i)
	}
	withIDs := *o
	withIDs.Blocks = ids
	sameBands(t, base, must[*BandSet](t)(Bands(bg, y, nil, win, &withIDs)), "each its own block")
	sameBands(t, base, must[*BandSet](t)(Bands(bg, y, nil, win, o)), "second run")
}

func TestBandsDefaults(t *testing.T) {
	y := normals(100, 1)
	win := []Window{{0, 100}}
	a := must[*BandSet](t)(Bands(bg, y, nil, win, nil))
	b := must[*BandSet](t)(Bands(bg, y, nil, win, &Settings{}))
	c := must[*BandSet](t)(Bands(bg, y, nil, win, &Settings{Replicates: 2000, Level: 0.95, Seed: NewSeed(0)}))
	sameBands(t, a, b, "nil and zero")
	sameBands(t, a, c, "zero and the documented defaults")
	if a.Replicates != 2000 || a.Level != 0.95 || a.N[0] != 100 {
		t.Errorf("%+v", a)
	}
}

func TestBandsTooLittle(t *testing.T) {
	y := normals(60, 1)
	b := must[*BandSet](t)(Bands(bg, y, nil, []Window{{0, 5}, {0, 6}, {0, 60}}, &Settings{Replicates: 1000}))
	if !math.IsInf(b.Lo[0], -1) || !math.IsInf(b.Hi[0], 1) || !math.IsInf(b.HiSim[0], 1) || math.IsInf(b.Hi[2], 0) || math.IsInf(b.HiSim[2], 0) {
		t.Errorf("lo %v hi %v", b.Lo, b.Hi)
	}
	if len(b.Warnings) == 0 || b.Warnings[0].Code != CodeFewUnits ||
		b.Warnings[0].Text != "1 of 3 windows hold fewer than 6 units (as few as 5); an interval at 95 % needs 6, so theirs is infinite" {
		t.Errorf("warnings %v", b.Warnings)
	}
	b = must[*BandSet](t)(Bands(bg, y, nil, []Window{{0, 60}}, &Settings{Replicates: 30}))
	if !math.IsInf(b.Lo[0], -1) || !math.IsInf(b.Hi[0], 1) || len(b.Warnings) != 1 || b.Warnings[0].Code != CodeFewDraws {
		t.Errorf("30 replicates: %g %g, warnings %v", b.Lo[0], b.Hi[0], b.Warnings)
	}
	for level, want := range map[float64]int{0.5: 2, 0.9: 5, 0.95: 6, 0.99: 8} {
		if got := UnitsNeeded(level); got != want {
			t.Errorf("units for %g: %d, want %d", level, got, want)
		}
	}
	floatcmp.Check(t, "attainable", AttainableConfidence(5), 0.9375, 0, 0)
	floatcmp.Check(t, "attainable", AttainableConfidence(0), 0, 0, 0)
}

func TestBandsErrors(t *testing.T) {
	y := []float64{1, 2, 3}
	for _, c := range []struct {
		want string
		y, w []float64
		win  []Window
		o    *Settings
	}{
		{"resample: Bands: no values", nil, nil, nil, nil},
		{"resample: Bands: value 1 is NaN", []float64{1, math.NaN()}, nil, nil, nil},
		{"resample: Bands: value 0 is +Inf", []float64{math.Inf(1)}, nil, nil, nil},
		{"resample: Bands: weight 2 is -1", y, []float64{1, 1, -1}, nil, nil},
		{"resample: Bands: weight 0 is NaN", y, []float64{math.NaN(), 1, 1}, nil, nil},
		{"resample: Bands: window 0 [2, 4) is empty or outside the 3 values", y, nil, []Window{{2, 4}}, nil},
		{"resample: Bands: window 1 [2, 2) is empty or outside the 3 values", y, nil, []Window{{0, 1}, {2, 2}}, nil},
		{"resample: Bands: window 0 [0, 2) has no weight", y, []float64{0, 0, 1}, []Window{{0, 2}}, nil},
		{"resample: Level -0.5 is not between 0 and 1", y, nil, nil, &Settings{Level: -0.5}},
	} {
		if _, err := Bands(bg, c.y, c.w, c.win, c.o); err == nil || err.Error() != c.want {
			t.Errorf("error %v, want %q", err, c.want)
		}
	}
}

func TestBandsLeaveInputsAlone(t *testing.T) {
	y, w := normals(80, 1), onesOf(80)
	blocks := make([]int32, 80)
	win := []Window{{30, 80}, {0, 60}}
	for i := range blocks {
		blocks[i] = int32(i / 2)
	}
	y0, w0, b0, win0 := slices.Clone(y), slices.Clone(w), slices.Clone(blocks), slices.Clone(win)
	last := 0
	o := &Settings{Blocks: blocks, Progress: func(done, total int) {
		if done <= last || total != 2000 {
			t.Errorf("progress %d of %d after %d", done, total, last)
		}
		last = done
	}}
	must[*BandSet](t)(Bands(bg, y, w, win, o))
	if last != 2000 {
		t.Errorf("progress ended at %d", last)
	}
	o.Progress = nil
	must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Windows: win}}, o))
	if !slices.Equal(y, y0) || !slices.Equal(w, w0) || !slices.Equal(blocks, b0) || !slices.Equal(win, win0) {
		t.Error("an input was changed")
	}
}

func TestBandsCancel(t *testing.T) {
	y := normals(200000, 1)
	win := gridWindows(len(y), 4000, 200)
	for name, f := range map[string]func(ctx context.Context) error{
		"bands": func(ctx context.Context) error {
			_, err := Bands(ctx, y, nil, win, &Settings{Replicates: 50000})
			return err
		},
		"flips": func(ctx context.Context) error {
			_, err := FlipTest(ctx, y, []FlipSet{{Windows: win}}, &Settings{Replicates: 50000})
			return err
		},
	} {
		ctx, cancel := context.WithCancel(bg)
		var at time.Time
		time.AfterFunc(50*time.Millisecond, func() { at = time.Now(); cancel() })
		if err := f(ctx); !errors.Is(err, context.Canceled) {
			t.Fatalf("%s: error %v", name, err)
		}
		if d := time.Since(at); d > 500*time.Millisecond {
			t.Errorf("%s: returned %v after the cancellation", name, d)
		}
	}
}

// Coverage of the true curve on independent data: the window mean of a straight
// line in noise. Limits are 4 binomial standard errors, with 0.02 for the small
// undercoverage of percentiles in windows of 50.
func TestBandsCoverage(t *testing.T) {
	series, reps := 60, 300
	if os.Getenv("THINWARD_FULL") != "" {
		series, reps = 1000, 2000
	}
	const n = 1000
	win := gridWindows(n, 50, 40)
	slope := func(i int) float64 { return float64(i) / n }
	var point, sim float64
	for s := range series {
		st := NewSeed(31).At("coverage").Stream(s)
		y := make([]float64, n)
		for i := range y {
			y[i] = slope(i) + st.Normal()
		}
		b := must[*BandSet](t)(Bands(bg, y, nil, win, &Settings{Replicates: reps, Seed: NewSeed(uint64(s))}))
		all := 1.0
		for g, w := range win {
			truth := 0.0
			for i := w.Lo; i < w.Hi; i++ {
				truth += slope(i) / float64(w.Len())
			}
			if b.Lo[g] <= truth && truth <= b.Hi[g] {
				point += 1 / float64(len(win)*series)
			}
			if truth < b.LoSim[g] || truth > b.HiSim[g] {
				all = 0
			}
		}
		sim += all / float64(series)
	}
	t.Logf("%d series: pointwise %.3f, simultaneous %.3f", series, point, sim)
	floatcmp.Check(t, "pointwise coverage", point, 0.945, 0.02+4*math.Sqrt(.05*.95/float64(series*10)), 0)
	floatcmp.Check(t, "simultaneous coverage", sim, 0.94, 0.03+4*math.Sqrt(.05*.95/float64(series)), 0)
}
