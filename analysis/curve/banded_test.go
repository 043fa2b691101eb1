package curve

import (
	"math"
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// invented makes n pairs with a contrast of size on the weakest fifth.
func invented(n int, size float64, name string) (strength, y, w, s2 []float64) {
	s := seedOf(name).Stream(0)
	for i := range n {
		e := s.Exponential()
		v := 0.5 + 0.3*e
		d := math.Sqrt(v) * s.Normal()
		if e < 0.2 {
			d += size
		}
		if i%17 == 3 {
			e = math.NaN()
		}
		strength, y, w, s2 = append(strength, e), append(y, d), append(w, 1/v), append(s2, 0.3*s.Float64())
	}
	return strength, y, w, s2
}

func TestByStrengthParts(t *testing.T) {
	x, y, w, s2 := invented(1700, 1.5, "parts")
	x0, y0, w0, z0 := slices.Clone(x), slices.Clone(y), slices.Clone(w), slices.Clone(s2)
	o := &Settings{S2: s2, Grid: 40, Resample: resample.Settings{Replicates: 400, Seed: seedOf("b")}}
	b := must[*Banded](t)(ByStrength(bg, x, y, w, o))
	if b.Used != 1600 || b.Unavailable != 100 || len(b.Grid) != 40 || len(b.Flip.Observed) != 2 || b.P != b.Flip.P {
		t.Fatalf("used %d, unavailable %d, grid %d", b.Used, b.Unavailable, len(b.Grid))
	}
	if !slices.EqualFunc(x, x0, same) || !slices.Equal(y, y0) || !slices.Equal(w, w0) || !slices.Equal(s2, z0) {
		t.Error("an input was changed")
	}
	if !slices.IsSorted(b.Grid) {
		t.Error("the grid does not rise")
	}
	// The parts, by hand.
	order, _ := ascending(x)
	windows := Windows(1600, 0, 0, 40)
	mean := must[[]float64](t)(MovingMean(pick(y, order), pick(w, order), windows))
	floatcmp.CheckSlice(t, "moving mean", b.Mean, mean, 1e-12, 0)
	xs, ws, ys := pick(x, order), pick(w, order), pick(y, order)
	for g, win := range windows {
		var s, q float64
		for i := win.Lo; i < win.Hi; i++ {
			s += ws[i] * ys[i]
			q += ws[i] * ys[i] * ws[i] * ys[i]
		}
		floatcmp.Check(t, "statistic", b.Flip.Observed[0][g], s/math.Sqrt(q), 1e-10, 0)
		floatcmp.Check(t, "grid", b.Grid[g], (xs[(win.Lo+win.Hi-1)/2]+xs[(win.Lo+win.Hi)/2])/2, 1e-14, 0)
	}
	if !(b.P < 0.01) || b.Flip.Set != 0 || !(b.LoSim[0] > 0) || b.N[0] != 50 || b.N[20] != 80 {
		t.Errorf("p %g in set %d, lowest point above %g, N %d %d", b.P, b.Flip.Set, b.LoSim[0], b.N[0], b.N[20])
	}
	for g := range b.Grid {
		if !(b.LoSim[g] < b.Lo[g] && b.Lo[g] < b.Mean[g] && b.Mean[g] < b.Hi[g] && b.Hi[g] < b.HiSim[g]) {
			t.Errorf("point %d: %g %g %g %g %g", g, b.LoSim[g], b.Lo[g], b.Mean[g], b.Hi[g], b.HiSim[g])
		}
	}
}

func same(a, b float64) bool { return a == b || (a != a && b != b) }

func TestByStrengthIdentities(t *testing.T) {
	x, y, w, _ := invented(900, 0, "identities")
	o := &Settings{Grid: 20, Resample: resample.Settings{Replicates: 300}}
	b := must[*Banded](t)(ByStrength(bg, x, y, w, o))
	// Any order of the pairs gives the same curve and band of the same ranks.
	perm := seedOf("perm").Stream(0).Perm(len(x))
	px, py, pw, ny := make([]float64, len(x)), make([]float64, len(x)), make([]float64, len(x)), make([]float64, len(x))
	for i, j := range perm {
		px[i], py[i], pw[i] = x[j], y[j], w[j]
	}
	for i := range y {
		ny[i] = -3 * y[i]
	}
	p := must[*Banded](t)(ByStrength(bg, px, py, pw, o))
	m := must[*Banded](t)(ByStrength(bg, x, ny, w, o))
	for g := range b.Grid {
		floatcmp.Check(t, "permuted", p.Lo[g], b.Lo[g], 1e-12, 0)
		floatcmp.Check(t, "times -3", m.Lo[g], -3*b.Hi[g], 1e-11, 0)
	}
	if p.P != b.P || m.P != b.P {
		t.Errorf("p %g, permuted %g, mirrored %g", b.P, p.P, m.P)
	}
	for _, workers := range []int{1, 2, 7} {
		v := *o
		v.Resample.Workers = workers
		if q := must[*Banded](t)(ByStrength(bg, x, y, w, &v)); !slices.Equal(q.HiSim, b.HiSim) || q.P != b.P {
			t.Errorf("%d workers: other bits", workers)
		}
	}
	plain := *o
	plain.Plain, plain.NoTest = true, true
	q := must[*Banded](t)(ByStrength(bg, x, y, w, &plain))
	u := must[*Banded](t)(ByStrength(bg, x, y, nil, &plain))
	if !slices.Equal(q.Lo, u.Lo) || slices.Equal(q.Lo, b.Lo) || q.Flip != nil || !math.IsNaN(q.P) {
		t.Error("Plain is not the unweighted curve, or NoTest tested")
	}
	blocks := make([]int32, len(x))
	for i := range blocks {
		blocks[i] = int32(i / 30)
	}
	blocked := *o
	blocked.Resample.Blocks = blocks
	if k := must[*Banded](t)(ByStrength(bg, x, y, w, &blocked)); k.Flip.Units != 30 || slices.Equal(k.Lo, b.Lo) {
		t.Errorf("%d blocks", k.Flip.Units)
	}
}

func TestByStrengthLocal(t *testing.T) {
	x, y, w, _ := invented(1200, 1, "local")
	o := &Settings{Grid: 25, Local: true, NoTest: true, Share: 0.1, Resample: resample.Settings{Replicates: 400}}
	b := must[*Banded](t)(ByStrength(bg, x, y, w, o))
	order, _ := ascending(x)
	q := int(math.Round(0.1 * float64(len(order))))
	want := must[[]float64](t)(LocalLine(bg, pick(x, order), pick(y, order), pick(w, order), b.Grid, &LocalSettings{Neighbours: q}))
	floatcmp.CheckSlice(t, "local line", b.Mean, want, 1e-9, 0)
	mean := must[*Banded](t)(ByStrength(bg, x, y, w, &Settings{Grid: 25, NoTest: true, Share: 0.1, Resample: resample.Settings{Replicates: 400}}))
	for g := 5; g < 20; g++ { // inside, a tricube of q points is worth about 0.6 q
		floatcmp.Check(t, "error beside that of the mean", b.SE[g]/mean.SE[g], 1.2, 0.35, 0)
	}
	// The weights of one replicate, in the slow function and in the fast one.
	line := newFixedLine(pick(x, order), pick(y, order), pick(w, order), b.Grid, q)
	c := make([]float64, len(order))
	resample.PoissonWeights(seedOf("c").Stream(0), c)
	got := must[[]float64](t)(line.values(c))
	cw := slices.Clone(c)
	for k, i := range order {
		cw[k] *= w[i]
	}
	slow := must[[]float64](t)(LocalLine(bg, pick(x, order), pick(y, order), cw, b.Grid, &LocalSettings{Neighbours: q}))
	for g := range got {
		floatcmp.Check(t, "replicate", got[g]+line.centre, slow[g], 1e-9, 0)
	}
}

func TestByStrengthFew(t *testing.T) {
	b := must[*Banded](t)(ByStrength(bg, []float64{3, 1, 2, 4}, []float64{1, 2, 3, 4}, nil, nil))
	if len(b.Grid) != 4 || !math.IsInf(b.Lo[0], -1) || !math.IsInf(b.HiSim[3], 1) || len(b.Warnings) == 0 || !b.Flip.Exact {
		t.Errorf("%+v", b)
	}
	floatcmp.Check(t, "p of four of one sign", b.P, 2.0/16, 0, 0)
	if _, err := ByStrength(bg, []float64{math.NaN()}, []float64{1}, nil, nil); err == nil || err.Error() != "curve: ByStrength: none of 1 pairs has a strength" {
		t.Errorf("error %v", err)
	}
	if _, err := ByStrength(bg, []float64{math.Inf(1)}, []float64{1}, nil, nil); err == nil || err.Error() != "curve: ByStrength: strength 0 is +Inf" {
		t.Errorf("error %v", err)
	}
	if _, err := ByStrength(bg, []float64{1}, []float64{math.NaN()}, nil, nil); err == nil || err.Error() != "curve: ByStrength: value 0 is NaN" {
		t.Errorf("error %v", err)
	}
	if _, err := ByStrength(bg, []float64{1}, []float64{1}, nil, &Settings{S2: []float64{math.NaN()}}); err == nil || err.Error() != "curve: ByStrength: S2 0 is NaN" {
		t.Errorf("error %v", err)
	}
}

func TestByStrengthFlips(t *testing.T) {
	x, y, w, _ := invented(400, 0, "flips")
	for _, c := range []struct{ flips, want int }{{0, 60}, {90, 90}} {
		b := must[*Banded](t)(ByStrength(bg, x, y, w, &Settings{Flips: c.flips, Grid: 10, Resample: resample.Settings{Replicates: 60, Seed: seedOf("f")}}))
		if b.Flip.Flips != c.want {
			t.Errorf("Flips %d: %d flips, want %d", c.flips, b.Flip.Flips, c.want)
		}
	}
}
