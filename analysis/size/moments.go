package size

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// Model says which of exchange, curb and offset are fitted.
type Model int

const (
	M   Model = iota // exchange
	MQ               // exchange and curb
	MQO              // exchange, curb and offset
)

// String gives "(m)", "(m,q)" or "(m,q,o)".
func (m Model) String() string {
	switch m {
	case M:
		return "(m)"
	case MQ:
		return "(m,q)"
	case MQO:
		return "(m,q,o)"
	}
	return fmt.Sprintf("Model(%d)", int(m))
}

// Value is an estimate with its standard error and interval; Value and SE are
// NaN and the interval unbounded where it is not estimable.
type Value struct{ Value, SE, Lo, Hi float64 }

// Fit is the outcome of Moments. Q and O are zero where the model has none.
// When Estimable is false the values are NaN and Why says why; where the axis
// is weak (F below 50) Why says so too.
//
// O is a share of Reference, the mean of the thick position over the lowest
// third in s^2, and its error does not include that of Reference: the offset in
// intensity units is O.Value*Reference. Q is in units of 1 over the strength in
// CurbStrength; in CurbCommon and CurbRate it is the loss at the mean intensity
// (ReferenceThin) or count rate of the thin position over the lowest third.
type Fit struct {
	Model                    Model
	Curb                     CurbForm
	M, Q, O                  Value
	Reference, ReferenceThin float64
	Cov                      *mat.SymDense // of (M), (M, Q) or (M, Q, O)
	J, JP                    float64       // over-identification and its chi-square probability
	JDF                      int
	F                        float64 // first stage, as in Instrument
	N, DF                    float64
	Level                    float64
	Estimable                bool
	Why                      string
	Corrected                bool      // the estimates were moved by their bias of order 1/N
	MDeleted                 []float64 // by row, what its deletion takes off m; squares add up to the variance of m; nil with AsFound
}

// spanForOffset is how far shell means must range for the offset to lead.
const spanForOffset = 5

// Leads returns the model that leads: MQO where shell means of the thick
// position span more than five times, else MQ; span is max over min. Errors as
// in ExchangeWith.
func Leads(in *Input, w []float64) (model Model, span float64, err error) {
	f, err := newFrame("Leads", in, w, nil, false)
	if err != nil {
		return 0, 0, err
	}
	lo, hi := math.Inf(1), math.Inf(-1)
	for s, n := range f.sum {
		if n > 0 {
			lo, hi = math.Min(lo, f.mean2[s]), math.Max(hi, f.mean2[s])
		}
	}
	span = hi / lo
	if span > spanForOffset {
		return MQO, span, nil
	}
	return MQ, span, nil
}

// Moments fits exchange, curb and offset by two-step generalised moments
// (Hansen 1982, Econometrica 50:1029): the functions f = min(z, knot) of the
// axis, centred by shell, are orthogonal to
//
//	y1 - y2 - (m + (1-m) o/S_s)(y1 - 1) - (1-m) q (t - <t> y1),
//
// that is, what is left of the curb J exp(-q h y1) is exchanged, and the offset comes
// last. y = I over its shell mean, S_s the shell mean of Thick, h = 1 for CurbStrength, the
// shell mean of Thin over that of the lowest third in s^2 for CurbCommon, times
// Exposure for CurbRate; t is h Q, Q = y1^2 - v1 (or the product of the halves of the
// thin position), and the second order in q of the exponential,
// q (h Q <h Q> - h^2 T/2), T = y1^3 - 3 y1 v1, at the q that is found. With o the
// functions of the two knots below the highest times 1/S_s join: the offset is known by
// how m_s varies with 1/S_s.
//
// The first step weights all reflections alike, the second by the inverse of the
// variance of their residual, a v_s + b z^2 with v_s the mean variance of both positions in the
// shell, or by a_s + b z^2 where variances are not known (FlatShells keeps them alike),
// and the moments by the inverse of their covariance. Without the b z^2 few strong
// reflections decide what the data say of their own weight, and the error of q comes out a
// fifth too small; with a free a_s for each shell a large m reads 3 % low. The covariance of
// the moments includes the influence of the shell means and of <t>; each interval is
// Student's with the degrees of freedom of its own variance. J is the over-identification
// statistic with JDF degrees of freedom: a small JP says that these numbers do not describe
// the curve.
//
// Estimates are moved by what the delete-one jackknife says of their bias of order 1/N
// (Quenouille 1956, Biometrika 43:353), which shell means of a sample make: m = 0.15 reads
// 0.003 low and o 0.003 high without it. Their covariance is that of the same
// deletions (Tukey 1958, Ann. Math. Stat. 29:614), which knows what the correction adds; two
// fits of the same reflections covary as their MDeleted do. Where a correction would
// exceed a standard error none is made (Corrected is false). With AsFound there is none, and
// the covariance is the sandwich in the jackknife form of ExchangeWith.
//
// Errors as in ExchangeWith, and a curb without VarThin or halves, CurbRate without
// Exposure.
func Moments(in *Input, w []float64, model Model, set *Settings) (*Fit, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	f, err := newFrame("Moments", in, w, nil, false)
	if err != nil {
		return nil, err
	}
	return moments([]*frame{f}, model, set)
}

