package intensity

import (
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// pairsOf draws n reflections, each twice within a degree, of the given mean
// intensity, with normal errors of sd truth and reported sigma.
func pairsOf(n int, mean, truth, reported float64, seed uint64) ([]int32, *Columns) {
	random := rand.New(rand.NewPCG(seed, 3))
	c := &Columns{}
	var unique []int32
	for u := range n {
		phi := 100*random.Float64() - 50
		j := mean * random.ExpFloat64()
		for k := range 2 {
			unique = append(unique, int32(u))
			c.H, c.K, c.L = append(c.H, int16(u+1)), append(c.K, int16(k)), append(c.L, 1)
			c.I = append(c.I, j+truth*random.NormFloat64())
			c.Sigma = append(c.Sigma, reported*(1+1e-6*random.Float64()))
			c.Phi = append(c.Phi, phi+float64(k))
		}
	}
	return unique, c
}

func codes(list []Warning) string {
	var out []string
	for _, w := range list {
		out = append(out, w.Code)
	}
	slices.Sort(out)
	return strings.Join(out, " ")
}

// (I1-I2)^2/(s1^2+s2^2) of normal errors is f^2 times chi squared with one degree of
// freedom, f being true over reported sigma, whose median is 0.454936 (Abramowitz & Stegun
// 1964, table 26.8); so Chi2 is f^2.
func TestChi2OfPairs(t *testing.T) {
	for _, c := range []struct {
		name            string
		truth, reported float64
		want            string
	}{
		{"right", 10, 10, ""},
		{"too small by 2", 20, 10, "sigma-small"},
		{"too large by 2", 10, 20, "sigma-large"},
		{"a little too small", 12, 10, ""},
	} {
		unique, columns := pairsOf(4000, 30, c.truth, c.reported, 1)
		s := CheckSigmas(unique, columns)
		f := c.truth / c.reported
		// Tolerance: four standard errors of the median at 4000 pairs or fewer.
		floatcmp.Check(t, c.name, s.Chi2, f*f, 4*s.Chi2SE, 0)
		if !(s.Chi2SE < 0.06*f*f) || !s.WeakOnly || s.NearPairs != 4000 || codes(s.Warnings) != c.want {
			t.Errorf("%s: %+v", c.name, s)
		}
	}
}

// The claimed standard error is the spread of Chi2 over repeats.
func TestChi2Error(t *testing.T) {
	var values []float64
	claimed := 0.0
	for seed := range uint64(200) {
		unique, c := pairsOf(300, 20, 10, 10, seed)
		s := CheckSigmas(unique, c)
		values = append(values, s.Chi2)
		claimed += s.Chi2SE / 200
	}
	sum, square := 0.0, 0.0
	for _, v := range values {
		sum += v / 200
	}
	for _, v := range values {
		square += (v - sum) * (v - sum) / 199
	}
	floatcmp.Check(t, "mean", sum, 1, 0.04, 0)
	floatcmp.Check(t, "spread", math.Sqrt(square), claimed, 0, 0.2)
}

// By hand: three reflections, differences 6 and 0, 8; sigmas 3 and 4 make v = 25.
// With fewer than 10 pairs nothing is said of their size.
func TestSigmasByHand(t *testing.T) {
	c := &Columns{H: []int16{1, 1, 2, 2, 3, 3, 4}, K: make([]int16, 7), L: make([]int16, 7),
		I: []float64{6, 0, 5, 5, 8, 0, 1}, Sigma: []float64{3, 4, 3, 4, 3, 4, 3}, Phi: []float64{0, 4, 0, 5, 0, 6, 0}}
	s := CheckSigmas([]int32{0, 0, 1, 1, 2, 2, 3}, c)
	if s.Pairs != 2 || s.WeakOnly || s.AnyAngle || !math.IsNaN(s.Chi2) {
		t.Errorf("the pair 6 degrees apart is not near: %+v", s)
	}
	floatcmp.Check(t, "same", s.Same, 4.0/7, 1e-15, 0)
	floatcmp.Check(t, "value", s.SameValue, 3, 0, 0)
	floatcmp.Check(t, "highest", s.Highest, 8.0/3, 1e-15, 0)
	floatcmp.Check(t, "middle", s.Middle, 5.0/4, 1e-15, 0)
	// Of three observations within the window two are a pair, the third is left.
	three := &Columns{H: []int16{1, 1, 1}, K: make([]int16, 3), L: make([]int16, 3), I: []float64{1, 2, 3}, Sigma: []float64{1, 1, 1}, Phi: []float64{0, 1, 2}}
	if s := CheckSigmas([]int32{0, 0, 0}, three); s.Pairs != 1 {
		t.Errorf("three observations: %+v", s)
	}
	c.Phi = nil
	if s = CheckSigmas([]int32{0, 0, 1, 1, 2, 2, 3}, c); s.Pairs != 3 || !s.AnyAngle {
		t.Errorf("without angles every pair counts: %+v", s)
	}
	// Twelve such pairs, of 36/25, 0 and 64/25 four each: the median is 36/25.
	many := &Columns{}
	var unique []int32
	for k := range int32(12) {
		at := 2 * int(k%3)
		for o := range 2 {
			many.H, many.K, many.L = append(many.H, int16(k+1)), append(many.K, int16(o)), append(many.L, 0)
			many.I, many.Sigma = append(many.I, c.I[at+o]), append(many.Sigma, c.Sigma[at+o])
			unique = append(unique, k)
		}
	}
	s = CheckSigmas(unique, many)
	floatcmp.Check(t, "chi2", s.Chi2, 1.44/0.4549364, 1e-12, 0)
	floatcmp.Check(t, "its error", s.Chi2SE, 1.44/0.4549364*2.333/math.Sqrt(12), 1e-12, 0)
	empty := CheckSigmas(nil, &Columns{})
	if empty.N != 0 || !math.IsNaN(empty.Same) || !math.IsNaN(empty.Chi2) || len(empty.Warnings) > 0 {
		t.Errorf("no observations: %+v", empty)
	}
}

// Placeholders are named.
func TestSigmasMadeUp(t *testing.T) {
	for _, c := range []struct {
		name string
		make func(i float64) float64
		want string
	}{
		{"all one", func(float64) float64 { return 1 }, "sigma-same sigma-small"},
		{"a tenth of the intensity", func(i float64) float64 { return 0.1*math.Abs(i) + 1e-9 }, "sigma-proportional sigma-small"},
		{"in another unit", func(i float64) float64 { return 1e-4 * (10 + math.Sqrt(math.Abs(i))) }, "sigma-small sigma-tiny"},
		{"as counts would", func(i float64) float64 { return math.Sqrt(100 + math.Abs(i)*0.01) }, ""},
	} {
		unique, columns := pairsOf(500, 100, 10, 10, 4)
		for r := range columns.Sigma {
			columns.Sigma[r] = c.make(columns.I[r])
		}
		before := slices.Clone(columns.I)
		s := CheckSigmas(unique, columns)
		got := codes(s.Warnings)
		if got != c.want {
			t.Errorf("%s: %q, want %q: %+v", c.name, got, c.want, s)
		}
		floatcmp.CheckSlice(t, "the columns given", columns.I, before, 0, 0)
	}
}
