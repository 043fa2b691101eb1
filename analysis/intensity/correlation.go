package intensity

import "math"

// Correlate returns the product-moment correlation of x and y over the places
// where neither is NaN, and their number; NaN when one does not vary there. It
// panics when they differ in length.
func Correlate(x, y []float64) (r float64, n int) {
	if len(x) != len(y) {
		panic("intensity: Correlate: x and y differ in length")
	}
	mx, my := 0.0, 0.0
	for i := range x {
		if !math.IsNaN(x[i]) && !math.IsNaN(y[i]) {
			n++
			mx += (x[i] - mx) / float64(n)
			my += (y[i] - my) / float64(n)
		}
	}
	var xx, yy, xy float64
	for i := range x {
		if !math.IsNaN(x[i]) && !math.IsNaN(y[i]) {
			dx, dy := x[i]-mx, y[i]-my
			xx += dx * dx
			yy += dy * dy
			xy += dx * dy
		}
	}
	if xx == 0 || yy == 0 {
		return math.NaN(), n
	}
	return xy / math.Sqrt(xx*yy), n
}

// CCStar estimates the correlation of the merged intensities with the true
// ones from that of two halves, sqrt(2 r / (1 + r)) (Karplus & Diederichs
// 2012); NaN for r below zero.
func CCStar(r float64) float64 { return math.Sqrt(2 * r / (1 + r)) }

// RSplit is the disagreement of two halves,
//
//	(1/sqrt 2) sum |x - y| / sum (x + y)/2
//
// over the places where neither is NaN; NaN when the sum below is not above
// zero. Source: common practice for lists measured in many parts, formula from
// memory.
func RSplit(x, y []float64) float64 {
	if len(x) != len(y) {
		panic("intensity: RSplit: x and y differ in length")
	}
	num, den := 0.0, 0.0
	for i := range x {
		if !math.IsNaN(x[i]) && !math.IsNaN(y[i]) {
			num += math.Abs(x[i] - y[i])
			den += 0.5 * (x[i] + y[i])
		}
	}
	if den <= 0 {
		return math.NaN()
	}
	return num / den / math.Sqrt2
}

// SigmaTau is CC1/2 without a random split (Assmann, Brehm & Diederichs 2016):
//
//	(V - E) / (V + E),  V the variance of the means, E the mean of s^2/n
//
// over reflections observed at least twice, s^2 their sample variance. It
// returns the number of reflections; NaN for fewer than two.
func SigmaTau(unique []int32, i []float64) (cc float64, n int) {
	var acc sigmaTau
	eachReflection(unique, i, func(_ int32, values []float64) { acc.add(values) })
	return acc.value(), acc.n
}

type sigmaTau struct {
	n                 int
	mean, square, err float64
}

func (a *sigmaTau) add(values []float64) {
	if len(values) < 2 {
		return
	}
	m, s := meanOf(values), 0.0
	for _, x := range values {
		s += (x - m) * (x - m)
	}
	k := float64(len(values))
	a.n++
	a.err += s / (k - 1) / k
	delta := m - a.mean
	a.mean += delta / float64(a.n)
	a.square += delta * (m - a.mean)
}

func (a *sigmaTau) value() float64 {
	if a.n < 2 {
		return math.NaN()
	}
	v, e := a.square/float64(a.n-1), a.err/float64(a.n)
	return (v - e) / (v + e)
}
