package resample

import (
	"math"
	"os"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Efron & Tibshirani 1993, Table 3.1 (law school), 14.1 (spatial), 2.1 (mouse),
// 10.1 (patch). Expected values: exact enumerations and R 4.2.2.
var (
	lsat     = []float64{576, 635, 558, 578, 666, 580, 555, 661, 651, 605, 653, 575, 545, 572, 594}
	gpa      = []float64{3.39, 3.30, 2.81, 3.03, 3.44, 3.07, 3.00, 3.43, 3.36, 3.13, 3.12, 2.74, 2.76, 2.88, 2.96}
	spatialA = []float64{48, 36, 20, 29, 42, 42, 20, 42, 22, 41, 45, 14, 6, 0, 33, 28, 34, 4, 32, 24, 47, 41, 24, 26, 30, 41}
	mouseTrt = []float64{94, 197, 16, 38, 99, 141, 23}
	mouseCtl = []float64{52, 104, 146, 10, 51, 30, 40, 27, 46}
	patchZ   = []float64{8406, 2342, 8187, 8459, 4795, 3516, 4796, 10238}
	patchY   = []float64{-1200, 2601, -2705, 1982, -1290, 351, -638, -2719}
)

func TestLawSchoolJackknife(t *testing.T) {
	b := must[*ScalarBoot](t)(Scalars(bg, 15, correlation(lsat, gpa), &Settings{Replicates: 20}))
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"r", b.Estimate[0], 0.776374491289, 1e-11},
		{"jackknife SE (Efron 1982: .1425)", b.JackSE[0], 0.142518618602, 1e-11},
		{"jackknife bias (Efron 1982: -.0065)", b.JackBias[0], -0.00647362304592, 1e-11},
		{"acceleration", b.Accel[0], -0.0756715649379, 1e-11},
		{"different resamples (Diaconis & Holmes 1994)", Multisets(15), 77558760, 0},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
}

// Monte Carlo, 10000 replicates: 4 standard deviations of one run.
func TestLawSchoolMonteCarlo(t *testing.T) {
	for _, c := range []struct {
		level                    float64
		lo, hi, loBCa, hiBCa     float64
		tolLo, tolHi, tolLB, tHB float64
	}{
		{0.95, 0.4595558, 0.9618457, 0.3326357, 0.9417148, 4 * .0054, 4 * .0011, 4 * .012, 4 * .0014},
		{0.90, 0.5230652, 0.9475308, 0.4291033, 0.9268592, 4 * .0054, 4 * .0011, 4 * .012, 4 * .0014},
	} {
		b := must[*ScalarBoot](t)(Scalars(bg, 15, correlation(lsat, gpa), &Settings{Replicates: 10000, Level: c.level, Seed: NewSeed(11)}))
		if b.Scheme != SchemeMultinomial || len(b.Warnings) != 0 {
			t.Errorf("scheme %v, warnings %v", b.Scheme, b.Warnings)
		}
		floatcmp.Check(t, "SE", b.SE[0], 0.133559762, 4*.0011, 0)
		floatcmp.Check(t, "bias", b.Bias[0], -0.005729413, 4*.1336/100, 0)
		floatcmp.Check(t, "lo", b.Lo[0], c.lo, c.tolLo, 0)
		floatcmp.Check(t, "hi", b.Hi[0], c.hi, c.tolHi, 0)
		floatcmp.Check(t, "BCa lo", b.LoBCa[0], c.loBCa, c.tolLB, 0)
		floatcmp.Check(t, "BCa hi", b.HiBCa[0], c.hiBCa, c.tHB, 0)
		floatcmp.Check(t, "achieved", b.Achieved[0], c.level, 2e-4, 0)
		floatcmp.Check(t, "covariance", b.Cov[0][0], b.SE[0]*b.SE[0], 0, 1e-12)
	}
}