// MomentsCross pools legs as ExchangeCross does.
func MomentsCross(legs []*Input, w []float64, model Model, set *Settings) (*Fit, error) {
	frames, err := newFrames("MomentsCross", legs, w, set)
	if err != nil {
		return nil, err
	}
	return moments(frames, model, set)
}

func moments(legs []*frame, model Model, set *Settings) (*Fit, error) {
	if model < M || model > MQO {
		return nil, fmt.Errorf("size: Moments: no model %d", int(model))
	}
	sys, err := newSystem(legs, model, set.curb())
	if err != nil {
		return nil, err
	}
	sys.addFunctions(set.knots(), plain())
	if model == MQO {
		sys.addFunctions(middleKnots(set.knots()), inverseMean())
	}
	return sys.fit(set)
}

// middleKnots are the two below the highest: the highest one times 1/S_s follows
// single giants, and with it the intervals of q come out too short (coverage .87
// in place of .90 for 2000 reflections in 12 shells).
func middleKnots(k []float64) []float64 { return k[max(0, len(k)-3):max(1, len(k)-1)] }

func topKnots(k []float64) []float64 { return k[max(0, len(k)-2):] }

// fit solves the system and words the outcome.
func (s *system) fit(set *Settings) (*Fit, error) {
	st := covariances(s.frames(), set.clip())
	out := &Fit{Model: s.model, Curb: s.curb, Reference: s.ref2, ReferenceThin: s.ref1, Level: set.level(), N: s.used, J: math.NaN(), JP: math.NaN()}
	out.M, out.Q, out.O = noValue(), Value{}, Value{}
	if s.model >= MQ {
		out.Q = noValue()
	}
	if s.model == MQO {
		out.O = noValue()
	}
	out.DF = s.used - float64(s.shells) - float64(s.parameters())
	if out.DF < 1 || !(st.v11 > 0) {
		out.Why = fmt.Sprintf("%g reflections are too few for their shells", s.used)
		return out, nil
	}
	out.F = st.a1 * st.a1 / st.v11
	if out.F < inestimableF || st.a1 < 0 {
		out.Why = fmt.Sprintf("not estimable: the axis hardly follows the thin position (first-stage F = %.3g, below %d)", out.F, inestimableF)
		return out, nil
	}
	sol := s.solve(set)
	if sol == nil {
		out.Why = fmt.Sprintf("not estimable: the data do not tell %s apart", s.model)
		return out, nil
	}
	s.describe(out, sol)
	if out.F < weakF {
		out.Why = fmt.Sprintf("the axis is weak (first-stage F = %.3g, below %d): intervals are too short, see the Anderson-Rubin interval of the exchange", out.F, weakF)
	}
	if sol.jack != nil && !out.Corrected {
		if out.Why != "" {
			out.Why += "; "
		}
		out.Why += "too few reflections for a correction of the bias of order 1/N, which would be more than an error"
	}
	return out, nil
}

// describe turns the linear solution into m, q, o.
func (s *system) describe(out *Fit, sol *solution) {
	p := s.parameters()
	cov := mat.NewSymDense(p, nil)
	grad := mat.NewDense(p, p, nil)
	for i := range p {
		grad.Set(i, i, 1)
	}
	theta := append([]float64(nil), sol.unbiased...)
	for k := 1; k < p; k++ {
		m, slope := theta[0], theta[k]
		theta[k] = slope / (1 - m)
		grad.Set(k, 0, slope/((1-m)*(1-m)))
		grad.Set(k, k, 1/(1-m))
	}
	var half, full mat.Dense
	half.Mul(grad, sol.cov)
	full.Mul(&half, grad.T())
	for i := range p {
		for j := i; j < p; j++ {
			cov.SetSym(i, j, (full.At(i, j)+full.At(j, i))/2)
		}
	}
	for i, v := range []*Value{&out.M, &out.Q, &out.O}[:p] {
		t := tQuantile(out.Level, math.Min(out.DF, sol.width[i]))
		*v = newValue(theta[i], math.Sqrt(math.Max(0, cov.At(i, i))), t)
	}
	out.Cov, out.Estimable = cov, true
	if sol.jack != nil {
		out.Corrected, out.MDeleted = sol.jack.shift != nil, sol.jack.m
	}
	out.J, out.JDF, out.JP = sol.j, sol.df, 1
	if sol.df > 0 {
		out.JP = distuv.ChiSquared{K: float64(sol.df)}.Survival(sol.j)
	}
}
