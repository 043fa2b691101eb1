package analysis

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/pool"
	"thinward/analysis/resample"
	"thinward/analysis/size"
)

// joined is what the crystals say together.
type joined struct {
	crystals  *CrystalsResult
	thickness *ThicknessResult
}

// Join pools the primary contrasts of all crystals and draws the growth of
// the exchange with thickness.
func (s *Study) Join(ctx context.Context) (*CrystalsResult, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if err := s.joinStep(ctx); err != nil {
		return nil, err
	}
	return s.pooled.crystals, nil
}

func (s *Study) joinStep(ctx context.Context) error {
	if s.pooled != nil {
		return nil
	}
	for _, c := range s.list {
		if _, err := s.compareStep(ctx, c); err != nil {
			return fmt.Errorf("%s: %w", s.Name(c), err)
		}
	}
	j := &joined{crystals: s.poolCrystals()}
	var err error
	if j.thickness, err = s.growth(ctx); err != nil {
		return err
	}
	j.thickness.Across = s.separate()
	if j.thickness.Tilt, err = s.withinPositions(ctx); err != nil {
		return err
	}
	s.pageTrend(j)
	s.pooled = j
	return nil
}

// primaries gives the primary contrast within each crystal, in order.
func (s *Study) primaries() []*Compared {
	var out []*Compared
	for _, c := range s.list {
		if c.Primary && !c.Across() {
			out = append(out, s.compared[c])
		}
	}
	return out
}

func (s *Study) poolCrystals() *CrystalsResult { return s.pool(s.primaries()) }

// pool says what contrasts of several crystals say together.
func (s *Study) pool(contrasts []*Compared) *CrystalsResult {
	r := &CrystalsResult{InThese: none(), LikeThese: none(), SharedSE: math.NaN(), Q: math.NaN(), QP: math.NaN(), Tau2: math.NaN(), I2: math.NaN(),
		PageL: math.NaN(), PageP: math.NaN(), PageBest: math.NaN(), MeanAgree: math.NaN()}
	var m, se, same []float64
	var names []string
	var list []*Compared
	agree, n := 0.0, 0
	for _, x := range contrasts {
		e := x.Result.Exchange
		if a := x.Result.AxisAgreement; !math.IsNaN(a) {
			agree += a
			n++
		}
		if math.IsNaN(e.M) || !(e.SE > 0) {
			continue
		}
		m, se, names = append(m, e.M), append(se, e.SE), append(names, x.Result.Crystal)
		list, same = append(list, x), append(same, 1)
	}
	if n > 0 {
		r.MeanAgree = agree / float64(n)
	}
	r.N = len(m)
	r.SameSign, r.SignP, r.SmallestP = pool.Signs(m)
	if len(m) == 0 {
		r.Why = "m is estimable in no crystal"
		return r
	}
	cov := covarianceBetween(list, same, se)
	e, err := pool.JoinCovariant(m, cov, s.settings.Level)
	if err != nil {
		r.Why = err.Error()
		return r
	}
	r.SharedSE = e.SharedSE
	r.InThese = interval(e.Fixed, e.FixedLo, e.FixedHi, "")
	r.LikeThese = interval(e.Random, e.LikeLo, e.LikeHi, "")
	r.Q, r.QP = e.Q, e.QP
	if e.Estimable {
		r.Tau2, r.I2 = e.Tau2, e.I2
	} else {
		r.Why = fmt.Sprintf("τ² and I² are not estimable from %d crystals (five are needed)", e.K)
	}
	if len(m) == 1 {
		r.LikeThese.Why = "one crystal says nothing of others"
	}
	left, err := pool.LeaveOneOut(m, cov, s.settings.Level)
	if err == nil {
		for i, l := range left {
			r.LeaveOut = append(r.LeaveOut, Left{Without: names[i], M: interval(l.Fixed, l.FixedLo, l.FixedHi, "")})
		}
	}
	return r
}

// growth fits mu = -ln(1-m) against thickness beyond the thinnest, crystal by
// crystal, with the covariance of one joint bootstrap: contrasts that share the
// thinnest position share its errors.
func (s *Study) growth(ctx context.Context) (*ThicknessResult, error) {
	t := &ThicknessResult{Slope: none()}
	var slopes, errors, perM []float64
	var list []*Compared
	for i := range s.Series.Crystals {
		line, se, err := s.crystalLine(ctx, i)
		if err != nil {
			return nil, err
		}
		if line == nil {
			continue
		}
		t.Lines = append(t.Lines, *line)
		if line.Why == "" {
			slopes, errors = append(slopes, line.Slope.Value), append(errors, se)
			x := s.againstThinnest(i)[0]
			list = append(list, x)
			perM = append(perM, 1/((1-x.Fit.M.Value)*(line.T[len(line.T)-1]-line.T[0])/100))
		}
	}
	if len(slopes) == 0 {
		t.Why = "no crystal has an estimable growth"
		return t, nil
	}
	e, err := pool.JoinCovariant(slopes, covarianceBetween(list, perM, errors), s.settings.Level)
	if err != nil {
		t.Why = err.Error()
		return t, nil
	}
	t.Slope = s.slope(e.Fixed, e.FixedSE)
	return t, nil
}

// slope is a growth with its interval, widened by the relative error that all
// thicknesses share. It multiplies every slope alike, so it neither moves one nor
// falls with the number of crystals.
func (s *Study) slope(v, se float64) Interval {
	half := zOf(s.settings.Level) * math.Hypot(se, s.Series.ThicknessScaleSU*v)
	return interval(v, v-half, v+half, "")
}

