package resample

import (
	"fmt"
	"math"
	"os"
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

var (
	darwin = []float64{49, -67, 8, 16, 6, 23, 28, 41, 14, 29, 56, 24, 75, 60, -48}
	sleep  = []float64{-1.2, -2.4, -1.3, -1.3, 0, -1, -1.8, -0.8, -4.6, -1.4}
)

func whole(n int) []FlipSet { return []FlipSet{{Windows: []Window{{0, n}}}} }

// Darwin's maize (Fisher 1935): 1726 of 32768; Student's sleep data: 4 of 1024.
func TestFlipTestExactSums(t *testing.T) {
	for _, c := range []struct {
		name         string
		y            []float64
		count, flips int
	}{{"darwin", darwin, 1726, 32768}, {"sleep", sleep, 4, 1024}} {
		for _, sum := range []bool{true, false} {
			r := must[*FlipResult](t)(FlipTest(bg, c.y, whole(len(c.y)), &Settings{Sum: sum}))
			if !r.Exact || r.Count != c.count || r.Flips != c.flips {
				t.Errorf("%s (sum %v): %d of %d, want %d of %d", c.name, sum, r.Count, r.Flips, c.count, c.flips)
			}
			floatcmp.Check(t, c.name, r.P, float64(c.count)/float64(c.flips), 0, 0)
			floatcmp.Check(t, "smallest p", r.Smallest, 2/float64(c.flips), 0, 0)
		}
	}
}

// Six pairs by three bins, all 64 flips (an own example, enumerated by numpy): a
// pair is one unit, its three values one element in each bin.
func TestFlipTestMaximum(t *testing.T) {
	d := [6][3]float64{{1.2, .4, -.3}, {.8, -.2, .5}, {1.5, .9, .1}, {.3, .6, -.4}, {1.1, -.1, .2}, {.9, .7, -.6}}
	var y []float64
	var pair []int32
	for bin := range 3 {
		for i := range d {
			y, pair = append(y, d[i][bin]), append(pair, int32(i))
		}
	}
	bins := []Window{{0, 6}, {6, 12}, {12, 18}}
	for _, c := range []struct {
		sum         bool
		observed    []float64
		single, own [3]int
	}{
		{true, []float64{5.8, 2.3, -0.5}, [3]int{2, 26, 62}, [3]int{2, 8, 44}},
		// t of six values is a rising function of sum/sqrt(sum of squares).
		{false, []float64{math.NaN(), math.NaN(), math.NaN()}, [3]int{2, 14, 58}, [3]int{2, 8, 44}},
	} {
		r := must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Windows: bins}}, &Settings{Blocks: pair, Sum: c.sum}))
		if r.Units != 6 || r.Flips != 64 || r.Set != 0 || r.Window != 0 || r.Count != c.single[0] {
			t.Errorf("%+v", r)
		}
		for g := range bins {
			floatcmp.Check(t, "single-step count", 64*r.Adjusted[0][g], float64(c.single[g]), 1e-12, 0)
			if c.sum {
				floatcmp.Check(t, "sum", r.Observed[0][g], c.observed[g], 1e-12, 0)
			}
			one := must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Windows: bins[g : g+1]}}, &Settings{Blocks: pair, Sum: c.sum}))
			if one.Count != c.own[g] {
				t.Errorf("bin %d by itself: %d, want %d", g, one.Count, c.own[g])
			}
			s := must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Windows: bins[g : g+1]}}, &Settings{Blocks: pair}))
			x := s.Observed[0][0]
			tt := x * math.Sqrt(5/(6-x*x))
			floatcmp.Check(t, "t", math.Abs(tt), []float64{5.8, 2.11195904, 0.48981958}[g], 1e-8, 0)
		}
	}
}

// A plain loop over explicit signs must give the same maxima, two orders jointly.
func TestFlipTestAgainstPlainLoop(t *testing.T) {
	n := 150
	y := normals(n, 3)
	order := make([]int32, 0, n-10)
	for _, i := range NewSeed(1).Stream(0).Perm(n)[:n-10] {
		order = append(order, int32(i))
	}
	sets := []FlipSet{{Windows: gridWindows(n, 30, 9)}, {Order: order, Windows: gridWindows(n-10, 40, 7)}, {}}
	blocks := make([]int32, n)
	for i := range blocks {
		blocks[i] = int32(i % 60)
	}
	for _, b := range [][]int32{nil, blocks} {
		seed := NewSeed(12)
		r := must[*FlipResult](t)(FlipTest(bg, y, sets, &Settings{Replicates: 500, Seed: seed, Blocks: b}))
		top := func(sign func(unit int) float64) (joint float64) {
			for _, set := range sets {
				for _, w := range set.Windows {
					var s, q float64
					for k := w.Lo; k < w.Hi; k++ {
						e := k
						if set.Order != nil {
							e = int(set.Order[k])
						}
						u := e
						if b != nil {
							u = int(b[e])
						}
						s += sign(u) * y[e]
						q += y[e] * y[e]
					}
					joint = math.Max(joint, math.Abs(s)/math.Sqrt(q))
				}
			}
			return joint
		}
		stat := top(func(int) float64 { return 1 })
		count := 0
		for rep := range 500 {
			s := seed.At("flips").Stream(rep)
			words := []uint64{s.Uint64(), s.Uint64(), s.Uint64()}
			if top(func(u int) float64 { return 1 - 2*float64(words[u/64]>>(u%64)&1) }) >= stat-1e-10 {
				count++
			}
		}
		floatcmp.Check(t, "statistic", r.Stat, stat, 1e-12, 0)
		if r.Count != count || r.Exact {
			t.Errorf("count %d, want %d", r.Count, count)
		}
		floatcmp.Check(t, "p", r.P, float64(1+count)/501, 1e-15, 0)
		if !(r.P >= r.SetP[0] || r.P >= r.SetP[1]) || r.SetP[2] != 1 {
			t.Errorf("joint p %g, by set %v", r.P, r.SetP)
		}
		floatcmp.Check(t, "adjusted p of the largest window", r.Adjusted[r.Set][r.Window], r.P, 0, 0)
	}
}