// All 77558760 resamples; about ten seconds.
func TestLawSchoolExact(t *testing.T) {
	if os.Getenv("THINWARD_FULL") == "" {
		t.Skip("set THINWARD_FULL=1 to enumerate 77558760 resamples")
	}
	const bins = 1 << 22
	hist := make([]float64, bins)
	var sum, two, total, below, equal float64
	e := 0.776374491289
	seen := 0
	eachMultiset(15, func(count []uint8, p float64) {
		seen++
		var n, x, y, xx, yy, xy float64
		for i, c := range count {
			if c == 0 {
				continue
			}
			k := float64(c)
			dx, dy := lsat[i]-600, gpa[i]-3.1
			n += k
			x += k * dx
			y += k * dy
			xx += k * dx * dx
			yy += k * dy * dy
			xy += k * dx * dy
		}
		d := (xx - x*x/n) * (yy - y*y/n)
		if d <= 1e-9 {
			return
		}
		r := (xy - x*y/n) / math.Sqrt(d)
		total += p
		sum += p * r
		two += p * r * r
		switch {
		case math.Abs(r-e) < 1e-11:
			equal += p
		case r < e:
			below += p
		}
		hist[min(bins-1, int((math.Max(r, -1)+1)/2*bins))] += p
	})
	if seen != 77558760 {
		t.Errorf("%d resamples", seen)
	}
	mean := sum / total
	floatcmp.Check(t, "exact SE", math.Sqrt(two/total-mean*mean), 0.133559762, 1e-8, 0)
	floatcmp.Check(t, "exact bias", mean-e, -0.005729413, 1e-8, 0)
	floatcmp.Check(t, "P(r* < r)", below, 0.461365949393, 1e-9, 0)
	floatcmp.Check(t, "P(r* = r)", equal, 2.986281e-6, 1e-9, 0)
	at := func(p float64) float64 {
		s := 0.0
		for i, v := range hist {
			if s += v; s >= p {
				return (float64(i)+0.5)/bins*2 - 1
			}
		}
		return 1
	}
	for _, c := range [][2]float64{{.025, 0.4595558}, {.05, 0.5230652}, {.5, 0.7896488}, {.95, 0.9475308}, {.975, 0.9618457}} {
		floatcmp.Check(t, "percentile", at(c[0]), c[1], 1e-6, 0)
	}
	z0 := normQuantile(below)
	floatcmp.Check(t, "z0", z0, -0.0969930688, 1e-8, 0)
	for _, c := range []struct{ alpha, lo, hi, l1, l2 float64 }{
		{.05, 0.4291033, 0.9268592, 0.0177204005, 0.9012274097},
		{.025, 0.3326357, 0.9417148, 0.0056522116, 0.9377059146},
	} {
		p1, p2 := bcaLevels(z0, -0.0756715649379, c.alpha)
		floatcmp.Check(t, "level", p1, c.l1, 1e-8, 0)
		floatcmp.Check(t, "level", p2, c.l2, 1e-8, 0)
		floatcmp.Check(t, "BCa", at(p1), c.lo, 1e-5, 0)
		floatcmp.Check(t, "BCa", at(p2), c.hi, 1e-5, 0)
	}
}

func TestBCaLevels(t *testing.T) {
	for _, c := range []struct{ z0, a, alpha, lo, hi, tol float64 }{
		{-0.0969930688, -0.0756715649379, .05, 0.0177204005, 0.9012274097, 1e-8},
		{-0.0969930688, -0.0756715649379, .025, 0.0056522116, 0.9377059146, 1e-8},
		{0, 0, .025, .025, .975, 1e-14},
		{0, 1, .025, 0.5 * math.Erfc(1.959963984540054/2.959963984540054/math.Sqrt2), 1, 1e-12}, // 1 - a z < 0 above
	} {
		lo, hi := bcaLevels(c.z0, c.a, c.alpha)
		floatcmp.Check(t, "lower level", lo, c.lo, c.tol, 0)
		floatcmp.Check(t, "upper level", hi, c.hi, c.tol, 0)
	}
	floatcmp.Check(t, "z0 from P*", normQuantile(0.461365949393), -0.0969930688, 1e-9, 0)
	floatcmp.Check(t, "z0 from P*", normQuantile(0.5706033311), 0.1779104068, 1e-9, 0)
	// R qnorm and pnorm.
	floatcmp.Check(t, "quantile", normQuantile(1e-10), -6.3613409024, 1e-10, 0)
	floatcmp.Check(t, "quantile", normQuantile(.975), 1.95996398454, 1e-10, 0)
	floatcmp.Check(t, "distribution", normCDF(1.96), .975002104852, 1e-10, 0)
	floatcmp.Check(t, "tail", normCDF(-8), 6.22096057427e-16, 0, 1e-9)
}

