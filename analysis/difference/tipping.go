package difference

import (
	"context"
	"fmt"
	"math"
)

// TippingSettings are the choices of Tipping; nil or zero fields mean the
// default.
type TippingSettings struct {
	Level float64 // of significance; 0 means 0.05
	Most  float64 // largest ratio looked at, and 1/Most the smallest; 0 means 3
	Steps int     // ratios tried on either side before bisection; 0 means 8
}

// Tipping says by how much the ratio of the sigmas must be wrong for a finding
// on the inverse-variance axis to go away. P is the p value as the variances
// stand. Up and Down are the factors on sigma_thin/sigma_thick, above and below
// 1, at which p first reaches Level, +Inf and 0 when it does not within the
// range; both are 1 when it is not below Level to begin with. Nearest is the
// one of the two nearer to 1 in ratio, as a factor of at least 1.
type Tipping struct {
	P, Up, Down, Nearest float64
}

// Tipping looks for the tipping ratio. test gives the p value of the finding
// with the strengths z, parallel to the pairs; its errors end the search.
func (p *Pairs) Tipping(ctx context.Context, test func(ctx context.Context, z []float64) (float64, error), o *TippingSettings) (*Tipping, error) {
	set := TippingSettings{Level: 0.05, Most: 3, Steps: 8}
	if o != nil {
		if o.Level != 0 {
			set.Level = o.Level
		}
		if o.Most != 0 {
			set.Most = o.Most
		}
		if o.Steps != 0 {
			set.Steps = o.Steps
		}
	}
	if !(set.Level > 0 && set.Level < 1) || !(set.Most > 1) || set.Steps < 1 {
		return nil, fmt.Errorf("tipping ratio: level %g, most %g, steps %d make no search", set.Level, set.Most, set.Steps)
	}
	at := func(lnRatio float64) (float64, error) {
		if err := ctx.Err(); err != nil {
			return 0, err
		}
		return test(ctx, p.InverseVariance(math.Exp(lnRatio)).Z)
	}
	p0, err := at(0)
	if err != nil {
		return nil, err
	}
	t := &Tipping{P: p0, Up: 1, Down: 1, Nearest: 1}
	if p0 >= set.Level {
		return t, nil
	}
	up, err := firstAbove(at, set.Level, math.Log(set.Most), set.Steps)
	if err != nil {
		return nil, err
	}
	down, err := firstAbove(at, set.Level, -math.Log(set.Most), set.Steps)
	if err != nil {
		return nil, err
	}
	t.Up, t.Down, t.Nearest = math.Exp(up), math.Exp(down), math.Exp(math.Min(math.Abs(up), math.Abs(down)))
	return t, nil
}

// firstAbove walks from 0 to end in steps and bisects the first step over
// level to 1 % of ratio; an infinity of end's sign when there is none.
func firstAbove(at func(float64) (float64, error), level, end float64, steps int) (float64, error) {
	last := 0.0
	for k := 1; k <= steps; k++ {
		x := end * float64(k) / float64(steps)
		v, err := at(x)
		if err != nil {
			return 0, err
		}
		if v < level {
			last = x
			continue
		}
		for math.Abs(x-last) > 0.01 {
			mid := 0.5 * (x + last)
			if v, err = at(mid); err != nil {
				return 0, err
			}
			if v < level {
				last = mid
			} else {
				x = mid
			}
		}
		return x, nil
	}
	return math.Copysign(math.Inf(1), end), nil
}
