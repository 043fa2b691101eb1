package pool

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Log relative risks of the BCG trials (Colditz et al. 1994) and their variances.
var (
	bcgY = []float64{-0.88931133392, -1.58538865720, -1.34807314830, -1.44155119002, -0.21754732221, -0.78611558582, -1.62089822360, 0.01195233352, -0.46941764874, -1.37134480347, -0.33935882834, 0.44591340057, -0.01731394822}
	bcgV = []float64{0.325584765004, 0.194581121398, 0.415367965368, 0.020010031902, 0.051210172170, 0.006905618456, 0.223017247572, 0.003961579298, 0.056434210463, 0.073024793613, 0.012412213972, 0.532505845200, 0.071404659684}
)

func roots(v []float64) []float64 {
	s := make([]float64, len(v))
	for i := range v {
		s[i] = math.Sqrt(v[i])
	}
	return s
}

// Values of the R package metafor 3.8 on these data; Q, tau^2 and I^2 also by
// hand formula in R.
func TestJoinBCG(t *testing.T) {
	e, err := Join(bcgY, roots(bcgV), 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"fixed effect", e.Fixed, -0.430285163654, 1e-8},
		{"its SE", e.FixedSE, 0.0404987517109, 1e-8},
		{"Q", e.Q, 152.233008082, 1e-6},
		{"tau^2", e.Tau2, 0.308760262862, 1e-8},
		{"I^2", e.I2, 0.921173468546, 1e-8},
		{"random effect", e.Random, -0.714117222073, 1e-8},
		{"its normal SE", e.NormalSE, 0.178742089535, 1e-8},
		{"its Hartung-Knapp SE", e.RandomSE, 0.180696628336, 1e-8},
		{"t", e.Random / e.RandomSE, -3.95202294947, 1e-7},
		{"Birge ratio", e.Birge, 3.56175294018, 1e-8},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
	floatcmp.Check(t, "p of Q", e.QP, 1.9968e-26, 0, 1e-4)
	if !e.Estimable {
		t.Error("thirteen estimates allow tau^2")
	}
	tau2, err := PauleMandel(bcgY, roots(bcgV))
	if err != nil {
		t.Fatal(err)
	}
	// metafor prints 0.318093711863: it stops early, its Q misses 12 by 7e-4. The
	// root to all digits is by scipy.optimize.brentq 1.10.
	floatcmp.Check(t, "Paule-Mandel tau^2", tau2, 0.31806845220330, 1e-12, 0)
}

func TestJoinIdentities(t *testing.T) {
	y, se := []float64{0.1, 0.2, 0.4}, []float64{0.05, 0.1, 0.07}
	e, _ := Join(y, se, 0)
	var shifted, scale []float64
	for i := range y {
		shifted = append(shifted, 3*y[i]+1)
		scale = append(scale, 3*se[i])
	}
	s, _ := Join(shifted, scale, 0)
	floatcmp.Check(t, "fixed under a linear change", s.Fixed, 3*e.Fixed+1, 0, 1e-13)
	floatcmp.Check(t, "random under a linear change", s.Random, 3*e.Random+1, 0, 1e-13)
	floatcmp.Check(t, "interval under a linear change", s.RandomHi, 3*e.RandomHi+1, 0, 1e-12)
	floatcmp.Check(t, "Q under a linear change", s.Q, e.Q, 0, 1e-12)
	if e.Estimable {
		t.Error("three estimates do not allow tau^2")
	}
	one, _ := Join(y[:1], se[:1], 0)
	if !floatcmp.Equal(one.Fixed, y[0], 1e-15, 0) || !math.IsInf(one.RandomHi, 1) || !math.IsInf(one.RandomLo, -1) {
		t.Errorf("one estimate: %+v", one)
	}
}

func TestJoinRefuses(t *testing.T) {
	for _, c := range []struct {
		y, se []float64
		level float64
		want  string
	}{
		{nil, nil, 0, "no estimate"},
		{[]float64{1}, []float64{1, 2}, 0, "1 estimates but 2 standard errors"},
		{[]float64{1, math.NaN()}, []float64{1, 2}, 0, "estimate 1 is NaN"},
		{[]float64{1}, []float64{0}, 0, "standard error 0 is 0"},
		{[]float64{1}, []float64{1}, 2, "level 2"},
	} {
		if _, err := Join(c.y, c.se, c.level); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("Join(%v, %v): %v, want %q", c.y, c.se, err, c.want)
		}
	}
}

func TestLeaveOneOut(t *testing.T) {
	y, se := []float64{1, 2, 6}, []float64{1, 1, 1}
	out, err := LeaveOneOut(y, shared(se, 0), 0)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []float64{4, 3.5, 1.5} {
		floatcmp.Check(t, "mean of the others", out[i].Fixed, want, 1e-14, 0)
	}
}

// Exact binomial tails: 2*(1/8), 2*(1/32), 2*(1+5)/32; R binom.test.
func TestSigns(t *testing.T) {
	for _, c := range []struct {
		y           []float64
		same        int
		p, smallest float64
	}{
		{[]float64{1, 2, 3}, 3, 0.25, 0.25},
		{[]float64{-1, -2, -3, -1, -1}, 5, 0.0625, 0.0625},
		{[]float64{-1, -2, -3, -1, 1}, 4, 0.375, 0.0625},
		{[]float64{1, -1}, 1, 1, 0.5},
		{nil, 0, 1, 1},
	} {
		same, p, smallest := Signs(c.y)
		if same != c.same {
			t.Errorf("Signs(%v): %d agree, want %d", c.y, same, c.same)
		}
		floatcmp.Check(t, "p", p, c.p, 1e-14, 0)
		floatcmp.Check(t, "smallest p", smallest, c.smallest, 1e-14, 0)
	}
}
