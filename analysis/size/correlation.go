package size

import (
	"fmt"
	"math"
)

// Halves holds two independent halves of each position, parallel by
// reflection, split by raw index; a NaN half leaves the reflection out of what
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
//	V_p = <e_pA e_pB> - 1,  C = mean over the four pairs of halves of <e_thin e_thick> - 1.
//
// Standard errors are infinitesimal-jackknife ones (Jaeckel 1972; Efron 1982,
// The Jackknife, ch. 6), times sqrt(N/(N - shells - 1)), shell means included,
// the intervals Student's. R may exceed 1 by its error. With V <= 0 in a
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
	vThin, pThin := h.product(e[0], e[1], weight, out.N)
	vThick, pThick := h.product(e[2], e[3], weight, out.N)
	var c float64
	pC := make([]float64, len(weight))
	for _, k := range [][2]int{{0, 2}, {0, 3}, {1, 2}, {1, 3}} {
		v, p := h.product(e[k[0]], e[k[1]], weight, out.N)
		c += v / 4
		for i := range pC {
			pC[i] += p[i] / 4
		}
	}
	out.describe(weight, df, vThin, vThick, c, pThin, pThick, pC)
	return out, nil
}

func (out *Correlation) describe(w []float64, df, vThin, vThick, c float64, pThin, pThick, pC []float64) {
	t := tQuantile(out.Level, df)
	se := func(a, b, g float64) float64 {
		var v float64
		for i := range w {
			p := a*pThin[i] + b*pThick[i] + g*pC[i]
			v += w[i] * p * p
		}
		return math.Sqrt(v * out.N / df)
	}
	out.VThin = newValue(vThin, se(1, 0, 0), t)
	out.VThick = newValue(vThick, se(0, 1, 0), t)
	out.C = newValue(c, se(0, 0, 1), t)
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
	root := math.Sqrt(vThin * vThick)
	r := c / root
	out.R = newValue(r, se(-r/(2*vThin), -r/(2*vThick), 1/root), t)
	ratio := math.Sqrt(vThick / vThin)
	lnSE := se(-1/(2*vThin), 1/(2*vThick), 0)
	out.MomentRatio = Value{1 - ratio, ratio * lnSE, 1 - ratio*math.Exp(t*lnSE), 1 - ratio*math.Exp(-t*lnSE)}
	if out.Why != "" {
		out.R.Lo, out.R.Hi = math.Inf(-1), math.Inf(1)
		out.MomentRatio.Lo, out.MomentRatio.Hi = math.Inf(-1), math.Inf(1)
	}
}

// product returns <a b> - 1 pooled over shells and what each reflection
// contributes to it, the shells' sizes taken as fixed.
func (h *Halves) product(a, b, w []float64, n float64) (v float64, psi []float64) {
	mean, sum := make([]float64, h.Shells), make([]float64, h.Shells)
	for i, s := range h.Shell {
		mean[s] += w[i] * a[i] * b[i]
		sum[s] += w[i]
	}
	for s := range mean {
		if sum[s] > 0 {
			v += mean[s] / n
			mean[s] /= sum[s]
		}
	}
	psi = make([]float64, len(w))
	for i, s := range h.Shell {
		if w[i] > 0 {
			psi[i] = (a[i]*b[i] - mean[s]*(a[i]+b[i]-1)) / n
		}
	}
	return v - 1, psi
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
