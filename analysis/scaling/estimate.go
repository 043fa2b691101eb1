package scaling

import (
	"context"
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/intensity"
)

// Estimate fits the scale of one crystal: separable robust least squares in
// which Gauss-Newton moves K and B while J is eliminated in closed form
// (variable projection: Golub & Pereyra 1973; Kaufman 1975), with the weights of
// a Student-t likelihood (Lange, Little & Taylor 1989). Observations of one raw
// index in several positions share a deviation in the weights, so that relative
// curves d_p rest on matched indices and the common curve c on equivalents at
// other angles. Gauge: position 0 has mean ln K = 0 over its observations and
// B = 0; c is the curve of the first position with angles, and there d_p = 0.
// settings may be nil. Errors: columns of unequal length, values that are not
// finite, variances not positive (with the row), cancellation.
func Estimate(ctx context.Context, in Input, settings *Settings) (*Fit, error) {
	set, err := settings.filled()
	if err != nil {
		return nil, err
	}
	if err := in.check(); err != nil {
		return nil, err
	}
	curve, warn := planCurves(&in, &set)
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	t, err := newTable(ctx, &in, curve, fitLaws(&in), set.Workers)
	if err != nil {
		return nil, err
	}
	f := newFitter(t, &in, &set, warn)
	if err := f.run(ctx); err != nil {
		return nil, err
	}
	if set.Anchor != AnchorAll {
		t.used = t.anchor(set.Anchor, f.s.j)
		f.restart()
		if err := f.run(ctx); err != nil {
			return nil, err
		}
	}
	return f.finish(ctx)
}

// Variants fits every combination of the given models and anchors, models
// outermost, other settings alike. nil models mean all four, nil anchors all
// five.
func Variants(ctx context.Context, in Input, models []Model, anchors []Anchor, settings *Settings) ([]*Fit, error) {
	if models == nil {
		models = []Model{Full, PhiOnly, BOnly, Constant}
	}
	if anchors == nil {
		anchors = []Anchor{AnchorAll, AnchorWeak, AnchorStrong, AnchorLow, AnchorHigh}
	}
	var out []*Fit
	for _, m := range models {
		for _, a := range anchors {
			var set Settings
			if settings != nil {
				set = *settings
			}
			set.Model, set.Anchor = m, a
			f, err := Estimate(ctx, in, &set)
			if err != nil {
				return nil, fmt.Errorf("%v, anchor %v: %w", m, a, err)
			}
			out = append(out, f)
		}
	}
	return out, nil
}

// noiseRounds is the number of passes in which the noise model inside the
// weights may still move; then it stands, so that the fit can come to rest.
const noiseRounds = 12

// minOwnDF is the number of degrees of freedom from equivalents below which a
// position's noise in the weights is taken from residuals of all positions.
const minOwnDF = 30

// leastKappa bounds the factor by which steps are lengthened because the t score
// is flatter than its weights; the normal law with nu = 5 gives 0.75.
const leastKappa = 0.6

// briskRounds is the number of rounds with lengthened steps; a fit that has not
// come to rest by then goes on with plain reweighted steps, which are slow but
// never overshoot.
const briskRounds = 20

// fitter carries one fit.
type fitter struct {
	in   *Input
	set  *Settings
	t    *table
	s    *state
	red  reductionInput
	free freedom
	r    *reduction

	joint   []bool
	normal  *mat.SymDense
	inverse *reducedSystem
	kappa   float64
	last    *sums

	soft         float64
	round, noise int
	shift        float64
	converged    bool
	warm         bool // parameters come from an earlier run
	warn, fixed  []intensity.Warning
}

func newFitter(t *table, in *Input, set *Settings, warn []intensity.Warning) *fitter {
	f := &fitter{in: in, set: set, t: t, s: newState(t, set), warn: warn, kappa: 1}
	over := t.overlap()
	f.red = reductionInput{table: t, state: f.s, use: t.usage(), over: over, set: set}
	f.warn = append(f.warn, over.warnings(set.MinOverlap)...)
	f.warn = append(f.warn, gaps(t, f.red.use)...)
	f.joint = make([]bool, in.Positions)
	for p, df := range t.ownDF() {
		f.joint[p] = df < minOwnDF
	}
	for p, k := range over.start() {
		n := t.curve[p].width()
		if t.curve[p].flat {
			n = 1
		}
		for i := range n {
			f.s.theta[f.s.off[p]+i] = k
		}
	}
	f.t.firstJ(f.s)
	f.restart()
	return f
}

