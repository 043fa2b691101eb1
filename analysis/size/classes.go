package size

import (
	"fmt"
	"math"
)

// Class is one class of strength on the axis, Lo <= Z < Hi.
//
// Contrast, in eps, is the mean of thin minus thick over the pooled shell mean
// of both positions. Strength is the mean true strength of the class from the
// second estimate; on a noisy axis it is nearer to 1 than the class limits say,
// so classes of different axes are compared by M = -Contrast/(1 - Strength) and
// never by Contrast. A value is NaN with a Why when it is not estimable.
type Class struct {
	Name     string // floor, middle, top
	Lo, Hi   float64
	N        int // reflections of positive weight
	Contrast Value
	Strength Value
	M        Value
	Why      string
}

// Classes gives floor (Z < 0.2), middle (0.5 to 1.5) and top (Z > 3).
//
// Second is a strength of every reflection whose noise the axis does not share,
// NaN where there is none; nil means that of the thin position itself. Like the
// intensities it is brought to a shell mean of 1; Z is used as given. Precision
// weights both means. Standard errors are those of the influence functions,
// shell means and the covariance of both included; the interval of M is
// Fieller's, unbounded when Strength cannot be told from 1. Unlike Exchange, the
// contrast needs thin and thick on the common scale. Errors as in ExchangeWith.
func Classes(in *Input, second, w []float64, set *Settings) ([]Class, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	if second != nil && len(second) != len(in.Z) {
		panic(fmt.Sprintf("size: Classes: second has length %d, Z has %d", len(second), len(in.Z)))
	}
	f, err := newFrame("Classes", in, w, nil, false)
	if err != nil {
		return nil, err
	}
	x, xw, err := secondStrength(f, second)
	if err != nil {
		return nil, err
	}
	d, pooled := make([]float64, len(f.w)), make([]float64, len(f.w))
	for i, s := range in.Shell {
		mean := (f.mean1[s] + f.mean2[s]) / 2
		d[i] = (in.Thin[i] - in.Thick[i]) / mean
		pooled[i] = (in.Thin[i] + in.Thick[i]) / (2 * mean)
	}
	classes := []Class{
		{Name: "floor", Lo: math.Inf(-1), Hi: 0.2},
		{Name: "middle", Lo: 0.5, Hi: 1.5},
		{Name: "top", Lo: 3, Hi: math.Inf(1)},
	}
	for k := range classes {
		c := &classes[k]
		member := func(i int) bool { return in.Z[i] >= c.Lo && in.Z[i] < c.Hi }
		for i := range f.w {
			if f.w[i]*f.u[i] > 0 && member(i) {
				c.N++
			}
		}
		contrast, pc := classMean(f, f.w, d, pooled, member)
		strength, px := classMean(f, xw, x, x, member)
		c.describe(f, xw, contrast, strength, pc, px, set.level())
	}
	return classes, nil
}

// secondStrength returns strengths of shell mean 1 and their count weights, 0
// where there is none.
func secondStrength(f *frame, second []float64) (x, w []float64, err error) {
	if second == nil {
		return f.y1, f.w, nil
	}
	w = append([]float64(nil), f.w...)
	for i, v := range second {
		if math.IsInf(v, 0) {
			return nil, nil, fmt.Errorf("size: Classes: second strength of reflection %d is %g", i, v)
		}
		if math.IsNaN(v) {
			w[i] = 0
		}
	}
	if x, _, err = overShell(second, w, f.in.Shell, f.in.Shells); err != nil {
		return nil, nil, fmt.Errorf("size: Classes: second strength: %w", err)
	}
	return x, w, nil
}

// classMean returns the mean of v over a class, and what each reflection
// contributes to it. V is relative to a shell mean of over, whose error the
// reflections of the shell share.
func classMean(f *frame, w, v, over []float64, member func(int) bool) (mean float64, psi []float64) {
	shells := f.in.Shells
	part, all := make([]float64, shells), make([]float64, shells)
	var sum, total float64
	for i, s := range f.in.Shell {
		all[s] += w[i]
		if wu := w[i] * f.u[i]; wu > 0 && member(i) {
			sum += wu
			total += wu * v[i]
			part[s] += wu * v[i]
		}
	}
	psi = make([]float64, len(v))
	if sum == 0 {
		return math.NaN(), psi
	}
	mean = total / sum
	for i, s := range f.in.Shell {
		if w[i] == 0 {
			continue
		}
		if f.u[i] > 0 && member(i) {
			psi[i] = f.u[i] * (v[i] - mean) / sum
		}
		psi[i] -= part[s] / all[s] * (over[i] - 1) / sum
	}
	return mean, psi
}

func (c *Class) describe(f *frame, xw []float64, contrast, strength float64, pc, px []float64, level float64) {
	c.Contrast, c.Strength, c.M = noValue(), noValue(), noValue()
	if c.N < 3 {
		c.Why = fmt.Sprintf("%d reflections in the class; at least 3 are needed", c.N)
		return
	}
	var vcc, vcx, vxx, members, both float64
	second := 0
	for i, w := range f.w {
		vcc += w * pc[i] * pc[i]
		vcx += w * pc[i] * px[i]
		vxx += w * px[i] * px[i]
		if f.u[i] > 0 && f.in.Z[i] >= c.Lo && f.in.Z[i] < c.Hi {
			members += w
			both += xw[i]
			if xw[i] > 0 {
				second++
			}
		}
	}
	if members <= 1 {
		c.Why = fmt.Sprintf("the weights of the class add up to %g", members)
		return
	}
	k := members / (members - 1)
	vcc *= k
	t := tQuantile(level, members-1)
	c.Contrast = newValue(contrast, math.Sqrt(vcc), t)
	if second < 3 || both <= 1 {
		c.Why = fmt.Sprintf("%d reflections of the class have a second strength; at least 3 are needed", second)
		return
	}
	kx := both / (both - 1)
	vxx *= kx
	vcx *= math.Sqrt(k * kx)
	t = tQuantile(level, both-1)
	c.Strength = newValue(strength, math.Sqrt(vxx), t)
	// M = -contrast/(1 - strength): the numerator -c and the denominator 1 - x
	// have covariance +cov(c, x).
	d := 1 - strength
	region := ratioRegion(-contrast, d, vcc, vcx, vxx, t*t)
	h := region.Hull()
	if !region.Bounded() {
		c.Why = fmt.Sprintf("the strength of the class, %.3g, cannot be told from the shell mean", strength)
		return
	}
	m := -contrast / d
	c.M = Value{m, math.Sqrt(math.Max(0, vcc-2*m*vcx+m*m*vxx)) / math.Abs(d), h.Lo, h.Hi}
}
