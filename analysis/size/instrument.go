package size

import (
	"fmt"
	"math"
)

const (
	// Below these first-stage F the Student interval, and the estimate itself,
	// are not to be trusted (in simulation, noise three times the shell mean, 500
	// reflections, F = 4 gave m = 0.47 with a spread of 15.8).
	weakF        = 50
	inestimableF = 10
)

// Instrument is the exchange found by the axis as an instrument.
//
// M and SE are NaN with a Why when F is below 10; the Region then still holds.
// Lo and Hi are the ends of Region, which is the Anderson-Rubin set where F is
// below 50 (AndersonRubin is true), else the Student interval.
type Instrument struct {
	M, SE, Lo, Hi float64
	Level         float64
	F             float64 // first stage: squared covariance of axis and thin over its variance
	N             float64 // sum of weights of the reflections used
	DF            float64 // of the Student interval: N less the shells less one
	AndersonRubin bool
	Region        Region
	Estimable     bool
	Why           string
}

// GiantVariant is the exchange with the strongest reflections on the axis left out.
type GiantVariant struct {
	Above      float64 // left out where Z exceeds this; +Inf is the full set
	LeftOut    int     // reflections
	Instrument *Instrument
}

// Exchange estimates m with default settings; see ExchangeWith.
func Exchange(in *Input, w []float64) (*Instrument, error) { return ExchangeWith(in, w, nil) }

// ExchangeWith estimates the exchange with the axis as instrument,
//
//	m = 1 - b,  b = C(z,thick)/C(z,thin),  C(z,p) = <z e_p>/(<z><e_p>) - 1 by shell, pooled,
//
// z the axis over its shell mean, clipped. The standard error is that of the
// influence of each reflection, the shell means included,
//
//	psi(C_p) = R_p (z y_p/<z y_p> - z/<z> - y_p/<y_p> + 1),  psi(b) = (psi(C_2) - b psi(C_1))/C_1,
//
// R_p = C_p + 1, written for one shell. Squares are summed in the jackknife form
// (psi/(1-h))^2 (MacKinnon & White 1985, J. Econometrics 29:305), h the share of
// the reflection in C(z,thin) plus that in its shell mean: without it 300
// reflections in ten shells give intervals a tenth too short. It is robust to
// unequal variances. F is the squared robust t value of C(z,thin); there and in
// the Anderson-Rubin set the factor is N/(N - shells - 1). Neither
// a constant factor on a position or on the axis, nor one by shell, changes m.
//
// Errors: a value that is not a number (Z apart), a shell outside its range, a
// shell mean that is not positive. Unequal lengths panic. Too few reflections
// are no error but an Instrument that is not Estimable.
func ExchangeWith(in *Input, w []float64, set *Settings) (*Instrument, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	f, err := newFrame("Exchange", in, w, nil, false)
	if err != nil {
		return nil, err
	}
	return exchange([]*frame{f}, set), nil
}

// ExchangeCross pools several legs over the same reflections, such as the two
// halves of a position, each the axis of the other: the covariances are summed
// and a reflection stays one unit of the standard error. NaN in Thin or Thick
// marks a reflection that is absent from a leg.
func ExchangeCross(legs []*Input, w []float64, set *Settings) (*Instrument, error) {
	frames, err := newFrames("ExchangeCross", legs, w, set)
	if err != nil {
		return nil, err
	}
	return exchange(frames, set), nil
}

func newFrames(name string, legs []*Input, w []float64, set *Settings) ([]*frame, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	if len(legs) == 0 {
		panic("size: " + name + ": no legs")
	}
	frames := make([]*frame, len(legs))
	for i, in := range legs {
		if len(in.Z) != len(legs[0].Z) || in.Shells != legs[0].Shells {
			panic("size: " + name + ": legs differ in length or shells")
		}
		var err error
		if frames[i], err = newFrame(name, in, w, nil, true); err != nil {
			return nil, err
		}
	}
	return frames, nil
}

// Giants repeats the exchange with all reflections and without those above 4,
// 6 and 10 on the axis, in this order +Inf, 10, 6, 4. What is left out still
// counts in the shell means, which the model's exchange is with.
func Giants(in *Input, w []float64, set *Settings) ([]GiantVariant, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	var out []GiantVariant
	for _, above := range []float64{math.Inf(1), 10, 6, 4} {
		leave := make([]bool, len(in.Z))
		n := 0
		for i, z := range in.Z {
			if leave[i] = z > above; leave[i] {
				n++
			}
		}
		f, err := newFrame("Giants", in, w, leave, false)
		if err != nil {
			return nil, err
		}
		out = append(out, GiantVariant{above, n, exchange([]*frame{f}, set)})
	}
	return out, nil
}

