package resample

import (
	"context"
	"errors"
	"math"
	"slices"
	"strings"
	"testing"
	"time"

	"thinward/analysis/internal/floatcmp"
)

func weightedMedian(y []float64) func([]float64) ([]float64, error) {
	return func(w []float64) ([]float64, error) {
		var all []float64
		for i, v := range y {
			for range int(w[i]) {
				all = append(all, v)
			}
		}
		if len(all) == 0 {
			return nil, errors.New("nothing drawn")
		}
		return []float64{median(all)}, nil
	}
}

func TestExactEnumeration(t *testing.T) {
	ratio := func(w []float64) ([]float64, error) {
		var y, z float64
		for i := range w {
			y += w[i] * patchY[i]
			z += w[i] * patchZ[i]
		}
		return []float64{y / z}, nil
	}
	for _, c := range []struct {
		what          string
		n, resamples  int
		stat          func([]float64) ([]float64, error)
		est, mean, se float64
		tol           float64
	}{
		{"mouse treatment mean", 7, 1716, weightedMean(mouseTrt), 86.857142857143, 86.857142857143, 23.3635234373, 1e-9},
		{"mouse control mean", 9, 24310, weightedMean(mouseCtl), 56.222222222222, 56.222222222222, 13.3488592732, 1e-9},
		{"mouse treatment median (Maritz & Jarrett 1978)", 7, 1716, weightedMedian(mouseTrt), 94, 79.7288447598, 37.8346743939, 1e-9},
		{"mouse control median", 9, 24310, weightedMedian(mouseCtl), 46, 45.8554037033, 13.0758700270, 1e-9},
		{"patch ratio", 8, 6435, ratio, -0.0713060959026, -0.0635455902392, 0.102313806232, 1e-11},
		{"{1,2,4} mean", 3, 10, weightedMean([]float64{1, 2, 4}), 7.0 / 3, 7.0 / 3, 0.720082299823, 1e-11},
		{"{1,2,4} plug-in variance", 3, 10, plugInVariance([]float64{1, 2, 4}), 14.0 / 9, 1.037037037037, math.NaN(), 1e-11},
	} {
		b := must[*ScalarBoot](t)(Scalars(bg, c.n, c.stat, &Settings{NoBCa: c.n == 3}))
		if b.Scheme != SchemeExact || b.Replicates != c.resamples {
			t.Errorf("%s: %v, %d resamples, want %d", c.what, b.Scheme, b.Replicates, c.resamples)
		}
		floatcmp.Check(t, c.what, b.Estimate[0], c.est, c.tol, 0)
		floatcmp.Check(t, c.what+" mean", b.Estimate[0]+b.Bias[0], c.mean, c.tol, 0)
		if !math.IsNaN(c.se) {
			floatcmp.Check(t, c.what+" SE", b.SE[0], c.se, c.tol, 0)
		}
		if few := c.n < 6; few != (len(b.Warnings) == 1 && b.Warnings[0].Code == CodeFewUnits && math.IsInf(b.Lo[0], -1) && math.IsInf(b.Hi[0], 1)) {
			t.Errorf("%s: interval %g %g, warnings %v", c.what, b.Lo[0], b.Hi[0], b.Warnings)
		}
	}
	patch := must[*ScalarBoot](t)(Scalars(bg, 8, ratio, nil))
	floatcmp.Check(t, "patch jackknife bias (book .0080)", patch.JackBias[0], 0.00800248835811, 1e-11, 0)
	floatcmp.Check(t, "patch jackknife SE", patch.JackSE[0], 0.10552778538, 1e-11, 0)
}

func TestExactPercentiles(t *testing.T) {
	for _, c := range []struct{ level, lo, hi float64 }{
		{.90, 49.4285714286, 126.714285714}, {.95, 43.4285714286, 134.428571429},
	} {
		b := must[*ScalarBoot](t)(Scalars(bg, 7, weightedMean(mouseTrt), &Settings{Level: c.level}))
		floatcmp.Check(t, "lo", b.Lo[0], c.lo, 1e-9, 0)
		floatcmp.Check(t, "hi", b.Hi[0], c.hi, 1e-9, 0)
		if b.Achieved[0] < c.level {
			t.Errorf("achieved %g, wanted at least %g", b.Achieved[0], c.level)
		}
	}
}

