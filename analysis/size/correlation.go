package size

import (
	"fmt"
	"math"
)

// Halves holds two independent halves of each position, parallel by
// reflection, split by raw index, and alike in both positions; a NaN half leaves the reflection out of what
// needs it.
type Halves struct {
	ThinA, ThinB, ThickA, ThickB []float64
	Shell                        []int32
	Shells                       int
}

// Correlation is the true correlation between two positions, the noise of
// counting taken out without a noise model. Values are NaN with a Why when
// they are not estimable.
type Correlation struct {
	R           Value // C / sqrt(VThin VThick)
	MomentRatio Value // 1 - sqrt(VThick/VThin); its interval is symmetric in the logarithm
	VThin       Value // signal variance of the strength: 1 for acentric, 2 for centric Wilson strengths
	VThick      Value
	C           Value
	N           float64 // sum of weights of the reflections with all four halves
	Level       float64
	Estimable   bool
	Why         string
}

// TrueCorrelation finds r and the moment ratio from products of halves, each
// over its own shell mean,
//
//	V_p = <e_pA e_pB> - 1,  C = (<e_thinA e_thickB> + <e_thinB e_thickA>)/2 - 1.
//
// Halves of one name must hold the same raw indices in both positions. A raw index has
// deviations of its own (its orientation in the beam) that both positions see alike:
// V is free of them because its halves share no raw index, so C must be too. With
// the products of equal halves in C, r comes out above 1 wherever equivalents deviate.
//
// Standard errors are those of the delete-one jackknife (Tukey 1958; Efron 1982,
// The Jackknife, ch. 3), shell means recomputed, the intervals Student's; a
// weight counts as that many reflections. Strengths have heavy tails: with
// deviations of 30 % and 1500 reflections the intervals cover about .92. R may exceed 1 by its error. With V <= 0 in a
// position nothing is estimable but V and C; with V less than two standard
// errors from 0 the intervals of R and MomentRatio are unbounded. A reflection
// lacking one of the halves is left out. Errors as in ExchangeWith.
func TrueCorrelation(h *Halves, w []float64, set *Settings) (*Correlation, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	weight, err := h.check("TrueCorrelation", w)
	if err != nil {
		return nil, err
	}
	var e [4][]float64
	for k, v := range [][]float64{h.ThinA, h.ThinB, h.ThickA, h.ThickB} {
		if e[k], _, err = overShell(v, weight, h.Shell, h.Shells); err != nil {
			return nil, fmt.Errorf("size: TrueCorrelation: half %s: %w", [...]string{"ThinA", "ThinB", "ThickA", "ThickB"}[k], err)
		}
	}
	out := &Correlation{Level: set.level()}
	shells := 0
	seen := make([]bool, h.Shells)
	for i, s := range h.Shell {
		out.N += weight[i]
		if weight[i] > 0 && !seen[s] {
			seen[s] = true
			shells++
		}
	}
	out.R, out.MomentRatio, out.VThin, out.VThick, out.C = noValue(), noValue(), noValue(), noValue(), noValue()
	df := out.N - float64(shells) - 1
	if df < 1 {
		out.Why = fmt.Sprintf("%g reflections with all four halves are too few for their shells", out.N)
		return out, nil
	}
	vThin, dThin := h.product(e[0], e[1], weight, out.N)
	vThick, dThick := h.product(e[2], e[3], weight, out.N)
	var c float64
	dC := make([]float64, len(weight))
	for _, k := range [][2]int{{0, 3}, {1, 2}} {
		v, d := h.product(e[k[0]], e[k[1]], weight, out.N)
		c += v / 2
		for i := range dC {
			dC[i] += d[i] / 2
		}
	}
	out.describe(weight, df, [3]float64{vThin, vThick, c}, [3][]float64{dThin, dThick, dC})
	return out, nil
}

