package scaling

import (
	"context"
	"math"
)

// climber maximises a noise likelihood by Newton steps on a quadratic model from
// differences, inside bounds.
type climber struct {
	e     *equivalents
	ctx   context.Context
	h     noiseParams
	fixed [3]bool
}

// climb returns the maximum over the parameters that are not fixed, to within
// enough in likelihood.
func (c *climber) climb(x noiseParams, fixed [3]bool, enough float64) (noiseParams, float64) {
	best := x.clamped()
	top := c.e.logLik(best)
	for range 40 {
		if c.ctx.Err() != nil {
			break
		}
		at := c.newton(best, top, fixed)
		gain := 0.0
		for f := 1.0; f > 1e-2; f /= 3 {
			var y noiseParams
			for i := range y {
				y[i] = best[i] + f*(at[i]-best[i])
			}
			if l := c.e.logLik(y); l > top {
				gain = l - top
				best, top = y, l
				break
			}
		}
		if gain < enough {
			break
		}
	}
	return best, top
}

// newton returns the bounded maximum of the quadratic model about x.
func (c *climber) newton(x noiseParams, top float64, fixed [3]bool) noiseParams {
	centre, value := c.inside(x, fixed), top
	if centre != x {
		value = c.e.logLik(centre)
	}
	g, hess := c.differences(centre, value, fixed)
	held := fixed
	var d noiseParams
	for range 3 {
		d = solveSmall(g, hess, d, held)
		out := false
		for i := range d {
			if held[i] {
				continue
			}
			if y := centre[i] + d[i]; y < noiseLow[i] || y > noiseHigh[i] {
				d[i] = math.Max(noiseLow[i], math.Min(noiseHigh[i], y)) - centre[i]
				held[i], out = true, true
			}
		}
		if !out {
			break
		}
	}
	for i := range d {
		d[i] += centre[i]
	}
	return d
}

// inside moves x far enough from the bounds for differences.
func (c *climber) inside(x noiseParams, fixed [3]bool) noiseParams {
	for i := range x {
		if !fixed[i] {
			x[i] = math.Max(noiseLow[i]+c.h[i], math.Min(noiseHigh[i]-c.h[i], x[i]))
		}
	}
	return x
}

func (c *climber) differences(x noiseParams, value float64, fixed [3]bool) (g noiseParams, hess [3][3]float64) {
	var up, down noiseParams
	move := func(i int, s float64) noiseParams {
		y := x
		y[i] += s * c.h[i]
		return y
	}
	for i := range x {
		if fixed[i] {
			continue
		}
		up[i], down[i] = c.e.logLik(move(i, 1)), c.e.logLik(move(i, -1))
		g[i] = (up[i] - down[i]) / (2 * c.h[i])
		hess[i][i] = (up[i] - 2*value + down[i]) / (c.h[i] * c.h[i])
	}
	for i := range x {
		for j := range i {
			if fixed[i] || fixed[j] {
				continue
			}
			y := move(i, 1)
			y[j] += c.h[j]
			hess[i][j] = (c.e.logLik(y) - up[i] - up[j] + value) / (c.h[i] * c.h[j])
			hess[j][i] = hess[i][j]
		}
	}
	return g, hess
}

// solveSmall maximises g d + d H d/2 over the entries not held, the held ones of
// d given; a curvature of the wrong sign is replaced by a careful step.
func solveSmall(g noiseParams, hess [3][3]float64, d noiseParams, held [3]bool) noiseParams {
	var a [3][4]float64
	for i := range 3 {
		if held[i] {
			a[i][i], a[i][3] = 1, d[i]
			continue
		}
		a[i][3] = g[i]
		for j := range 3 {
			a[i][j] = -hess[i][j]
		}
		if !(a[i][i] > 0) {
			a[i][i] = math.Max(math.Abs(a[i][i]), 10*math.Abs(g[i])+1e-12)
		}
	}
	var out noiseParams
	for k := range 3 {
		for i := k + 1; i < 3; i++ {
			if a[k][k] == 0 {
				continue
			}
			f := a[i][k] / a[k][k]
			for j := k; j < 4; j++ {
				a[i][j] -= f * a[k][j]
			}
		}
	}
	for k := 2; k >= 0; k-- {
		s := a[k][3]
		for j := k + 1; j < 3; j++ {
			s -= a[k][j] * out[j]
		}
		if a[k][k] > 0 {
			out[k] = s / a[k][k]
		}
	}
	return out
}

// interval returns the ends at which the profile likelihood of parameter i has
// fallen by drop below its top.
func (c *climber) interval(best noiseParams, top float64, i int, drop float64) (lo, hi float64) {
	fixed := c.fixed
	fixed[i] = true
	below := func(v float64, from noiseParams) (float64, noiseParams) {
		from[i] = v
		x, l := c.climb(from, fixed, 0.02*drop)
		return top - l - drop, x
	}
	centre := c.inside(best, c.fixed)
	_, hess := c.differences(centre, c.e.logLik(centre), c.fixed)
	step := math.Sqrt(2 * drop / math.Max(-hess[i][i], 1e-12))
	return c.end(best, i, -step, drop, below), c.end(best, i, step, drop, below)
}

// end brackets and then narrows one end by the secant rule on the square root of
// the fall, which is nearly a straight line.
func (c *climber) end(best noiseParams, i int, step, drop float64, below func(float64, noiseParams) (float64, noiseParams)) float64 {
	near, fnear := best[i], -drop
	far := best[i]
	ffar, x := fnear, best
	for range 12 {
		far = math.Max(noiseLow[i], math.Min(noiseHigh[i], near+step))
		ffar, x = below(far, x)
		if ffar > 0 {
			break
		}
		if far == noiseLow[i] || far == noiseHigh[i] {
			return far
		}
		near, fnear = far, ffar
		step *= 1.5
	}
	for range 12 {
		a, b := math.Sqrt(math.Max(fnear+drop, 0)), math.Sqrt(ffar+drop)
		mid := near + (far-near)*(math.Sqrt(drop)-a)/(b-a)
		f, y := below(mid, x)
		if math.Abs(f) < 0.02*drop || math.Abs(far-near) < 1e-9 {
			return mid
		}
		if f > 0 {
			far, ffar = mid, f
		} else {
			near, fnear = mid, f
		}
		x = y
	}
	return 0.5 * (near + far)
}
