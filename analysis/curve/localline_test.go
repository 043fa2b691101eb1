package curve

import (
	"context"
	"errors"
	"math"
	"slices"
	"testing"
	"time"

	"thinward/analysis/internal/floatcmp"
)

var bg = context.Background()

func must[T any](t testing.TB) func(T, error) T {
	return func(v T, err error) T {
		t.Helper()
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
}

// NIST/SEMATECH e-Handbook 4.1.4.4; robust values from R 4.2.2 lowess.
var (
	loessX   = []float64{0.5578196, 2.0217271, 2.5773252, 3.4140288, 4.3014084, 4.7448394, 5.1073781, 6.5411662, 6.7216176, 7.2600583, 8.1335874, 9.1224379, 11.9296663, 12.3797674, 13.2728619, 14.2767453, 15.3731026, 15.6476637, 18.5605355, 18.5866354, 18.7572812}
	loessY   = []float64{18.63654, 103.49646, 150.35391, 190.51031, 208.70115, 213.71135, 228.49353, 233.55387, 234.55054, 223.89225, 227.68339, 223.91982, 168.01999, 164.95750, 152.61107, 160.78742, 168.55567, 152.42658, 221.70702, 222.69040, 243.18828}
	loessFit = []float64{20.5930234, 107.1603072, 139.7673812, 174.2630435, 207.2333825, 216.6615860, 220.5444798, 229.8606930, 229.8347130, 229.4301158, 226.6044590, 220.3904099, 172.3479994, 163.8416613, 161.8489707, 160.3350837, 160.1919893, 161.0555925, 227.3399559, 227.8985350, 231.5585563}
	robust3  = []float64{20.7686891, 102.6813176, 132.8292963, 167.5328652, 205.7867524, 216.5723790, 220.3620111, 229.9234896, 229.9179603, 229.5310134, 226.6691213, 220.5042178, 172.5935197, 164.2288698, 162.2989126, 160.6677713, 160.4096727, 161.4523460, 224.9981183, 225.5283503, 229.0032274}
)

// R `cars` (Ezekiel 1930); lowess of R and statsmodels.
var (
	carsX       = []float64{4, 4, 7, 7, 8, 9, 10, 10, 10, 11, 11, 12, 12, 12, 12, 13, 13, 13, 13, 14, 14, 14, 14, 15, 15, 15, 16, 16, 17, 17, 17, 18, 18, 18, 18, 19, 19, 19, 20, 20, 20, 20, 20, 22, 23, 24, 24, 24, 24, 25}
	carsY       = []float64{2, 10, 4, 22, 16, 10, 18, 26, 34, 17, 28, 14, 20, 24, 28, 26, 34, 34, 46, 26, 36, 60, 80, 20, 26, 54, 32, 40, 32, 40, 50, 42, 56, 76, 84, 36, 46, 68, 32, 48, 52, 56, 64, 66, 54, 70, 92, 93, 120, 85}
	carsAt      = []float64{4, 7, 8, 9, 10, 11, 12, 13, 14, 15, 16, 17, 18, 19, 20, 22, 23, 24, 25}
	carsRobust  = []float64{4.965459277, 13.124495040, 15.858633382, 18.579690514, 21.280312579, 24.129277149, 27.119548551, 30.027276331, 32.962506136, 36.757728342, 40.435074562, 43.463491782, 46.885478946, 50.793151725, 56.491224093, 67.585824231, 73.079695269, 78.643163554, 84.328698097}
	carsPlain   = []float64{3.443863768, 12.784337355, 15.952392559, 19.096756203, 22.187105099, 25.605742571, 29.363152534, 32.915843835, 36.558787761, 41.103032647, 45.021073169, 47.363203708, 49.565262169, 52.904601436, 59.411096465, 71.215709527, 77.029829458, 82.975448164, 89.127515406}
	carsNarrow  = []float64{6.030407885, 37.937117956, 92.725140711} // share .2 at 4, 15, 25
	nistWeights = []float64{1, 0.90334913, 0.75988974, 0.42621714, 0.08686171, 0.01072308, 0}
)

func TestLocalLinePublished(t *testing.T) {
	for _, c := range []struct {
		what      string
		x, y, at  []float64
		q, robust int
		want      []float64
		tol       float64
	}{
		{"NIST", loessX, loessY, loessX, 7, 0, loessFit, 1e-6},
		{"NIST robust", loessX, loessY, loessX, 7, 3, robust3, 1e-6},
		{"cars plain", carsX, carsY, carsAt, 33, 0, carsPlain, 1e-6},
		{"cars robust", carsX, carsY, carsAt, 33, 3, carsRobust, 1e-6},
		{"cars narrow", carsX, carsY, []float64{4, 15, 25}, 10, 3, carsNarrow, 1e-6},
	} {
		got := must[[]float64](t)(LocalLine(bg, c.x, c.y, nil, c.at, &LocalSettings{Neighbours: c.q, Robust: c.robust}))
		floatcmp.CheckSlice(t, c.what, got, c.want, c.tol, 0)
	}
	l := &localLine{x: loessX, y: loessY, q: 7}
	lo, hi, h := l.nearest(loessX[0])
	for i := lo; i < hi; i++ {
		// The third published weight is 2.004e-8 above exact arithmetic on the printed x.
		floatcmp.Check(t, "weight", l.weight(i, loessX[0], h), nistWeights[i], 2.1e-8, 0)
	}
}

func TestLocalLineIdentities(t *testing.T) {
	n := 300
	x, line, flat, noisy, far := make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, n)
	w, twice := make([]float64, n), make([]float64, n)
	s := seedOf("local").Stream(0)
	for i := range x {
		x[i] = math.Sqrt(float64(i)) + 5
		line[i], flat[i] = 3-2*x[i], 0.3
		noisy[i] = s.Normal()
		far[i] = 1e9 + noisy[i]
		w[i] = 1 + float64(i%3)
		twice[i] = 2 * w[i]
	}
	at := []float64{4, 5, 7.3, 12, 22, 30}
	o := &LocalSettings{Neighbours: 40}
	for i, v := range must[[]float64](t)(LocalLine(bg, x, line, w, at, o)) {
		floatcmp.Check(t, "a line comes back", v, 3-2*at[i], 1e-9, 0)
	}
	for _, v := range must[[]float64](t)(LocalLine(bg, x, flat, w, at, o)) {
		floatcmp.Check(t, "a constant comes back", v, 0.3, 0, 0)
	}
	base := must[[]float64](t)(LocalLine(bg, x, noisy, w, at, o))
	floatcmp.CheckSlice(t, "weights scale out", must[[]float64](t)(LocalLine(bg, x, noisy, twice, at, o)), base, 1e-12, 0)
	for i, v := range must[[]float64](t)(LocalLine(bg, x, far, w, at[1:5], o)) {
		floatcmp.Check(t, "far from zero", v-1e9, base[i+1], 2e-6, 0)
	}
	// A weight of 2 is two points: neighbours are counted by point, so all take part.
	var xx, yy []float64
	double := make([]float64, n)
	for i := range x {
		double[i] = 1 + float64(i%2)
		for range 1 + i%2 {
			xx, yy = append(xx, x[i]), append(yy, noisy[i])
		}
	}
	a := must[[]float64](t)(LocalLine(bg, x, noisy, double, at, &LocalSettings{Neighbours: n}))
	b := must[[]float64](t)(LocalLine(bg, xx, yy, nil, at, &LocalSettings{Neighbours: len(xx)}))
	floatcmp.CheckSlice(t, "weights as repeats", a, b, 1e-10, 0)
	if again := must[[]float64](t)(LocalLine(bg, x, noisy, w, at, &LocalSettings{Neighbours: 40, Workers: 1})); !slices.Equal(again, base) {
		t.Error("one worker gives other bits")
	}
}

