package difference

import (
	"context"
	"fmt"
	"math"
)

// RefitVarD fits the variance of the differences to the differences themselves
// and writes VarD, ExtraD and its 95 % limits:
//
//	Var(dI) = VarThin + VarThick + beta J^2,  ExtraD = b_D = sign(beta) sqrt|beta|
//
// because neither the scatter of equivalents nor counting says how far two
// positions of one reflection differ. J is expected, parallel to the pairs (nil
// stands for the inverse-variance mean of each pair), with negatives as 0. beta
// is that of largest Student-t likelihood of the differences about a line
// m (J - mean J of the shell) and the difference of the shell means, with
// scale^2 = c times the variance, c such that normal differences give their
// own variance. beta may be negative, and the variance never falls below a
// tenth of VarThin + VarThick. Errors: expected of another length or not
// finite, a cancelled ctx.
func (p *Pairs) RefitVarD(ctx context.Context, expected []float64) error {
	if expected == nil {
		expected = p.inverseVarianceMean(1)
	}
	if len(expected) != p.Len() {
		return fmt.Errorf("%d expected intensities for %d pairs", len(expected), p.Len())
	}
	f := spread{df: p.source.settings.TailDF}
	f.scale = normalScale(f.df)
	for i, j := range expected {
		if math.IsNaN(j) || math.IsInf(j, 0) {
			return fmt.Errorf("expected intensity of pair %d is %g", i, j)
		}
		j = math.Max(j, 0)
		f.base = append(f.base, p.VarThin[i]+p.VarThick[i])
		f.square = append(f.square, j*j)
		f.lever = append(f.lever, j-p.MeanPooled[i])
		f.d = append(f.d, p.Thin[i]-p.Thick[i]-(p.MeanThin[i]-p.MeanThick[i]))
	}
	b, err := f.best(ctx)
	if err != nil {
		return err
	}
	beta, se := b*math.Abs(b), f.betaSE(b*math.Abs(b))
	p.ExtraD, p.ExtraDLo, p.ExtraDHi = b, signedRoot(beta-1.96*se), signedRoot(beta+1.96*se)
	p.VarD = make([]float64, p.Len())
	for i := range p.VarD {
		p.VarD[i] = f.variance(i, beta)
	}
	return nil
}

func signedRoot(x float64) float64 { return math.Copysign(math.Sqrt(math.Abs(x)), x) }

// inverseVarianceMean returns the inverse-variance mean of each pair with the
// thin sigma multiplied by ratio.
func (p *Pairs) inverseVarianceMean(ratio float64) []float64 {
	j := make([]float64, p.Len())
	for i := range j {
		w1, w2 := 1/(ratio*ratio*p.VarThin[i]), 1/p.VarThick[i]
		j[i] = (w1*p.Thin[i] + w2*p.Thick[i]) / (w1 + w2)
	}
	return j
}

// spread is the likelihood of beta.
type spread struct {
	d, base, square, lever []float64
	df, scale, slope       float64
	v                      []float64 // room for the variances at one beta
}

func (f *spread) variance(i int, beta float64) float64 {
	return max(f.base[i]+beta*f.square[i], 0.1*f.base[i])
}

// cost is minus the log likelihood at beta, with the slope refitted by
// iterated weights from where it stands.
func (f *spread) cost(beta float64) float64 {
	if f.v == nil {
		f.v = make([]float64, len(f.d))
	}
	for i := range f.v {
		f.v[i] = f.scale * f.variance(i, beta)
	}
	for range 3 {
		num, den := 0.0, 0.0
		for i, d := range f.d {
			r := d - f.slope*f.lever[i]
			w := 1 / (f.df*f.v[i] + r*r)
			num += w * d * f.lever[i]
			den += w * f.lever[i] * f.lever[i]
		}
		if den > 0 {
			f.slope = num / den
		}
	}
	sum := 0.0
	for i, d := range f.d {
		v := f.v[i]
		r := d - f.slope*f.lever[i]
		sum += 0.5*math.Log(v) + 0.5*(f.df+1)*math.Log1p(r*r/(f.df*v))
	}
	return sum
}

// best returns the signed root of beta of least cost: a grid over -1.5 to 1.5,
// then golden section about its best point.
func (f *spread) best(ctx context.Context) (float64, error) {
	const step, half = 0.1, 15
	at, least := 0, math.Inf(1)
	for k := -half; k <= half; k++ {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		b := step * float64(k)
		if c := f.cost(b * math.Abs(b)); c < least {
			at, least = k, c
		}
	}
	lo, hi := step*float64(at-1), step*float64(at+1)
	golden := (math.Sqrt(5) - 1) / 2
	x1, x2 := hi-golden*(hi-lo), lo+golden*(hi-lo)
	c1, c2 := f.cost(x1*math.Abs(x1)), f.cost(x2*math.Abs(x2))
	for hi-lo > 1e-4 {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		if c1 <= c2 {
			hi, x2, c2 = x2, x1, c1
			x1 = hi - golden*(hi-lo)
			c1 = f.cost(x1 * math.Abs(x1))
		} else {
			lo, x1, c1 = x1, x2, c2
			x2 = lo + golden*(hi-lo)
			c2 = f.cost(x2 * math.Abs(x2))
		}
	}
	return 0.5 * (lo + hi), nil
}

// betaSE is the standard error of beta from the scores of the single pairs:
// sandwich of their squares and the expected information, so that the pseudo
// likelihood need not be the true one.
func (f *spread) betaSE(beta float64) float64 {
	score, info := 0.0, 0.0
	for i, d := range f.d {
		v := f.scale * f.variance(i, beta)
		if f.base[i]+beta*f.square[i] <= 0.1*f.base[i] {
			continue
		}
		r := d - f.slope*f.lever[i]
		t := r * r / (f.df*v + r*r)
		x := f.scale * f.square[i] / v
		s := 0.5 * x * ((f.df+1)*t - 1)
		score += s * s
		info += 0.5 * x * x * (f.df + 1) * t * (1 - t)
	}
	if info == 0 {
		return math.Inf(1)
	}
	return math.Sqrt(score) / info
}

// normalScale returns the c for which a Student-t likelihood of df degrees of
// freedom with scale^2 = c v is, for normal deviates of variance v, best at v:
// E[(df+1) z^2 / (df c + z^2)] = 1, by bisection on Simpson's rule.
func normalScale(df float64) float64 {
	const n, end = 800, 10.0
	var above, square, normal [n + 1]float64
	for k := range above {
		z := end * float64(k) / n
		w := 2.0
		switch {
		case k == 0 || k == n:
			w = 1
		case k%2 == 1:
			w = 4
		}
		above[k], square[k], normal[k] = w*(df+1)*z*z, z*z, math.Exp(-0.5*z*z)
	}
	lo, hi := 1e-3, 1.0
	for range 60 {
		c := 0.5 * (lo + hi)
		sum := 0.0
		for k := range above {
			sum += above[k] / (df*c + square[k]) * normal[k]
		}
		if 2*sum*end/(3*n)/math.Sqrt(2*math.Pi) > 1 {
			lo = c
		} else {
			hi = c
		}
	}
	return 0.5 * (lo + hi)
}
