package evidence

import (
	"context"
	"fmt"
	"math"
)

// Injection adds a known effect to measured intensities. Row i is changed when
// Thick[i]; Local is the mean intensity of its shell, Expected its intensity in a position
// without the effect, both on the scale of the intensity itself; Unit is the intensity,
// on that scale, at which the curb is Q. Given is the exchange that the rows hold already,
// and Lost the mean of J0 (1 - exp(-Q Expected/Unit)) over the shell, J0 the intensities
// before that exchange; nil is 0.
type Injection struct {
	M, Q, Given     float64
	Thick           []bool
	Local, Expected []float64
	Unit, Lost      []float64
}

// Apply returns a copy of the intensities with the effect in it. With I = (1-g) J0 + g <J0>
// as measured, g the exchange that is Given, the curb acts on J0 and what is left of it
// is exchanged as before, then the new exchange is put on top:
//
//	I' = (1-g) J0 exp(-q J/unit) + g <J0 exp(-q J/unit)>,  I" = (1-m) I' + m <I'>.
//
// Noise and all else that the data have stay. J is expected, so that the noise of I is not
// squared. A curb on top of the exchange would come back as q (1-m) and move m. It panics when
// lengths differ.
func (x *Injection) Apply(intensity []float64) []float64 {
	if len(intensity) != len(x.Thick) || len(x.Local) != len(x.Thick) || len(x.Expected) != len(x.Thick) || len(x.Unit) != len(x.Thick) || (x.Lost != nil && len(x.Lost) != len(x.Thick)) {
		panic("evidence: Injection.Apply: columns differ in length")
	}
	out := make([]float64, len(intensity))
	copy(out, intensity)
	for i, thick := range x.Thick {
		if !thick {
			continue
		}
		local := x.Local[i]
		if x.Q != 0 && x.Unit[i] > 0 {
			kept := math.Exp(-x.Q * math.Max(x.Expected[i], 0) / x.Unit[i])
			own := out[i] - float64(x.Given*local)
			if x.Lost != nil {
				local -= x.Lost[i]
			}
			out[i] = float64(own*kept) + float64(x.Given*local)
		}
		out[i] = float64((1-x.M)*out[i]) + float64(x.M*local)
	}
	return out
}

// Recovered is what became of an injected effect. M and Q are the effects found
// beyond what the data show without it, SE that of the estimate after; Before
// and After are the whole summaries.
type Recovered struct {
	M, Q          Estimate
	Before, After Summary
}

// Recover runs the pipeline on the intensities with an effect added. The
// exchanges of two steps compose as (1-m) = (1-m1)(1-m2), so what was found of the
// injected one is 1 - (1-after)/(1-before); the curb is the difference. before is
// the pipeline's answer without the injection. Errors: of the pipeline, no m
// before or after.
func Recover(ctx context.Context, before Summary, x *Injection, intensity []float64, p Pipeline) (*Recovered, error) {
	after, err := p(ctx, x.Apply(intensity))
	if err != nil {
		return nil, err
	}
	if math.IsNaN(before.M.Value) || math.IsNaN(after.M.Value) || before.M.Value >= 1 {
		return nil, fmt.Errorf("m is not estimable before or after the injection")
	}
	r := &Recovered{Before: before, After: after}
	r.M = shifted(after.M, 1-(1-after.M.Value)/(1-before.M.Value))
	r.Q = shifted(after.Q, after.Q.Value-before.Q.Value)
	return r, nil
}

// shifted moves an estimate with its interval to another value.
func shifted(e Estimate, to float64) Estimate {
	d := to - e.Value
	return Estimate{Value: to, SE: e.SE, Lo: e.Lo + d, Hi: e.Hi + d}
}