// Whole clusters are drawn: the iid value of the first case is 0.746519702799.
func TestClusterBootstrap(t *testing.T) {
	for _, c := range []struct {
		clusters      [][]float64
		est, mean, se float64
		tol           float64
	}{
		{[][]float64{{3, 5, 4}, {8, 9, 7}, {2, 1, 3}, {6, 6, 9}}, 5.25, 5.25, 1.192424001771, 1e-11},
		{[][]float64{{3, 5}, {8, 9, 7, 8}, {2}, {6, 6, 9}}, 6.3, 6.07360842282, 1.09860761786, 1e-11},
	} {
		var y []float64
		var ids []int32
		for i, g := range c.clusters {
			for _, v := range g {
				y, ids = append(y, v), append(ids, int32(40-7*i))
			}
		}
		b := must[*ScalarBoot](t)(Scalars(bg, len(y), weightedMean(y), &Settings{Blocks: ids, NoBCa: true}))
		if b.Units != 4 || b.Scheme != SchemeExact {
			t.Errorf("%d units, %v", b.Units, b.Scheme)
		}
		floatcmp.Check(t, "estimate", b.Estimate[0], c.est, c.tol, 0)
		floatcmp.Check(t, "mean", b.Estimate[0]+b.Bias[0], c.mean, c.tol, 0)
		floatcmp.Check(t, "SE", b.SE[0], c.se, c.tol, 0)
		bands := must[*BandSet](t)(Bands(bg, y, nil, []Window{{0, len(y)}}, &Settings{Blocks: ids}))
		floatcmp.Check(t, "band SE", bands.SE[0], c.se, c.tol, 0)
		if bands.Units[0] != 4 || !math.IsInf(bands.Hi[0], 1) || !math.IsInf(bands.LoSim[0], -1) {
			t.Errorf("four clusters gave a finite interval: %+v", bands)
		}
	}
}

func TestPoissonScalarsAgreeWithTheory(t *testing.T) {
	y := normals(400, 9)
	b := must[*ScalarBoot](t)(Scalars(bg, len(y), weightedMean(y), &Settings{Replicates: 8000}))
	v, _ := plugInVariance(y)(onesOf(len(y)))
	se := math.Sqrt(v[0] / float64(len(y)))
	floatcmp.Check(t, "SE of a mean", b.SE[0], se, 4*se/math.Sqrt(2*8000), 0)
	floatcmp.Check(t, "jackknife SE", b.JackSE[0], se*math.Sqrt(400.0/399), 0, 1e-10)
	if b.Scheme != SchemePoisson {
		t.Errorf("scheme %v", b.Scheme)
	}
	// Closed-form acceleration of a mean equals the jackknife's.
	l := make([]float64, len(y))
	for i, q := range y {
		l[i] = q - b.Estimate[0]
	}
	floatcmp.Check(t, "acceleration", b.Accel[0], Acceleration(l), 1e-12, 1e-9)
	known := must[*ScalarBoot](t)(Scalars(bg, len(y), weightedMean(y), &Settings{Replicates: 8000, Accel: []float64{Acceleration(l)}}))
	floatcmp.Check(t, "interval from a known acceleration", known.LoBCa[0], b.LoBCa[0], 0, 1e-9)
}

// Leave-out groups estimate the same acceleration with an error of 0.4/sqrt(G).
func TestGroupedJackknife(t *testing.T) {
	s := NewSeed(8).At("skew").Stream(0)
	y := make([]float64, 5000)
	for i := range y {
		y[i] = s.Exponential()
	}
	one := must[*ScalarBoot](t)(Scalars(bg, len(y), weightedMean(y), &Settings{Replicates: 50, JackknifeGroups: 5000}))
	many := must[*ScalarBoot](t)(Scalars(bg, len(y), weightedMean(y), &Settings{Replicates: 50, JackknifeGroups: 500}))
	floatcmp.Check(t, "SE", many.JackSE[0], one.JackSE[0], 0, 4/math.Sqrt(2*500))
	floatcmp.Check(t, "acceleration", many.Accel[0], one.Accel[0], 4*0.41/math.Sqrt(500), 0)
	floatcmp.Check(t, "acceleration of an exponential mean, 2/(6 sqrt n)", one.Accel[0], 1/(3*math.Sqrt(5000)), 1e-3, 0)
}

func onesOf(n int) []float64 {
	w := make([]float64, n)
	for i := range w {
		w[i] = 1
	}
	return w
}

