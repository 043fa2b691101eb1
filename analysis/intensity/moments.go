package intensity

import "math"

// Moments are those of the strength e = J/(epsilon <J>), <J> the local shell
// mean of both kinds of reflection, from two halves a and b of independent
// noise, over the powers of the kind's own mean:
//
//	Mean   = < (a + b)/2 >
//	Second = < a b > / Mean^2
//	Third  = < (a b - (a - b)^2 / 2) (a + b)/2 > / Mean^3
//
// None needs a sigma: the noise of a product of halves averages out, and the
// second term takes off what remains in the third moment (up to the skewness
// of the noise). Standard errors hold those of the shell means and of Mean.
// Fewer than two reflections: NaN. TheorySecond and TheoryThird are Wilson's.
type Moments struct {
	N                         int
	Mean, MeanSE              float64
	Second, SecondSE          float64
	Third, ThirdSE            float64
	TheorySecond, TheoryThird float64
}

// HalfMoments returns the moments of the acentric and of the centric allowed
// reflections that both halves measured. The shells must be of cat.Shells; a
// shell whose mean is not above zero is left out.
func HalfMoments(a, b *Merged, cat *Catalogue, sh *Shells) (acentric, centric *Moments) {
	e := halfStrengths(a, b, cat, sh)
	return e.moments(cat, false), e.moments(cat, true)
}

type halves struct {
	unique []int32
	shell  []int32
	a, b   []float64
	count  []float64 // of each shell
}

func halfStrengths(a, b *Merged, cat *Catalogue, sh *Shells) *halves {
	h := &halves{count: make([]float64, sh.N)}
	sum := make([]float64, sh.N)
	usable := func(u int) bool { return a.N[u] > 0 && b.N[u] > 0 && !cat.Absent[u] && sh.Of[u] >= 0 }
	for u := range a.J {
		if usable(u) {
			sum[sh.Of[u]] += 0.5 * (a.J[u] + b.J[u]) / float64(cat.Epsilon[u])
			h.count[sh.Of[u]]++
		}
	}
	for u := range a.J {
		if s := sh.Of[u]; usable(u) && sum[s] > 0 {
			local := sum[s] / h.count[s] * float64(cat.Epsilon[u])
			h.unique, h.shell = append(h.unique, int32(u)), append(h.shell, s)
			h.a, h.b = append(h.a, a.J[u]/local), append(h.b, b.J[u]/local)
		}
	}
	return h
}

func (h *halves) moments(cat *Catalogue, centric bool) *Moments {
	m := &Moments{TheorySecond: WilsonMoment(2, centric), TheoryThird: WilsonMoment(3, centric)}
	var value [3][]float64
	for k := range value {
		value[k] = make([]float64, len(h.a))
	}
	in := make([]bool, len(h.a))
	for i, u := range h.unique {
		if in[i] = cat.Centric[u] == centric; in[i] {
			a, b := h.a[i], h.b[i]
			value[0][i] = 0.5 * (a + b)
			value[1][i] = a * b
			value[2][i] = (a*b - 0.5*(a-b)*(a-b)) * 0.5 * (a + b)
			m.N++
		}
	}
	if m.N < 2 {
		nan := math.NaN()
		m.Mean, m.MeanSE, m.Second, m.SecondSE, m.Third, m.ThirdSE = nan, nan, nan, nan, nan, nan
		return m
	}
	var mean [3]float64
	var influence [3][]float64
	for k := range value {
		mean[k], influence[k] = h.average(value[k], in, float64(m.N), float64(k+1))
	}
	m.Mean = mean[0]
	m.MeanSE = rootSumSquares(influence[0])
	m.Second, m.SecondSE = overPower(mean[1], influence[1], mean[0], influence[0], 2)
	m.Third, m.ThirdSE = overPower(mean[2], influence[2], mean[0], influence[0], 3)
	return m
}

// average returns the mean of value over the reflections that are in, and the
// influence of every reflection on it when value goes with the given power of
// the shell mean: its own, and what it does to its shell's mean.
func (h *halves) average(value []float64, in []bool, n, power float64) (mean float64, influence []float64) {
	ofShell := make([]float64, len(h.count))
	for i, v := range value {
		if in[i] {
			mean += v / n
			ofShell[h.shell[i]] += v / n
		}
	}
	influence = make([]float64, len(value))
	for i, v := range value {
		s := h.shell[i]
		influence[i] = -power * ofShell[s] / h.count[s] * (0.5*(h.a[i]+h.b[i]) - 1)
		if in[i] {
			influence[i] += (v - mean) / n
		}
	}
	return mean, influence
}

// overPower returns moment/mean^power and its standard error.
func overPower(moment float64, ofMoment []float64, mean float64, ofMean []float64, power float64) (ratio, se float64) {
	scale := math.Pow(mean, power)
	ratio = moment / scale
	joint := make([]float64, len(ofMoment))
	for i := range joint {
		joint[i] = ofMoment[i]/scale - power*ratio/mean*ofMean[i]
	}
	return ratio, rootSumSquares(joint)
}

func rootSumSquares(x []float64) float64 {
	s := 0.0
	for _, v := range x {
		s += v * v
	}
	return math.Sqrt(s)
}

// Cumulative is the share of reflections below each strength Z, observed, by
// Wilson's law, and by Wilson's law broadened with each reflection's own sigma.
// The columns are parallel to Z; a kind without reflections has NaN.
type Cumulative struct {
	Z                                          []float64
	Acentric, AcentricTheory, AcentricExpected []float64
	Centric, CentricTheory, CentricExpected    []float64
	AcentricN, CentricN                        int
}

// Distribution returns the cumulative distributions of a merged position at the
// strengths z (nil stands for 0.1 to 1.0). The shells must be of cat.Shells.
func Distribution(m *Merged, cat *Catalogue, sh *Shells, z []float64) *Cumulative {
	if z == nil {
		z = []float64{0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0}
	}
	c := &Cumulative{Z: append([]float64(nil), z...)}
	mean, _ := cat.Means(m, sh)
	c.Acentric, c.AcentricTheory, c.AcentricExpected, c.AcentricN = below(m, cat, sh, mean, z, false)
	c.Centric, c.CentricTheory, c.CentricExpected, c.CentricN = below(m, cat, sh, mean, z, true)
	return c
}

func below(m *Merged, cat *Catalogue, sh *Shells, mean, z []float64, centric bool) (seen, theory, expected []float64, n int) {
	seen, theory, expected = make([]float64, len(z)), make([]float64, len(z)), make([]float64, len(z))
	for u := range m.J {
		s := sh.Of[u]
		if m.N[u] == 0 || cat.Absent[u] || cat.Centric[u] != centric || s < 0 || !(mean[s] > 0) {
			continue
		}
		n++
		local := mean[s] * float64(cat.Epsilon[u])
		e, sigma := m.J[u]/local, math.Sqrt(m.Var[u])/local
		for k, x := range z {
			if e < x {
				seen[k]++
			}
			expected[k] += WilsonNoisyBelow(x, sigma, centric)
		}
	}
	for k, x := range z {
		seen[k] /= float64(n)
		expected[k] /= float64(n)
		theory[k] = WilsonBelow(x, centric)
	}
	return seen, theory, expected, n
}