// stage holds the covariances of the axis with both positions and theirs.
type stage struct {
	a1, a2        float64
	v11, v12, v22 float64
	n, df         float64
	p1, p2        []float64 // contributions of each reflection to a1 and a2
	own           []float64 // its product with thin in a1
	share         []float64 // of it in its shell mean
	w             []float64
}

// mostLeverage bounds what one reflection may be thought to hold, so that a
// dominant one widens the interval and does not make it infinite.
const mostLeverage = 0.9

func (st *stage) slopeError(b float64) float64 {
	var v float64
	for i, w := range st.w {
		h := math.Min(st.own[i]/st.a1+st.share[i], mostLeverage)
		psi := (st.p2[i] - b*st.p1[i]) / (1 - h)
		v += w * psi * psi
	}
	return math.Sqrt(v) / math.Abs(st.a1)
}

func exchange(legs []*frame, set *Settings) *Instrument {
	level := set.level()
	st := covariances(legs, set.clip())
	out := &Instrument{M: math.NaN(), SE: math.NaN(), Level: level, N: st.n, DF: st.df, Region: wholeLine()}
	if st.df < 1 || !(st.v11 > 0) {
		out.Lo, out.Hi = math.Inf(-1), math.Inf(1)
		out.Why = fmt.Sprintf("%g reflections are too few for their shells", st.n)
		return out
	}
	t := tQuantile(level, st.df)
	b := st.a2 / st.a1
	out.F = st.a1 * st.a1 / st.v11
	out.M = 1 - b
	out.SE = st.slopeError(b)
	out.Estimable = true
	out.Region = Region{[]Interval{{out.M - t*out.SE, out.M + t*out.SE}}}
	if out.F < weakF {
		out.AndersonRubin = true
		out.Region = ratioRegion(st.a2, st.a1, st.v22, st.v12, st.v11, t*t).oneMinus()
		out.Why = fmt.Sprintf("the axis is weak (first-stage F = %.3g, below %d): Anderson-Rubin interval", out.F, weakF)
	}
	if out.F < inestimableF || st.a1 < 0 {
		out.Estimable = false
		out.M, out.SE = math.NaN(), math.NaN()
		out.Why = fmt.Sprintf("not estimable: the axis hardly follows the thin position (first-stage F = %.3g, below %d)", out.F, inestimableF)
		if out.F >= inestimableF {
			out.Why = fmt.Sprintf("not estimable: the axis runs against the thin position (first-stage F = %.3g, covariance negative)", out.F)
		}
	}
	h := out.Region.Hull()
	out.Lo, out.Hi = h.Lo, h.Hi
	return out
}

func covariances(legs []*frame, clip float64) stage {
	n := len(legs[0].w)
	p1, p2 := make([]float64, n), make([]float64, n)
	st := stage{p1: p1, p2: p2, own: make([]float64, n), share: make([]float64, n), w: make([]float64, n)}
	for _, f := range legs {
		g := make([]float64, n)
		for i, z := range f.z {
			g[i] = math.Min(z, clip)
		}
		g = f.centred(g)
		s1, s2 := make([]float64, f.in.Shells), make([]float64, f.in.Shells)
		for i, s := range f.in.Shell {
			wg := f.w[i] * f.u[i] * g[i]
			s1[s] += wg * (f.y1[i] - 1)
			s2[s] += wg * (f.y2[i] - 1)
		}
		for s := range s1 {
			st.a1 += s1[s]
			st.a2 += s2[s]
		}
		for i, s := range f.in.Shell {
			if f.w[i] > 0 {
				st.own[i] += f.u[i] * g[i] * (f.y1[i] - 1)
				st.share[i] = math.Max(st.share[i], 1/f.sum[s])
				p1[i] += (f.u[i]*g[i] - s1[s]/f.sum[s]) * (f.y1[i] - 1)
				p2[i] += (f.u[i]*g[i] - s2[s]/f.sum[s]) * (f.y2[i] - 1)
			}
		}
	}
	used, present, shells := counts(legs)
	st.n = used
	st.df = used - float64(shells) - 1
	var m1, m2 float64
	for i := range p1 {
		w := rowWeight(legs, i)
		st.w[i] = w
		m1 += w * p1[i]
		m2 += w * p2[i]
	}
	m1, m2 = m1/present, m2/present
	for i, w := range st.w {
		st.v11 += w * (p1[i] - m1) * (p1[i] - m1)
		st.v12 += w * (p1[i] - m1) * (p2[i] - m2)
		st.v22 += w * (p2[i] - m2) * (p2[i] - m2)
	}
	if st.df > 0 {
		k := used / st.df
		st.v11, st.v12, st.v22 = k*st.v11, k*st.v12, k*st.v22
	}
	return st
}
