package pool

import (
	"errors"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Line is a straight line y = Intercept + Slope x.
type Line struct {
	Slope, SlopeSE, SlopeLo, SlopeHi float64
	Intercept, InterceptSE           float64
	Cov                              float64 // of slope and intercept
	Chi2                             float64
	DF                               int
	Level                            float64
}

// ThroughOrigin fits y = slope x by generalised least squares with the full
// covariance of y, as positions of one crystal need it that share a reference:
// mu against the thinnest is 0 at x = 0 by definition.
//
//	slope = x'C^-1 y / x'C^-1 x, C = cov + slope^2 diag(xSE^2) + slope^2 xShared xShared'
//
// xSE are the independent standard errors of x; xShared is the part that all x
// share (the standard error of each from a common cause, fully correlated), nil
// for none. C depends on the slope; it is iterated until the slope moves by less
// than 1e-12 of its error (effective variance: York 1966; Orear 1982). Chi2 has
// n-1 degrees of freedom.
func ThroughOrigin(x, y []float64, cov mat.Symmetric, xSE, xShared []float64, level float64) (*Line, error) {
	n := len(x)
	if n == 0 || len(y) != n || cov == nil || cov.SymmetricDim() != n || xSE != nil && len(xSE) != n || xShared != nil && len(xShared) != n {
		return nil, errors.New("pool: ThroughOrigin: lengths differ or nothing given")
	}
	if level == 0 {
		level = 0.95
	}
	norm := 0.0
	for i := range x {
		if math.IsNaN(x[i]) || math.IsNaN(y[i]) || math.IsInf(x[i], 0) || math.IsInf(y[i], 0) {
			return nil, fmt.Errorf("pool: point %d is (%g, %g)", i, x[i], y[i])
		}
		norm += x[i] * x[i]
	}
	if norm == 0 {
		return nil, errors.New("pool: all points lie at x = 0")
	}
	l := &Line{DF: n - 1, Level: level}
	xv, yv := mat.NewVecDense(n, x), mat.NewVecDense(n, y)
	for iteration := 0; ; iteration++ {
		c := mat.NewSymDense(n, nil)
		for i := range n {
			for j := i; j < n; j++ {
				v := cov.At(i, j)
				if i == j && xSE != nil {
					v += l.Slope * l.Slope * xSE[i] * xSE[i]
				}
				if xShared != nil {
					v += l.Slope * l.Slope * xShared[i] * xShared[j]
				}
				c.SetSym(i, j, v)
			}
		}
		var chol mat.Cholesky
		if !chol.Factorize(c) {
			return nil, errors.New("pool: the covariance of the points is not positive definite")
		}
		var cx, cy mat.VecDense
		if err := chol.SolveVecTo(&cx, xv); err != nil {
			return nil, fmt.Errorf("pool: covariance of the points: %w", err)
		}
		if err := chol.SolveVecTo(&cy, yv); err != nil {
			return nil, fmt.Errorf("pool: covariance of the points: %w", err)
		}
		information := mat.Dot(xv, &cx)
		slope := mat.Dot(xv, &cy) / information
		l.SlopeSE = 1 / math.Sqrt(information)
		moved := math.Abs(slope - l.Slope)
		l.Slope = slope
		l.Chi2 = math.Max(0, mat.Dot(yv, &cy)-slope*slope*information)
		if iteration > 0 && !(moved > 1e-12*l.SlopeSE) || iteration == 200 {
			break
		}
	}
	z := distuv.UnitNormal.Quantile((1 + level) / 2)
	l.SlopeLo, l.SlopeHi = l.Slope-z*l.SlopeSE, l.Slope+z*l.SlopeSE
	return l, nil
}

// York fits a line with independent errors in both coordinates, given as
// standard errors, by the unified equations of York, Evensen, Lopez Martinez &
// De Basabe Delgado (2004), eq. 13; standard errors by the adjusted points, not
// multiplied by sqrt(chi2/df). It is for points that share nothing (separate
// crystals); positions of one crystal share their reference.
func York(x, y, xSE, ySE []float64, level float64) (*Line, error) {
	n := len(x)
	if n < 2 || len(y) != n || len(xSE) != n || len(ySE) != n {
		return nil, errors.New("pool: York: needs two points or more and lists of equal length")
	}
	for i := range x {
		if !(xSE[i] >= 0) || !(ySE[i] >= 0) || xSE[i]+ySE[i] == 0 || math.IsInf(xSE[i]+ySE[i], 0) || math.IsNaN(x[i]+y[i]) {
			return nil, fmt.Errorf("pool: York: point %d is (%g, %g) with standard errors (%g, %g)", i, x[i], y[i], xSE[i], ySE[i])
		}
	}
	if level == 0 {
		level = 0.95
	}
	b := slopeOf(x, y)
	w, beta := make([]float64, n), make([]float64, n)
	var xm, ym, sw float64
	for range 500 {
		xm, ym, sw = 0, 0, 0
		for i := range x {
			w[i] = 1 / (ySE[i]*ySE[i] + b*b*xSE[i]*xSE[i])
			sw += w[i]
			xm += w[i] * x[i]
			ym += w[i] * y[i]
		}
		xm, ym = xm/sw, ym/sw
		var top, bottom float64
		for i := range x {
			u, v := x[i]-xm, y[i]-ym
			beta[i] = w[i] * (u*ySE[i]*ySE[i] + b*v*xSE[i]*xSE[i])
			top += w[i] * beta[i] * v
			bottom += w[i] * beta[i] * u
		}
		if bottom == 0 {
			return nil, errors.New("pool: York: all points lie at one x")
		}
		next := top / bottom
		moved := math.Abs(next - b)
		b = next
		if moved <= 1e-15*math.Abs(b) {
			break
		}
	}
	l := &Line{Slope: b, Intercept: ym - b*xm, DF: n - 2, Level: level}
	var adjusted, spread float64
	for i := range x {
		adjusted += w[i] * (xm + beta[i])
	}
	adjusted /= sw
	for i := range x {
		d := xm + beta[i] - adjusted
		spread += w[i] * d * d
		r := y[i] - l.Intercept - b*x[i]
		l.Chi2 += w[i] * r * r
	}
	l.SlopeSE = 1 / math.Sqrt(spread)
	l.InterceptSE = math.Sqrt(1/sw + adjusted*adjusted/spread)
	l.Cov = -adjusted / spread
	z := distuv.UnitNormal.Quantile((1 + level) / 2)
	l.SlopeLo, l.SlopeHi = b-z*l.SlopeSE, b+z*l.SlopeSE
	return l, nil
}

func slopeOf(x, y []float64) float64 {
	var xm, ym, sxx, sxy float64
	n := float64(len(x))
	for i := range x {
		xm += x[i] / n
		ym += y[i] / n
	}
	for i := range x {
		sxx += (x[i] - xm) * (x[i] - xm)
		sxy += (x[i] - xm) * (y[i] - ym)
	}
	if sxx == 0 {
		return 0
	}
	return sxy / sxx
}