func TestSpatial(t *testing.T) {
	b := must[*ScalarBoot](t)(Scalars(bg, 26, plugInVariance(spatialA), &Settings{Replicates: 10000, Level: 0.9, Seed: NewSeed(5)}))
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"theta", b.Estimate[0], 171.534023669, 1e-8},
		{"a", b.Accel[0], 0.0612401198123, 1e-12},
		{"mean", b.Estimate[0] + b.Bias[0], 164.936561220, 4 * 41.83 / 100},
		{"SE", b.SE[0], 41.832816940, 4 * .27},
		{"z0", b.Z0[0], 0.1779104068, 4 * .0126},
		{"lo", b.Lo[0], 97.794379, 4 * .78},
		{"hi", b.Hi[0], 235.616864, 4 * .96},
		{"BCa lo", b.LoBCa[0], 115.717456, 4 * .84},
		{"BCa hi", b.HiBCa[0], 261.350592, 4 * 1.78},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
}

// The exact bootstrap law of the plug-in variance: the 26 draws added one after
// another on the lattice of (sum x, sum x^2).
func TestSpatialExact(t *testing.T) {
	if os.Getenv("THINWARD_FULL") == "" {
		t.Skip("set THINWARD_FULL=1 for the exact law of 26 units")
	}
	// rows[s][q - s*s/t] is the probability of sum s and sum of squares q after t
	// draws; the squares of a sum s lie between s^2/t and 48 s.
	n, top := len(spatialA), 48
	rows := [][]float64{{1}}
	for t := 1; t <= n; t++ {
		next := make([][]float64, top*t+1)
		for s := range next {
			next[s] = make([]float64, top*s-s*s/t+1)
		}
		for s, row := range rows {
			first := 0
			if t > 1 {
				first = s * s / (t - 1)
			}
			for _, value := range spatialA {
				v := int(value)
				to := next[s+v]
				shift := first + v*v - (s+v)*(s+v)/t
				for i, p := range row {
					if p > 0 {
						to[i+shift] += p / float64(n)
					}
				}
			}
		}
		rows = next
	}
	var x, prob []float64
	for s, row := range rows {
		for i, p := range row {
			if p > 0 {
				m := float64(s) / float64(n)
				x, prob = append(x, float64(i+s*s/n)/float64(n)-m*m), append(prob, p)
			}
		}
	}
	l := newLaw(x, prob)
	mean, sd := l.moments()
	floatcmp.Check(t, "mean", mean, 164.936561220, 1e-8, 0)
	floatcmp.Check(t, "SE", sd, 41.832816940, 1e-8, 0)
	below := 0.0
	for i, v := range x {
		if v < 171.534023669-1e-6 {
			below += prob[i]
		}
	}
	floatcmp.Check(t, "P(theta* < theta)", below, 0.5706033311, 1e-9, 0)
	for _, c := range []struct{ alpha, lo, hi, loBCa, hiBCa float64 }{
		{.05, 97.794379, 235.616864, 115.717456, 261.350592},
		{.025, 86.474852, 249.485207, 105.775148, 279.255917},
	} {
		floatcmp.Check(t, "lo", l.lower(c.alpha), c.lo, 2e-3, 0)
		floatcmp.Check(t, "hi", l.upper(1-c.alpha), c.hi, 2e-3, 0)
		p1, p2 := bcaLevels(0.1779104068, 0.0612401198123, c.alpha)
		floatcmp.Check(t, "BCa lo", l.lower(p1), c.loBCa, 2e-3, 0)
		floatcmp.Check(t, "BCa hi", l.upper(p2), c.hiBCa, 2e-3, 0)
	}
}