// describe takes the two variances and the covariance, and the same with each
// reflection deleted.
func (out *Correlation) describe(w []float64, df float64, v [3]float64, deleted [3][]float64) {
	t := tQuantile(out.Level, df)
	se := func(stat func(vThin, vThick, c float64) float64) float64 {
		at := stat(v[0], v[1], v[2])
		var sum float64
		for i := range w {
			if w[i] > 0 {
				d := (stat(deleted[0][i], deleted[1][i], deleted[2][i]) - at) / math.Min(1, w[i])
				sum += w[i] * d * d
			}
		}
		return math.Sqrt(sum * (out.N - 1) / out.N)
	}
	value := func(stat func(vThin, vThick, c float64) float64) Value {
		return newValue(stat(v[0], v[1], v[2]), se(stat), t)
	}
	out.VThin = value(func(a, _, _ float64) float64 { return a })
	out.VThick = value(func(_, b, _ float64) float64 { return b })
	out.C = value(func(_, _, c float64) float64 { return c })
	for _, v := range []struct {
		name string
		v    Value
	}{{"thin", out.VThin}, {"thick", out.VThick}} {
		if v.v.Value <= 0 {
			out.Why = fmt.Sprintf("not estimable: the halves of the %s position share no signal (V = %.3g)", v.name, v.v.Value)
			return
		}
		if v.v.Value < 2*v.v.SE {
			out.Why = fmt.Sprintf("the signal of the %s position, V = %.3g, is within two standard errors of 0", v.name, v.v.Value)
		}
	}
	out.Estimable = true
	if out.Why != "" {
		// Deleting one reflection may take V below 0, so there is no error to give.
		ratio := math.Sqrt(v[1] / v[0])
		out.R.Value, out.MomentRatio.Value = v[2]/math.Sqrt(v[0]*v[1]), 1-ratio
		return
	}
	out.R = value(func(a, b, c float64) float64 { return c / math.Sqrt(a*b) })
	ratio := math.Sqrt(v[1] / v[0])
	lnSE := se(func(a, b, _ float64) float64 { return math.Log(b/a) / 2 })
	out.MomentRatio = Value{1 - ratio, ratio * lnSE, 1 - ratio*math.Exp(t*lnSE), 1 - ratio*math.Exp(-t*lnSE)}
}

// product returns <a b> - 1 pooled over shells, a and b of shell mean 1, and the
// same without each reflection, or without min(1, w) of it.
func (h *Halves) product(a, b, w []float64, n float64) (v float64, deleted []float64) {
	ab, sum := make([]float64, h.Shells), make([]float64, h.Shells)
	for i, s := range h.Shell {
		ab[s] += w[i] * a[i] * b[i]
		sum[s] += w[i]
	}
	var total float64
	for _, x := range ab {
		total += x
	}
	deleted = make([]float64, len(w))
	for i, s := range h.Shell {
		if w[i] == 0 {
			continue
		}
		one := math.Min(1, w[i])
		left := sum[s] - one
		rest := 0.0
		if left > 0 {
			rest = left * left * (ab[s] - one*a[i]*b[i]) / ((sum[s] - one*a[i]) * (sum[s] - one*b[i]))
		}
		deleted[i] = (total-ab[s]+rest)/(n-one) - 1
	}
	return total/n - 1, deleted
}

// check returns count weights, 0 where a half is missing.
func (h *Halves) check(name string, w []float64) ([]float64, error) {
	n := len(h.Shell)
	for k, v := range [][]float64{h.ThinA, h.ThinB, h.ThickA, h.ThickB} {
		if len(v) != n {
			panic(fmt.Sprintf("size: %s: half %d has length %d, Shell has %d", name, k, len(v), n))
		}
	}
	if w != nil && len(w) != n {
		panic(fmt.Sprintf("size: %s: weights has length %d, Shell has %d", name, len(w), n))
	}
	out := make([]float64, n)
	for i, s := range h.Shell {
		if s < 0 || int(s) >= h.Shells {
			return nil, fmt.Errorf("size: %s: shell %d of reflection %d is outside 0 to %d", name, s, i, h.Shells-1)
		}
		out[i] = 1
		if w != nil {
			if out[i] = w[i]; !(w[i] >= 0) || math.IsInf(w[i], 0) {
				return nil, fmt.Errorf("size: %s: weights of reflection %d is %g", name, i, w[i])
			}
		}
		for _, v := range []float64{h.ThinA[i], h.ThinB[i], h.ThickA[i], h.ThickB[i]} {
			if math.IsInf(v, 0) {
				return nil, fmt.Errorf("size: %s: intensity of reflection %d is %g", name, i, v)
			}
			if math.IsNaN(v) {
				out[i] = 0
			}
		}
	}
	return out, nil
}
