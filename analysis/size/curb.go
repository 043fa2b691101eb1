package size

import (
	"fmt"
	"strings"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/stat/distuv"
)

// CurbForm says what the curb grows with.
type CurbForm int

const (
	CurbCommon   CurbForm = iota // intensity on the common scale over its mean in the lowest third of s^2
	CurbStrength                 // strength, intensity over the local shell mean
	CurbRate                     // count rate, Exposure times intensity
)

// String says it in words.
func (c CurbForm) String() string {
	switch c {
	case CurbCommon:
		return "intensity"
	case CurbStrength:
		return "strength"
	case CurbRate:
		return "count rate"
	}
	return fmt.Sprintf("CurbForm(%d)", int(c))
}

// CurbRival is one form of the curb in a CurbComparison.
type CurbRival struct {
	Form    CurbForm
	Fit     *Fit
	J       float64 // under the weight matrix common to all forms
	Behind  float64 // J less that of the best
	Refused bool    // Behind exceeds the 95 % point of chi-square with one degree of freedom
}

// CurbComparison sets the forms of the curb side by side. Told is true when
// every form but the best is refused; Why is a sentence in either case.
type CurbComparison struct {
	Rivals []CurbRival
	Best   CurbForm
	Told   bool
	Why    string
}

// CompareCurbs fits MQ or MQO with each form of the curb on the same moments
// and one weight matrix, that of the form with the least J: the functions of
// Moments, 1/S_s included, and those of the two highest knots times the shell
// level and, when given, Exposure, which is what the forms differ by. CurbRate is compared only
// with Exposure.
//
// A form whose J exceeds the best by more than 3.84 is refused: against the
// model that holds both forms the difference of J is at least that, and
// chi-square with one degree of freedom when the smaller form is true (Newey &
// West 1987, Int. Econ. Rev. 28:777), so the refusal errs less than 5 %. Errors
// as in Moments.
func CompareCurbs(in *Input, w []float64, model Model, set *Settings) (*CurbComparison, error) {
	if err := set.check(); err != nil {
		return nil, err
	}
	if model != MQ && model != MQO {
		return nil, fmt.Errorf("size: CompareCurbs: the model %s has no curb", model)
	}
	f, err := newFrame("CompareCurbs", in, w, nil, false)
	if err != nil {
		return nil, err
	}
	out := &CurbComparison{}
	var systems []*system
	var best *solution
	for _, form := range []CurbForm{CurbCommon, CurbStrength, CurbRate} {
		if form == CurbRate && in.Exposure == nil {
			continue
		}
		sys, err := curbSystem(f, model, form, set)
		if err != nil {
			return nil, err
		}
		fit, err := sys.fit(set)
		if err != nil {
			return nil, err
		}
		if !fit.Estimable {
			return &CurbComparison{Why: fit.Why}, nil
		}
		// The jackknife of fit is not needed twice.
		plain := Settings{AsFound: true}
		if set != nil {
			plain = *set
			plain.AsFound = true
		}
		sol := sys.solve(&plain)
		systems = append(systems, sys)
		out.Rivals = append(out.Rivals, CurbRival{Form: form, Fit: fit})
		if best == nil || sol.j < best.j {
			best = sol
		}
	}
	out.judge(systems, best)
	return out, nil
}

func curbSystem(f *frame, model Model, form CurbForm, set *Settings) (*system, error) {
	sys, err := newSystem([]*frame{f}, model, form)
	if err != nil {
		return nil, err
	}
	top := topKnots(set.knots())
	sys.addFunctions(set.knots(), plain())
	sys.addFunctions(middleKnots(set.knots()), inverseMean())
	sys.addFunctions(top, shellLevel())
	if f.in.Exposure != nil {
		sys.addFunctions(top, exposure())
	}
	return sys, nil
}

func (c *CurbComparison) judge(systems []*system, best *solution) {
	least := 0
	var ch mat.Cholesky
	common := ch.Factorize(best.omega)
	for i, sys := range systems {
		r := &c.Rivals[i]
		r.J = r.Fit.J
		if common {
			m := sys.sums(best.rows)
			if theta := linear(m.a, best.omega, m.g); theta != nil {
				r.J = distance(m, theta, &ch)
			}
		}
		if r.J < c.Rivals[least].J {
			least = i
		}
	}
	limit := distuv.ChiSquared{K: 1}.Quantile(0.95)
	c.Best = c.Rivals[least].Form
	c.Told = true
	var open []string
	for i := range c.Rivals {
		r := &c.Rivals[i]
		r.Behind = r.J - c.Rivals[least].J
		r.Refused = r.Behind > limit
		if i != least && !r.Refused {
			c.Told = false
			open = append(open, r.Form.String())
		}
	}
	c.Why = fmt.Sprintf("a curb that grows with %s fits best", c.Best)
	if c.Told {
		c.Why += ", and the data refuse the others"
	} else {
		c.Why += "; the data cannot tell it from " + strings.Join(open, " or ")
	}
	if p := c.Rivals[least].Fit.JP; p < 0.05 {
		c.Why += fmt.Sprintf("; even so it does not describe the curve (p = %.2g)", p)
	}
}