// restart frees all curves and begins the count of rounds again.
func (f *fitter) restart() {
	f.free = freedom{common: true, relative: make([]bool, f.in.Positions)}
	for p := range f.free.relative {
		f.free.relative[p] = true
	}
	f.r = f.red.build(f.free)
	f.fixed = nil
	f.soft = math.NaN()
	f.round, f.noise = 0, noiseRounds
	f.normal, f.inverse = nil, nil
	f.converged = false
}

// warmRows is the number of observations from which the fit begins on a part of
// the reflections; partRows is about how many that part has.
const (
	warmRows = 400000
	partRows = 100000
)

// run iterates until the largest shift is below the tolerance.
func (f *fitter) run(ctx context.Context) error {
	if n := len(f.t.y); n >= warmRows && !f.warm {
		if err := f.approach(ctx, n/partRows); err != nil {
			return err
		}
	}
	fresh, checked := 0, false
	for f.round < f.set.MaxIter {
		f.round++
		early := 4
		if f.warm {
			early = 1
		}
		kind := passKind{hessian: f.normal == nil || fresh < early || fresh%6 == 0 || f.round > briskRounds, noise: f.noise > 0 && !f.s.report, cold: f.warm && fresh == 0}
		fresh++
		change, err := f.advance(ctx, kind)
		if err != nil {
			return err
		}
		if fresh == early+1 || f.shift < f.set.Tolerance && change < 1e-3 && fresh > early {
			checked = true
			if f.fixSoft() {
				fresh, checked = 0, false
				continue
			}
		}
		if checked && f.shift < f.set.Tolerance && change < 1e-3 {
			f.converged = true
			f.warm = true
			return nil
		}
	}
	f.warm = true
	return nil
}

// approach iterates on every n-th reflection until the shifts are small.
func (f *fitter) approach(ctx context.Context, stride int) error {
	for i := range 12 {
		kind := passKind{hessian: i < 4 || i%4 == 0, noise: !f.s.report, stride: stride}
		change, err := f.advance(ctx, kind)
		if err != nil {
			return err
		}
		if i > 3 && f.shift < 0.02 && change < 0.01 {
			break
		}
	}
	f.warm = true
	f.noise = 2
	f.normal, f.inverse = nil, nil
	return nil
}

// advance makes one pass and one step, and returns the largest relative change
// of the noise in the weights.
func (f *fitter) advance(ctx context.Context, kind passKind) (float64, error) {
	n, err := f.t.pass(ctx, f.s, kind, f.joint, f.set.Workers)
	if err != nil {
		return 0, err
	}
	if kind.hessian {
		f.renewNormal(n)
	}
	f.step(n)
	if !kind.noise {
		return 0, nil
	}
	f.noise--
	return f.s.renewNoise(n, f.red.over.matched), nil
}

func (f *fitter) renewNormal(n *sums) {
	f.kappa = 1
	if n.weight > 0 && f.round <= briskRounds {
		f.kappa = math.Max(leastKappa, n.curvature/n.weight)
	}
	f.normal = f.t.normal(f.s, n)
	f.normal.ScaleSym(f.kappa, f.normal)
	f.s.relax = 1 / f.kappa
	f.inverse = nil
}

// step moves theta and notes the largest shift over its standard error.
func (f *fitter) step(n *sums) {
	f.shift = 0
	if f.r.t == nil {
		return
	}
	if f.inverse == nil {
		f.inverse = invert(f.r.reduce(f.withPrior(), 0))
	}
	g := f.t.gradientOf(f.s, n)
	theta := mat.NewVecDense(f.s.size(), f.s.theta)
	var pull mat.VecDense
	pull.MulVec(f.r.prior, theta)
	g.SubVec(g, &pull)
	var eta, down, shift mat.VecDense
	down.MulVec(f.r.t.T(), g)
	eta.MulVec(f.inverse.inverse, &down)
	for i := range eta.Len() {
		if v := f.inverse.inverse.At(i, i); v > 0 {
			f.shift = math.Max(f.shift, math.Abs(eta.AtVec(i))/math.Sqrt(v))
		}
	}
	shift.MulVec(f.r.t, &eta)
	most := 0.0
	for p, c := range f.t.curve {
		for i := range c.width() {
			most = math.Max(most, math.Abs(shift.AtVec(f.s.off[p]+i)))
		}
		most = math.Max(most, math.Abs(shift.AtVec(f.s.indexB(f.t, p)))*0.2)
	}
	if most > 1 {
		shift.ScaleVec(1/most, &shift)
	}
	theta.AddVec(theta, &shift)
}

func (f *fitter) withPrior() *mat.SymDense {
	var a mat.SymDense
	a.AddSym(f.normal, f.r.prior)
	return &a
}
