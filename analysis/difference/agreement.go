package difference

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Agreement compares two sets of measurements of the same things, d = a - b
// (Bland & Altman 1986, Lancet i, 307). LimitLo and LimitHi are Mean -+ 1.96
// SD; LimitSE is sqrt(3/n) SD. R is the correlation of a with b.
//
// SlopeMean is the slope of d on (a + b)/2, RMean its correlation, and T, DF, P
// the test of Pitman (1939) and Morgan (1939) that a and b have one variance,
// which is that this correlation is zero. SlopeA and SlopeB are the slopes of d
// on a and on b, which differ from zero by noise alone. Concordance is Lin's
// (1989), with n in the denominators.
type Agreement struct {
	N                      int
	Mean, SD, MeanSE, RMS  float64
	MeanLo, MeanHi         float64 // 95 % of Mean, Student t
	LimitLo, LimitHi       float64
	LimitSE                float64
	R, Concordance         float64
	SlopeMean, RMean       float64
	T, DF, P               float64
	SlopeA, SlopeB, RA, RB float64
}

// Agree compares a with b, parallel and finite. Fewer than three pairs, or a
// side that does not vary, are errors.
func Agree(a, b []float64) (*Agreement, error) {
	if len(a) != len(b) || len(a) < 3 {
		return nil, fmt.Errorf("agreement of %d with %d values: equal numbers, three at least, are needed", len(a), len(b))
	}
	n := float64(len(a))
	d, middle := make([]float64, len(a)), make([]float64, len(a))
	g := &Agreement{N: len(a)}
	for i := range a {
		if s := a[i] + b[i]; math.IsNaN(s) || math.IsInf(s, 0) {
			return nil, fmt.Errorf("agreement: values %g and %g at %d are not finite", a[i], b[i], i)
		}
		d[i], middle[i] = a[i]-b[i], 0.5*(a[i]+b[i])
		g.RMS += d[i] * d[i] / n
	}
	g.RMS = math.Sqrt(g.RMS)
	dd, _ := products(d, d)
	aa, ab := products(a, b)
	bb, _ := products(b, b)
	if aa == 0 || bb == 0 {
		return nil, fmt.Errorf("agreement: one side does not vary")
	}
	g.Mean, g.SD = mean(d), math.Sqrt(dd/(n-1))
	g.MeanSE = g.SD / math.Sqrt(n)
	half := distuv.StudentsT{Mu: 0, Sigma: 1, Nu: n - 1}.Quantile(0.975) * g.MeanSE
	g.MeanLo, g.MeanHi = g.Mean-half, g.Mean+half
	g.LimitLo, g.LimitHi, g.LimitSE = g.Mean-1.96*g.SD, g.Mean+1.96*g.SD, math.Sqrt(3/n)*g.SD
	g.R = ab / math.Sqrt(aa*bb)
	g.Concordance = 2 * ab / (aa + bb + n*g.Mean*g.Mean)
	g.SlopeMean, g.RMean = slopeOf(middle, d)
	g.SlopeA, g.RA = slopeOf(a, d)
	g.SlopeB, g.RB = slopeOf(b, d)
	g.DF = n - 2
	g.T = g.RMean * math.Sqrt(g.DF/(1-g.RMean*g.RMean))
	g.P = 2 * distuv.StudentsT{Mu: 0, Sigma: 1, Nu: g.DF}.CDF(-math.Abs(g.T))
	return g, nil
}

// slopeOf returns the slope and the correlation of y on x, NaN when x does not
// vary.
func slopeOf(x, y []float64) (slope, r float64) {
	xx, xy := products(x, y)
	yy, _ := products(y, y)
	return xy / xx, xy / math.Sqrt(xx*yy)
}
