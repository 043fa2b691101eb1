package size

import (
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/integrate/quad"
	"gonum.org/v1/gonum/stat/distuv"
)

// EffectSettings of ExpectedEffect; nil and zero fields mean the defaults.
type EffectSettings struct {
	CentricShare float64 // of reflections; 0
	Agreement    float64 // factor on |F| without the exchange; 0
	Weak         float64 // upper strength of "weak"; 0.2
}

// Effect is what an exchange does to amplitudes.
type Effect struct {
	M         float64
	Agreement float64 // sum |k F' - F| / sum F between changed and unchanged amplitudes
	Scale     float64 // k = sum F F' / sum F'^2, as a refinement would take it
	Shift     float64 // sqrt(A^2 + Agreement^2) - A, A the agreement factor of the settings
	WeakF     float64 // mean F' of the weak over their mean F, less 1, before k
	WeakShare float64 // of reflections that are weak
}

// ExpectedEffect says whether an exchange m matters: strengths e of Wilson's
// law (Wilson 1949, Acta Cryst. 2:318; density exp(-e), centric
// exp(-e/2)/sqrt(2 pi e)) become e' = (1-m) e + m, amplitudes are F = sqrt(e).
// Shift adds in quadrature, as for a misfit unrelated to the exchange: an order
// of magnitude, not a prediction. Error: m not below 1, or so negative that a
// weak intensity would become negative and more than a fifth of the sum of F
// is lost (m < -0.2); shares outside 0 to 1, negative settings.
func ExpectedEffect(m float64, set *EffectSettings) (*Effect, error) {
	var o EffectSettings
	if set != nil {
		o = *set
	}
	if o.Weak == 0 {
		o.Weak = 0.2
	}
	if !(m < 1 && m >= -0.2) {
		return nil, fmt.Errorf("size: ExpectedEffect: m = %g is outside -0.2 to 1", m)
	}
	if !(o.CentricShare >= 0 && o.CentricShare <= 1) || !(o.Agreement >= 0) || !(o.Weak > 0) || math.IsInf(o.Agreement+o.Weak, 0) {
		return nil, fmt.Errorf("size: ExpectedEffect: centric share %g, agreement factor %g, weak %g", o.CentricShare, o.Agreement, o.Weak)
	}
	// A negative m takes more than there is from the very weakest: 0 stays.
	changed := func(f float64) float64 { return math.Sqrt(math.Max(0, (1-m)*f*f+m)) }
	bend := 0.0
	if m < 0 {
		bend = math.Sqrt(-m / (1 - m))
	}
	weak := math.Sqrt(o.Weak)
	mean := func(g func(f float64) float64, breaks ...float64) float64 {
		return wilsonMean(g, o.CentricShare, append(breaks, bend, weak))
	}
	out := &Effect{M: m}
	f := mean(func(f float64) float64 { return f })
	out.Scale = mean(func(f float64) float64 { return f * changed(f) }) / mean(func(f float64) float64 { return changed(f) * changed(f) })
	// k F' = F at one strength; the integrand has a kink there.
	k2 := out.Scale * out.Scale
	cross := math.Sqrt(math.Max(0, k2*m/(1-k2*(1-m))))
	if math.IsNaN(cross) || math.IsInf(cross, 0) {
		cross = 1
	}
	out.Agreement = mean(func(f float64) float64 { return math.Abs(out.Scale*changed(f) - f) }, cross) / f
	out.Shift = math.Hypot(o.Agreement, out.Agreement) - o.Agreement
	below := func(g func(float64) float64) float64 {
		return mean(func(f float64) float64 {
			if f > weak {
				return 0
			}
			return g(f)
		})
	}
	out.WeakF = below(changed)/below(func(f float64) float64 { return f }) - 1
	out.WeakShare = below(func(float64) float64 { return 1 })
	return out, nil
}

// wilsonMean integrates g(F) over the amplitude density 2 F exp(-F^2) and its
// centric counterpart sqrt(2/pi) exp(-F^2/2), piecewise between the breaks.
func wilsonMean(g func(float64) float64, centric float64, breaks []float64) float64 {
	density := func(f float64) float64 {
		return (1-centric)*2*f*math.Exp(-f*f) + centric*math.Sqrt(2/math.Pi)*math.Exp(-f*f/2)
	}
	ends := append(append([]float64(nil), breaks...), 0, 0.02, 0.1, 0.5, 1, 2, 4, 6, 9)
	slices.Sort(ends)
	var sum float64
	for i := 1; i < len(ends); i++ {
		sum += quad.Fixed(func(f float64) float64 { return g(f) * density(f) }, ends[i-1], ends[i], 40, quad.Legendre{}, 1)
	}
	return sum
}

// MinimumVisible is the smallest |m| that a two-sided test at the level sees
// with the given power, (z_(1-(1-level)/2) + z_power) SE: 2.80 SE at 95 % and
// 80 %. Level 0 means 0.95 and power 0 means 0.80; a negative or NaN se gives NaN.
func MinimumVisible(se, level, power float64) float64 {
	if level == 0 {
		level = 0.95
	}
	if power == 0 {
		power = 0.8
	}
	if !(se >= 0) || !(level > 0 && level < 1) || !(power > 0 && power < 1) {
		return math.NaN()
	}
	return (distuv.UnitNormal.Quantile(0.5+level/2) + distuv.UnitNormal.Quantile(power)) * se
}
