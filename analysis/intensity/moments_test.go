package intensity

import (
	"fmt"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Howells, Phillips & Rogers 1950 and Wilson 1949; digits by numerical
// integration of the densities.
func TestWilsonBelow(t *testing.T) {
	acentric := []float64{.0951626, .181269, .259182, .329680, .393469, .451188, .503415, .550671, .593430, .632121}
	centric := []float64{.248170, .345279, .416118, .472911, .520500, .561422, .597216, .628907, .657218, .682689}
	twin := []float64{.0175231, .0615519, .121901, .191208, .264241, .337373, .408167, .475069, .537163, .593994}
	for k := range acentric {
		z := 0.1 * float64(k+1)
		floatcmp.Check(t, "acentric", WilsonBelow(z, false), acentric[k], 6e-7, 0)
		floatcmp.Check(t, "centric", WilsonBelow(z, true), centric[k], 6e-7, 0)
		floatcmp.Check(t, "twin", TwinBelow(z), twin[k], 6e-7, 0)
	}
	floatcmp.Check(t, "below zero", WilsonBelow(-1, true), 0, 0, 0)
	for _, c := range []struct {
		n       int
		centric bool
		want    float64
	}{{2, false, 2}, {2, true, 3}, {3, false, 6}, {3, true, 15}, {0, true, 1}, {1, true, 1}} {
		floatcmp.Check(t, "moment", WilsonMoment(c.n, c.centric), c.want, 0, 0)
	}
}

// Oracle: trapezoid of the density of z times the normal distribution function,
// in the variable u with z = u^2, where both densities are smooth.
func TestWilsonNoisyBelow(t *testing.T) {
	for _, centric := range []bool{false, true} {
		for _, sigma := range []float64{0.02, 0.3, 1, 5} {
			for _, z := range []float64{-3 * sigma, -sigma, 0, 0.5, 2} {
				sum := 0.0
				const n, end = 40000, 9.0
				for k := 0; k <= n; k++ {
					u := end * float64(k) / n
					density := 2 * u * math.Exp(-u*u)
					if centric {
						density = math.Sqrt(2/math.Pi) * math.Exp(-0.5*u*u)
					}
					w := 1.0
					if k == 0 || k == n {
						w = 0.5
					}
					sum += w * density * normalCDF((z-u*u)/sigma) * end / n
				}
				floatcmp.Check(t, fmt.Sprintf("centric %v, z %g, sigma %g", centric, z, sigma), WilsonNoisyBelow(z, sigma, centric), sum, 2e-8, 0)
			}
		}
		floatcmp.Check(t, "no noise", WilsonNoisyBelow(0.4, 0, centric), WilsonBelow(0.4, centric), 0, 0)
		floatcmp.Check(t, "noise alone", WilsonNoisyBelow(-1e6, 1e6, centric), normalCDF(-1), 1e-5, 0)
		floatcmp.Check(t, "tiny noise", WilsonNoisyBelow(0.4, 1e-7, centric), WilsonBelow(0.4, centric), 1e-6, 0)
		floatcmp.Check(t, "negative sigma", WilsonNoisyBelow(0.4, -1, centric), math.NaN(), 0, 0)
	}
}

// With noise as large as the mean, the second moment of the merged values is
// off by their variance; that of the halves is Wilson's.
func TestHalfMoments(t *testing.T) {
	cat, s := invented(t, 5, 0.1, 40, 1)
	a, b := MergeHalves(cat.Len(), s, 1)
	m := Merge(cat.Len(), s)
	sh := cat.Shells(10, m)
	acentric, centric := HalfMoments(a, b, cat, sh)
	for _, c := range []struct {
		name string
		m    *Moments
	}{{"acentric", acentric}, {"centric", centric}} {
		floatcmp.Check(t, c.name+" mean", c.m.Mean, 1, 4*c.m.MeanSE, 0)
		floatcmp.Check(t, c.name+" second", c.m.Second, c.m.TheorySecond, 4*c.m.SecondSE, 0)
		floatcmp.Check(t, c.name+" third", c.m.Third, c.m.TheoryThird, 4*c.m.ThirdSE, 0)
		if !(c.m.SecondSE < 0.35 && c.m.SecondSE > 0.01) || c.m.N < 300 {
			t.Errorf("%s: %+v", c.name, *c.m)
		}
	}
	self, _ := HalfMoments(m, m, cat, sh)
	if !(self.Second > acentric.Second+5*acentric.SecondSE) {
		t.Errorf("the square of merged values gives %g, no more than the halves' %g", self.Second, acentric.Second)
	}
}

// The claimed standard errors against the scatter over 60 invented positions.
func TestHalfMomentsSE(t *testing.T) {
	var second, third, claimed2, claimed3 []float64
	for seed := range uint64(60) {
		cat, s := invented(t, 100+seed, 0.02, 15, 1)
		a, b := MergeHalves(cat.Len(), s, seed)
		m, _ := HalfMoments(a, b, cat, cat.Shells(5))
		second, third = append(second, m.Second), append(third, m.Third)
		claimed2, claimed3 = append(claimed2, m.SecondSE), append(claimed3, m.ThirdSE)
	}
	// 60 draws give a standard deviation to 9 %; the third moment's own error is skewed.
	floatcmp.Check(t, "SE of the second", meanOf(claimed2), sd(second), 0, 0.3)
	floatcmp.Check(t, "SE of the third", meanOf(claimed3), sd(third), 0, 0.4)
	floatcmp.Check(t, "mean of the second", meanOf(second), 2, 4*sd(second)/math.Sqrt(60), 0)
}

// Noise larger than the mean, over 60 invented positions: without the second
// term the third moment comes out near 7.
func TestHalfMomentsNeedNoSigma(t *testing.T) {
	var second, third []float64
	for seed := range uint64(60) {
		cat, s := invented(t, 300+seed, 0.02, 110, 1)
		a, b := MergeHalves(cat.Len(), s, seed)
		m, _ := HalfMoments(a, b, cat, cat.Shells(3))
		second, third = append(second, m.Second), append(third, m.Third)
	}
	floatcmp.Check(t, "second", meanOf(second), 2, 4*sd(second)/math.Sqrt(60), 0)
	floatcmp.Check(t, "third", meanOf(third), 6, 0.4, 0)
}

func sd(x []float64) float64 {
	m, s := meanOf(x), 0.0
	for _, v := range x {
		s += (v - m) * (v - m)
	}
	return math.Sqrt(s / float64(len(x)-1))
}

func TestHalfMomentsNone(t *testing.T) {
	cat, err := NewCatalogue(tarnCell, lookup(t, "P 1"))
	if err != nil {
		t.Fatal(err)
	}
	none := Merge(0, &Scaled{})
	m, _ := HalfMoments(none, none, cat, cat.Shells(3))
	floatcmp.Check(t, "no reflections", m.Second, math.NaN(), 0, 0)
}

func TestDistribution(t *testing.T) {
	cat, s := invented(t, 8, 0.1, 30, 1)
	m := Merge(cat.Len(), s)
	c := Distribution(m, cat, cat.Shells(10, m), nil)
	if c.AcentricN+c.CentricN != cat.Len() {
		t.Errorf("%d and %d of %d", c.AcentricN, c.CentricN, cat.Len())
	}
	for k, z := range c.Z {
		for _, x := range []struct {
			name                   string
			seen, expected, theory float64
			n                      int
		}{{"acentric", c.Acentric[k], c.AcentricExpected[k], c.AcentricTheory[k], c.AcentricN}, {"centric", c.Centric[k], c.CentricExpected[k], c.CentricTheory[k], c.CentricN}} {
			// Binomial 4 sd, and a shell mean uncertain by some percent.
			floatcmp.Check(t, fmt.Sprintf("%s below %g", x.name, z), x.seen, x.expected, 2/math.Sqrt(float64(x.n)), 0.02)
		}
	}
	if d := c.AcentricExpected[0] - c.AcentricTheory[0]; !(d > 0.05) {
		t.Errorf("noise adds %g below z = 0.1, too little to tell the two theories apart", d)
	}
}
