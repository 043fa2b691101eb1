package scaling

import (
	"context"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// noiseParams are ln a^2, b^2 and 1/nu.
type noiseParams [3]float64

// tails beyond 1/nu = 0.45 are not distinguished.
var (
	noiseLow  = noiseParams{-30, 0, 0}
	noiseHigh = noiseParams{30, 100, 0.45}
)

func (x noiseParams) clamped() noiseParams {
	for i := range x {
		x[i] = math.Max(noiseLow[i], math.Min(noiseHigh[i], x[i]))
	}
	return x
}

// logLik is the restricted log-likelihood: for each reflection
//
//	-1/2 (sum ln v + ln sum 1/v) + sum (1-l) ln t(z), z^2 = r^2/(v (1-l)),
//
// l the leverage of an observation on the mean of its reflection. Residuals from
// a mean are nearer to the normal law than the errors; t has the tails of
// groupTail and the variance that the errors have.
func (e *equivalents) logLik(x noiseParams) float64 {
	a, b, lambda := math.Exp(x[0]), x[1], x[2]
	total := 0.0
	tails := tailTable(lambda)
	var weights [16]float64
	for h := range e.reflections() {
		lo, hi := e.first[h], e.first[h+1]
		tail := tails[min(hi-lo, len(tails)-1)]
		w := weights[:0]
		var d, num float64
		prod, logs := 1.0, 0.0
		for i := lo; i < hi; i++ {
			v := a*e.p[i] + b*e.q[i]
			w = append(w, 1/v)
			d += 1 / v
			num += e.y[i] / v
			prod *= v
			if prod > 1e100 || prod < 1e-100 {
				logs += math.Log(prod)
				prod = 1
			}
		}
		mean := num / d
		logs += math.Log(prod * d)
		fit := 0.0
		for i, wi := range w {
			free := 1 - wi/d
			r := e.y[lo+i] - mean
			z2 := r * r * wi / (free * tail.widen)
			if tail.lambda < 1e-6 {
				fit += free * z2
			} else {
				fit += free * (1 + tail.lambda) / tail.lambda * math.Log1p(tail.lambda*z2)
			}
		}
		total += float64(hi-lo-1)*tail.constant - 0.5*(logs+fit)
	}
	return total
}

// groupTail describes residuals from the mean of n observations whose errors
// have 1/nu = lambda.
type groupTail struct{ lambda, widen, constant float64 }

// tailTable holds groupTail by n, the last for all larger n. The excess kurtosis
// of a residual is that of an error times kurt = ((1-1/n)^4 + (n-1)/n^4)/(1-1/n)^2.
// The square root of kurt, not kurt itself, is put on 1/nu: of the two it is the
// one that brings back scale and tails of simulated Student errors.
func tailTable(lambda float64) []groupTail {
	out := make([]groupTail, 64)
	for n := 2; n < len(out); n++ {
		x := 1 / float64(n)
		kurt := (math.Pow(1-x, 4) + (1-x)*math.Pow(x, 3)) / ((1 - x) * (1 - x))
		l := lambda * math.Sqrt(kurt)
		widen := (1 - 2*l) / (1 - 2*lambda)
		out[n] = groupTail{lambda: l, widen: widen, constant: studentConstant(l) - 0.5*math.Log(widen)}
	}
	return out
}

// studentConstant is the logarithm of the density of Student's law at 0, nu = 1/lambda.
func studentConstant(lambda float64) float64 {
	if lambda < 1e-4 {
		return -0.5*math.Log(2*math.Pi) - lambda/4
	}
	nu := 1 / lambda
	a, _ := math.Lgamma((nu + 1) / 2)
	b, _ := math.Lgamma(nu / 2)
	return a - b - 0.5*math.Log(nu*math.Pi)
}

// fit maximises the likelihood and finds the intervals.
func (e *equivalents) fit(ctx context.Context, set *NoiseSettings) (PositionNoise, error) {
	n := PositionNoise{A: 1, AHi: math.Inf(1), BHi: math.Inf(1), TailDF: math.Inf(1), N: len(e.y)}
	n.DF = n.N - e.reflections()
	if n.N > 0 {
		n.Multiplicity = float64(n.N) / float64(e.reflections())
	}
	if n.DF < set.MinDF {
		return n, ctx.Err()
	}
	c := &climber{e: e, ctx: ctx}
	start := e.start()
	if set.TailDF != 0 {
		c.fixed[2] = true
		start[2] = 1 / set.TailDF
	}
	df := float64(n.DF)
	c.h = noiseParams{0.2 * math.Sqrt(4/df), 0.2 * (start[1] + 0.01) * math.Sqrt(8/df), math.Min(0.02, 1/math.Sqrt(df))}
	first, _ := c.climb(start, c.fixed, 0.1)
	c.h[1] = 0.2 * (first[1] + 0.002) * math.Sqrt(8/df)
	for i := range c.h {
		c.h[i] /= 4
	}
	best, top := c.climb(first, c.fixed, 1e-6)
	n.Estimable, n.LogLik = true, top
	n.A, n.B = math.Exp(best[0]/2), math.Sqrt(best[1])
	if best[2] > 1e-4 {
		n.TailDF = 1 / best[2]
	}
	drop := 0.5 * distuv.ChiSquared{K: 1}.Quantile(set.Level)
	lo, hi := c.interval(best, top, 0, drop)
	n.ALo, n.AHi = math.Exp(lo/2), math.Exp(hi/2)
	lo, hi = c.interval(best, top, 1, drop)
	n.BLo, n.BHi = math.Sqrt(lo), math.Sqrt(hi)
	return n, ctx.Err()
}

// start takes medians: a^2 from the weaker half of the observations, b^2 from
// the excess in the strongest tenth.
func (e *equivalents) start() noiseParams {
	type point struct{ ratio, z2, r2q float64 }
	var ratios, weak, strong []float64
	var pts []point
	for h := range e.reflections() {
		lo, hi := e.first[h], e.first[h+1]
		var d, num float64
		for i := lo; i < hi; i++ {
			d += 1 / e.p[i]
			num += e.y[i] / e.p[i]
		}
		for i := lo; i < hi; i++ {
			r := e.y[i] - num/d
			free := 1 - 1/(e.p[i]*d)
			if free < 1e-9 {
				continue
			}
			pts = append(pts, point{e.q[i] / e.p[i], r * r / (e.p[i] * free), r * r / (math.Max(e.q[i], 1e-300) * free)})
			ratios = append(ratios, e.q[i]/e.p[i])
		}
	}
	middle := median(ratios)
	high := ratios[len(ratios)-1-len(ratios)/10]
	for _, p := range pts {
		if p.ratio <= middle {
			weak = append(weak, p.z2)
		}
		if p.ratio >= high {
			strong = append(strong, p.r2q)
		}
	}
	a2 := math.Max(median(weak)/chi2Median, 1e-6)
	b2 := math.Max(median(strong)/chi2Median-a2/high, 1e-4)
	return noiseParams{math.Log(a2), b2, 0.1}.clamped()
}