func TestFlipTestIdentities(t *testing.T) {
	n := 3000
	y := normals(n, 8)
	id := make([]int32, n)
	for i := range id {
		id[i] = int32(i)
	}
	win := gridWindows(n, 200, 50)
	base := must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Windows: win}}, &Settings{Replicates: 300, Workers: 1}))
	for _, workers := range []int{2, 7} {
		r := must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Windows: win}}, &Settings{Replicates: 300, Workers: workers}))
		if r.P != base.P || r.Stat != base.Stat || !slices.Equal(r.Adjusted[0], base.Adjusted[0]) {
			t.Errorf("%d workers: another result", workers)
		}
	}
	r := must[*FlipResult](t)(FlipTest(bg, y, []FlipSet{{Order: id, Windows: win}}, &Settings{Replicates: 300}))
	if r.P != base.P {
		t.Errorf("the identity as an order: p %g, want %g", r.P, base.P)
	}
	scaled := make([]float64, n)
	for i := range y {
		scaled[i] = -3 * y[i]
	}
	r = must[*FlipResult](t)(FlipTest(bg, scaled, []FlipSet{{Windows: win}}, &Settings{Replicates: 300}))
	floatcmp.Check(t, "scaled and mirrored", r.Stat, base.Stat, 1e-12, 0)
	if r.Count != base.Count {
		t.Errorf("scaled: count %d, want %d", r.Count, base.Count)
	}
	floatcmp.Check(t, "sign of a mirrored window", r.Observed[0][3], -base.Observed[0][3], 1e-12, 0)
	for i := range scaled {
		scaled[i] = 0
	}
	r = must[*FlipResult](t)(FlipTest(bg, scaled, []FlipSet{{Windows: win}}, &Settings{Replicates: 300}))
	floatcmp.Check(t, "p of zeros", r.P, 1, 0, 0)
}

func TestFlipTestErrors(t *testing.T) {
	for _, c := range []struct {
		want string
		y    []float64
		sets []FlipSet
	}{
		{"resample: FlipTest: no values", nil, whole(1)},
		{"resample: FlipTest: value 1 is NaN", []float64{1, math.NaN()}, whole(2)},
		{"resample: FlipTest: no windows", []float64{1}, []FlipSet{{}}},
		{"resample: FlipTest: set 0 names element 1 twice", []float64{1, 2}, []FlipSet{{Order: []int32{1, 1}, Windows: []Window{{0, 1}}}}},
		{"resample: FlipTest: set 0 rank 1 names element 2 of 2", []float64{1, 2}, []FlipSet{{Order: []int32{1, 2}, Windows: []Window{{0, 1}}}}},
		{"resample: FlipTest: set 0 window 0 [0, 2) is empty or outside its 1 ranks", []float64{1, 2}, []FlipSet{{Order: []int32{1}, Windows: []Window{{0, 2}}}}},
	} {
		if _, err := FlipTest(bg, c.y, c.sets, nil); err == nil || err.Error() != c.want {
			t.Errorf("error %v, want %q", err, c.want)
		}
	}
}

// The level on unequal, skewless noise, and the power against a local shift.
func TestFlipTestLevel(t *testing.T) {
	series := 200
	if os.Getenv("THINWARD_FULL") != "" {
		series = 2000
	}
	const n = 600
	win := gridWindows(n, 50, 60)
	order := make([]int32, n)
	for i, v := range NewSeed(2).Stream(0).Perm(n) {
		order[i] = int32(v)
	}
	var level, power float64
	for s := range series {
		st := NewSeed(41).At("level").Stream(s)
		y, shifted := make([]float64, n), make([]float64, n)
		for i := range y {
			y[i] = st.Normal() * (1 + 3*st.Float64())
			shifted[i] = y[i]
			if i < 60 {
				shifted[i] += 2.5
			}
		}
		sets := []FlipSet{{Windows: win}, {Order: order, Windows: win}}
		o := &Settings{Replicates: 199, Seed: NewSeed(uint64(s))}
		if must[*FlipResult](t)(FlipTest(bg, y, sets, o)).P <= 0.05 {
			level += 1 / float64(series)
		}
		if must[*FlipResult](t)(FlipTest(bg, shifted, sets, o)).P <= 0.05 {
			power += 1 / float64(series)
		}
	}
	t.Logf("%d series: level %.3f, power %.3f", series, level, power)
	floatcmp.Check(t, "level", level, 0.05, 4*math.Sqrt(.05*.95/float64(series)), 0)
	if !(power > 0.9) {
		t.Errorf("power %g", power)
	}
}

var sinkFlip *FlipResult

func BenchmarkFlipTest(b *testing.B) {
	const n = 100000
	y := normals(n, 1)
	order := make([]int32, n)
	for i, v := range NewSeed(2).Stream(0).Perm(n) {
		order[i] = int32(v)
	}
	win := gridWindows(n, n/20, 200)
	for sets, list := range [][]FlipSet{{{Windows: win}}, {{Windows: win}, {Order: order, Windows: win}}} {
		b.Run(fmt.Sprintf("pairs=%d/sets=%d", n, sets+1), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				var err error
				if sinkFlip, err = FlipTest(bg, y, list, nil); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