func TestScalarsFailedDraws(t *testing.T) {
	y := normals(40, 3)
	picky := func(w []float64) ([]float64, error) {
		if w[0] == 0 && w[1] == 0 && w[2] == 0 { // 5 % of draws
			return nil, errors.New("no")
		}
		return weightedMean(y)(w)
	}
	b := must[*ScalarBoot](t)(Scalars(bg, 40, picky, &Settings{NoBCa: true}))
	if b.Failed == 0 || len(b.Warnings) != 2 || b.Warnings[0].Code != CodeFailedDraws || b.Warnings[1].Code != CodeFewDraws {
		t.Errorf("%d failed, warnings %v", b.Failed, b.Warnings)
	}
	// As many failures as a tail holds leave nothing to stand on.
	if share := float64(b.Failed) / float64(b.Replicates); share < 0.026 || !math.IsInf(b.Lo[0], -1) || !math.IsInf(b.Hi[0], 1) {
		t.Errorf("share %g, interval %g %g", share, b.Lo[0], b.Hi[0])
	}
	never := func(w []float64) ([]float64, error) {
		if w[0] != 1 || w[1] != 1 || w[2] != 1 {
			return nil, errors.New("no")
		}
		return weightedMean(y)(w)
	}
	if _, err := Scalars(bg, 40, never, nil); err == nil || !strings.HasPrefix(err.Error(), "resample: Scalars: the statistic failed in ") {
		t.Errorf("error %v", err)
	}
}

func TestScalarsErrors(t *testing.T) {
	bad := errors.New("broken")
	for _, c := range []struct {
		want string
		n    int
		stat func([]float64) ([]float64, error)
		o    *Settings
	}{
		{"resample: Scalars: no elements", 0, nil, nil},
		{"resample: Scalars: at the plain weights: broken", 3, func([]float64) ([]float64, error) { return nil, bad }, nil},
		{"resample: Scalars: statistic 1 at the plain weights is NaN", 3, func([]float64) ([]float64, error) { return []float64{0, math.NaN()}, nil }, nil},
		{"resample: Replicates must be at least 2", 3, nil, &Settings{Replicates: 1}},
		{"resample: Level 2 is not between 0 and 1", 3, nil, &Settings{Level: 2}},
		{"resample: JackknifeGroups 1 is below 2", 3, nil, &Settings{JackknifeGroups: 1}},
	} {
		if _, err := Scalars(bg, c.n, c.stat, c.o); err == nil || err.Error() != c.want {
			t.Errorf("error %v, want %q", err, c.want)
		}
	}
}

func TestScalarsSameBits(t *testing.T) {
	y := normals(333, 2)
	var first *ScalarBoot
	for _, workers := range []int{1, 2, 7, 1} {
		b := must[*ScalarBoot](t)(Scalars(bg, len(y), plugInVariance(y), &Settings{Replicates: 300, Workers: workers, Seed: NewSeed(4).At("x")}))
		if first == nil {
			first = b
			continue
		}
		for r := range b.Draws {
			if b.Draws[r][0] != first.Draws[r][0] {
				t.Fatalf("workers %d: draw %d differs", workers, r)
			}
		}
		if b.Lo[0] != first.Lo[0] || b.LoBCa[0] != first.LoBCa[0] || b.SE[0] != first.SE[0] {
			t.Errorf("workers %d: results differ", workers)
		}
	}
}

func TestScalarsCancel(t *testing.T) {
	ctx, cancel := context.WithCancel(bg)
	time.AfterFunc(30*time.Millisecond, cancel)
	begin := time.Now()
	slow := func(w []float64) ([]float64, error) {
		time.Sleep(time.Millisecond)
		return []float64{w[0]}, nil
	}
	if _, err := Scalars(ctx, 50, slow, &Settings{Replicates: 100000}); !errors.Is(err, context.Canceled) {
		t.Fatalf("error %v", err)
	}
	if d := time.Since(begin); d > 530*time.Millisecond {
		t.Errorf("returned %v after the start", d)
	}
}

func TestBandsOf(t *testing.T) {
	y := normals(200, 6)
	stat := func(w []float64) ([]float64, error) {
		out := make([]float64, 4)
		for g := range out {
			part := make([]float64, len(w))
			copy(part[50*g:50*g+50], w[50*g:50*g+50])
			m, _ := weightedMean(y)(part)
			out[g] = m[0]
		}
		return out, nil
	}
	b := must[*ScalarBoot](t)(Scalars(bg, len(y), stat, &Settings{NoBCa: true, Replicates: 4000}))
	k := must[*BandSet](t)(BandsOf(bg, b, nil))
	for g := range k.Mean {
		if k.Lo[g] != b.Lo[g] || k.Hi[g] != b.Hi[g] || !slices.Equal(k.Mean, b.Estimate) {
			t.Errorf("point %d: bands do not repeat the percentile interval", g)
		}
	}
	// Four independent points: Sidak's multiplier 2.4909, from (1 + .95^(1/4))/2.
	floatcmp.Check(t, "multiplier", k.Multiplier, normQuantile((1+math.Pow(.95, 0.25))/2), 0.15, 0)
}