// againstThinnest lists the contrasts of crystal i whose thin side is that of
// the primary one.
func (s *Study) againstThinnest(i int) []*Compared {
	var out []*Compared
	thin := -1
	for _, c := range s.list {
		if c.Crystal != i || c.Across() {
			continue
		}
		if c.Primary {
			thin = c.Thin
		}
	}
	for _, c := range s.list {
		if c.Crystal == i && !c.Across() && c.Thin == thin {
			out = append(out, s.compared[c])
		}
	}
	return out
}

// crystalLine fits one crystal. All its points are against the thinnest position and
// share the error of that thickness. se leaves out what all crystals share.
func (s *Study) crystalLine(ctx context.Context, i int) (line *ThicknessLine, se float64, err error) {
	list := s.againstThinnest(i)
	if len(list) == 0 {
		return nil, 0, nil
	}
	c := &s.Series.Crystals[i]
	line = &ThicknessLine{Crystal: c.Name, Slope: none(), Chi2: math.NaN()}
	thin := c.Positions[list[0].Contrast.Thin]
	line.T, line.Mu, line.MuSE = []float64{thin.ThicknessNM}, []float64{0}, []float64{0}
	for _, x := range list {
		if x.Fit == nil || math.IsNaN(x.Fit.M.Value) || x.Fit.M.Value >= 1 {
			line.Why = fmt.Sprintf("m is not estimable in %s - %s", x.Result.Thin, x.Result.Thick)
			return line, 0, nil
		}
	}
	cov, err := s.muCovariance(ctx, list)
	if err != nil {
		if ctx.Err() != nil {
			return nil, 0, ctx.Err()
		}
		line.Why = err.Error()
		return line, 0, nil
	}
	var x, y, own, shared []float64
	for k, v := range list {
		p := c.Positions[v.Contrast.Thick]
		mu := -math.Log(1 - v.Fit.M.Value)
		line.T, line.Mu, line.MuSE = append(line.T, p.ThicknessNM), append(line.Mu, mu), append(line.MuSE, math.Sqrt(cov.At(k, k)))
		dt := (p.ThicknessNM - thin.ThicknessNM) / 100
		x, y = append(x, dt), append(y, mu)
		own, shared = append(own, p.ThicknessSU/100), append(shared, thin.ThicknessSU/100)
	}
	fit, err := pool.ThroughOrigin(x, y, cov, own, shared, s.settings.Level)
	if err != nil {
		line.Why = err.Error()
		return line, 0, nil
	}
	line.Slope = s.slope(fit.Slope, fit.SlopeSE)
	line.Chi2, line.DF = fit.Chi2, fit.DF
	line.ascend()
	line.rise()
	return line, fit.SlopeSE, nil
}

// ascend puts the positions in the order of thickness; contrasts stand with the
// primary one first.
func (l *ThicknessLine) ascend() {
	order := make([]int, len(l.T))
	for k := range order {
		order[k] = k
	}
	slices.SortStableFunc(order, func(a, b int) int { return cmp.Compare(l.T[a], l.T[b]) })
	l.T, l.Mu, l.MuSE = take(l.T, order), take(l.Mu, order), take(l.MuSE, order)
}

// muCovariance is that of the deletions of all contrasts of a crystal; where one has none,
// reflections of the whole catalogue are drawn once for all contrasts, so that what they share
// shows in the covariance.
func (s *Study) muCovariance(ctx context.Context, list []*Compared) (*mat.SymDense, error) {
	if cov := deletedMu(list); cov != nil {
		return cov, nil
	}
	set := s.sizeSettings()
	legs := make([][]*size.Input, len(list))
	for k, x := range list {
		legs[k] = s.legs(x)
	}
	boot, err := resample.Scalars(ctx, s.intake.Catalogue.Len(), func(w []float64) ([]float64, error) {
		out := make([]float64, len(list))
		for k, x := range list {
			own := make([]float64, x.Pairs.Len())
			for i, u := range x.Pairs.Unique {
				own[i] = w[u]
			}
			fit, err := size.MomentsCross(legs[k], own, x.Model, set)
			if err != nil {
				return nil, err
			}
			out[k] = -math.Log(1 - fit.M.Value)
		}
		return out, nil
	}, &resample.Settings{Replicates: s.drawn(), Level: s.settings.Level, Workers: s.settings.Workers, NoBCa: true,
		Seed: s.seed(list[0].Result.Crystal, "thickness")})
	if err != nil {
		return nil, err
	}
	cov := mat.NewSymDense(len(list), nil)
	for a := range list {
		for b := a; b < len(list); b++ {
			cov.SetSym(a, b, boot.Cov[a][b])
		}
	}
	return cov, nil
}

// pageTrend asks whether the crystals agree in the order of mu over their
// positions, thin to thick, when all have equally many of different thickness.
func (s *Study) pageTrend(j *joined) {
	var rows [][]float64
	for _, l := range j.thickness.Lines {
		if len(l.Mu) < 3 || l.Why != "" || len(rows) > 0 && len(l.Mu) != len(rows[0]) {
			return
		}
		for k := 1; k < len(l.T); k++ {
			if !(l.T[k] > l.T[k-1]) {
				return
			}
		}
		rows = append(rows, l.Mu)
	}
	if len(rows) < 2 {
		return
	}
	t, err := resample.Page(rows)
	if err != nil {
		return
	}
	j.crystals.PageL, j.crystals.PageP, j.crystals.PageBest = t.Stat, t.Upper, math.Pow(1/factorial(len(rows[0])), float64(len(rows)))
}

func factorial(n int) float64 {
	f := 1.0
	for i := 2; i <= n; i++ {
		f *= float64(i)
	}
	return f
}