func TestLocalLineTies(t *testing.T) {
	x := []float64{1, 1, 1, 1, 2}
	got := must[[]float64](t)(LocalLine(bg, x, []float64{1, 2, 3, 6, 100}, nil, []float64{1, 1.5}, &LocalSettings{Neighbours: 3}))
	floatcmp.Check(t, "all neighbours at one x", got[0], 2, 1e-12, 0)
	two := must[[]float64](t)(LocalLine(bg, []float64{0, 2}, []float64{1, 3}, []float64{1, 3}, []float64{1}, &LocalSettings{Neighbours: 2}))
	floatcmp.Check(t, "all neighbours at distance h", two[0], 2.5, 1e-12, 0)
}

// Above 5000 points residuals come from 1000 fits joined by lines.
func TestLocalLineRobustLarge(t *testing.T) {
	n := 6000
	x, y := make([]float64, n), make([]float64, n)
	s := seedOf("robust").Stream(0)
	for i := range x {
		x[i] = float64(i) / float64(n)
		y[i] = math.Sin(4*x[i]) + 0.1*s.Normal()
		if i%20 == 0 {
			y[i] += 50
		}
	}
	at := []float64{0.2, 0.5, 0.8}
	plain := must[[]float64](t)(LocalLine(bg, x, y, nil, at, nil))
	robust := must[[]float64](t)(LocalLine(bg, x, y, nil, at, &LocalSettings{Robust: 3}))
	for i, a := range at {
		floatcmp.Check(t, "plain carries the outliers", plain[i], math.Sin(4*a)+2.5, 0.3, 0)
		floatcmp.Check(t, "robust does not", robust[i], math.Sin(4*a), 0.03, 0)
	}
}

func TestLocalLineErrors(t *testing.T) {
	one := []float64{1, 2}
	for _, c := range []struct {
		want    string
		x, y, w []float64
		at      []float64
		o       *LocalSettings
	}{
		{"curve: LocalLine: no points", nil, nil, nil, one, nil},
		{"curve: LocalLine: x is not ascending and finite at 1", []float64{2, 1}, one, nil, one, nil},
		{"curve: LocalLine: value 0 is NaN", one, []float64{math.NaN(), 1}, nil, one, nil},
		{"curve: LocalLine: weight 1 is -1", one, one, []float64{1, -1}, one, nil},
		{"curve: LocalLine: point 0 to fit at is +Inf", one, one, nil, []float64{math.Inf(1)}, nil},
		{"curve: LocalLine: 1 neighbours, need two", one, one, nil, one, &LocalSettings{Neighbours: 1}},
	} {
		if _, err := LocalLine(bg, c.x, c.y, c.w, c.at, c.o); err == nil || err.Error() != c.want {
			t.Errorf("error %v, want %q", err, c.want)
		}
	}
}

func TestLocalLineCancel(t *testing.T) {
	n := 200000
	x := make([]float64, n)
	for i := range x {
		x[i] = float64(i)
	}
	ctx, cancel := context.WithCancel(bg)
	time.AfterFunc(30*time.Millisecond, cancel)
	begin := time.Now()
	if _, err := LocalLine(ctx, x, x, nil, x, nil); !errors.Is(err, context.Canceled) {
		t.Fatalf("error %v", err)
	}
	if d := time.Since(begin); d > 530*time.Millisecond {
		t.Errorf("returned after %v", d)
	}
}
