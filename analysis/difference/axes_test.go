package difference

import (
	"context"
	"errors"
	"math"
	"testing"

	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

func TestAxisWords(t *testing.T) {
	for a := AxisCrystals; a <= AxisMean; a++ {
		if b, err := ParseAxis(a.String()); err != nil || b != a {
			t.Errorf("%v reads back as %v, %v", a, b, err)
		}
	}
	if _, err := ParseAxis("fourth"); err == nil {
		t.Error("an unknown axis is read")
	}
	if got := Axis(20).String(); got != "Axis(20)" {
		t.Error(got)
	}
}

// others merges positions of crystals that the pairs are not from.
func (w *truth) others(scatter float64, crystals ...int) []OtherCrystal {
	var out []OtherCrystal
	for _, c := range crystals {
		o := OtherCrystal{Name: string(rune('A' + c))}
		for k := range uint64(3) {
			s := w.position(invention{seed: 1000*uint64(c) + k, crystal: c, scatter: scatter, shared: 0.85, gain: 200, background: 0.1})
			o.Positions = append(o.Positions, intensity.Merge(w.cat.Len(), s))
		}
		out = append(out, o)
	}
	return out
}

// No exchange, position-specific deviations of 10, 20, 30 % whose neighbours are
// alike: the third position must give a wrong m and the other crystals the right
// one, 0; and 0.05 when that is put in.
func TestOtherCrystalsAreClean(t *testing.T) {
	w := newTruth(t, 0.045)
	for _, m := range []float64{0, 0.05} {
		var clean, third []float64
		for rep := range uint64(8) {
			thin := w.position(invention{seed: 10*rep + 1, crystal: 500 + int(rep), scatter: 0.1, shared: 0.6, gain: 200, background: 0.1})
			thick := w.position(invention{seed: 10*rep + 2, crystal: 500 + int(rep), scatter: 0.3, shared: 0.9, gain: 200, background: 0.1, exchange: m})
			middle := w.position(invention{seed: 10*rep + 3, crystal: 500 + int(rep), scatter: 0.2, shared: 0.9, gain: 200, background: 0.1, exchange: m / 2})
			p := mustPair(t, thin, thick, w.cat, &Settings{SameCrystal: true})
			s, err := p.Crystals(w.others(0.2, 2+2*int(rep), 3+2*int(rep)))
			if err != nil {
				t.Fatal(err)
			}
			if !(s.Correlation > 0.8) || s.Axis != AxisCrystals || s.N < p.Len()*9/10 {
				t.Errorf("correlation %g over %d of %d", s.Correlation, s.N, p.Len())
			}
			clean = append(clean, exchangeBy(p, s.Z, p.Thin, p.Thick))
			if s, err = p.Third(intensity.Merge(w.cat.Len(), middle)); err != nil {
				t.Fatal(err)
			}
			third = append(third, exchangeBy(p, s.Z, p.Thin, p.Thick))
		}
		floatcmp.Check(t, "other crystals", mean(clean), m, 0.015, 0)
		if !(mean(third) < m-0.01) {
			t.Errorf("m %g: the third position gives %.4f, no bias", m, mean(third))
		}
	}
}

func halfExchange(t *testing.T, p *Pairs, axis Axis) float64 {
	h, err := p.Half(axis, 7)
	if err != nil {
		t.Fatal(err)
	}
	return 0.5 * (exchangeBy(p, h.Folds[0].Z, h.Folds[0].Thin, h.Folds[0].Thick) + exchangeBy(p, h.Folds[1].Z, h.Folds[1].Thin, h.Folds[1].Thick))
}

// Deviations that the two positions do not share: the slope from halves of thin errs
// upward, that from halves of thick downward.
func TestHalvesBracket(t *testing.T) {
	w := newTruth(t, 0.045)
	for _, matched := range []bool{false, true} {
		var up, down []float64
		for rep := range uint64(16) {
			thin := reproducible(w, w.position(invention{seed: 10*rep + 1, crystal: 1, gain: 200, background: 0.1}), 10*rep+1)
			thick := reproducible(w, w.position(invention{seed: 10*rep + 2, crystal: 1, gain: 200, background: 0.1}), 10*rep+2)
			set := &Settings{SameCrystal: matched}
			p := mustPair(t, thin, thick, w.cat, set)
			if p.Matched != matched {
				t.Fatalf("matched is %v", p.Matched)
			}
			up, down = append(up, halfExchange(t, p, AxisHalfThin)), append(down, halfExchange(t, p, AxisHalfThick))
		}
		b := covarianceRatio(w)
		// One series scatters by 0.023 and 0.032; four standard errors of 16.
		floatcmp.Check(t, "half of thin", mean(up), 1-1/b, 0.023, 0)
		floatcmp.Check(t, "half of thick", mean(down), 1-b, 0.032, 0)
	}
}

// covarianceRatio is what deviations of 30 % make of the covariance of a
// strength (clipped at 6) with the intensity that shares them, over that with
// one that does not, for the strengths of w, by simulation without noise.
func covarianceRatio(w *truth) float64 {
	var z, own, free []float64
	r := newNormal(77)
	for range 100 {
		for u, j := range w.j {
			e := j / w.local[u]
			x := e * math.Exp(0.3*r()-0.045)
			z, own, free = append(z, math.Min(x, 6)), append(own, x), append(free, e)
		}
	}
	_, shared := products(z, own)
	_, apart := products(z, free)
	return shared / apart * mean(free) / mean(own)
}

// reproducible gives every reflection one deviation of 30 % in all equivalents.
func reproducible(w *truth, s *intensity.Scaled, seed uint64) *intensity.Scaled {
	x := make([]float64, w.cat.Len())
	r := newNormal(seed)
	for u := range x {
		x[u] = math.Exp(0.3*r() - 0.045)
	}
	for o, u := range s.Unique {
		s.I[o] += w.j[u] * (x[u] - 1)
	}
	return s
}

func TestHalfFolds(t *testing.T) {
	w := newTruth(t, 0.03)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 200, background: 0.1})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 200, background: 0.1})
	for _, set := range []*Settings{{SameCrystal: true}, {}} {
		p := mustPair(t, thin, thick, w.cat, set)
		for _, axis := range []Axis{AxisHalfThin, AxisHalfThick} {
			h, err := p.Half(axis, 3)
			if err != nil {
				t.Fatal(err)
			}
			for k, f := range h.Folds {
				n := 0
				sum := make([]float64, p.Shells)
				for i, z := range f.Z {
					if math.IsNaN(z) != math.IsNaN(f.Thin[i]) || math.IsNaN(z) != math.IsNaN(f.VarThick[i]) {
						t.Fatal("the columns of a fold are missing in different places")
					}
					if !math.IsNaN(z) {
						n++
						sum[p.Shell[i]] += z - 1
						other := h.Folds[1-k]
						if axis == AxisHalfThin {
							// What is the strength here is the pair's member there.
							floatcmp.Check(t, "cross fit", z/other.Thin[i]*f.Thin[i]/other.Z[i], ratioOfMeans(p, h, i, k, axis), 0, 1e-9)
						}
					}
				}
				if n != f.N || n < p.Len()/2 {
					t.Errorf("fold holds %d, says %d of %d", n, f.N, p.Len())
				}
				for _, x := range sum {
					floatcmp.Check(t, "mean strength of a shell", x, 0, 1e-8, 0)
				}
			}
		}
	}
	p := mustPair(t, thin, thick, w.cat, nil)
	if _, err := p.Half(AxisThird, 1); err == nil {
		t.Error("a third position is taken for a half")
	}
}

// ratioOfMeans is what the two folds' shell means make of z/thin' thin/z'.
func ratioOfMeans(p *Pairs, h *Halved, i, k int, _ Axis) float64 {
	a, b := 0.0, 0.0
	for j := range p.Shell {
		if p.Shell[j] == p.Shell[i] && !math.IsNaN(h.Folds[k].Z[j]) {
			a += h.Folds[1-k].Thin[j] / p.Epsilon[j]
			b += h.Folds[k].Thin[j] / p.Epsilon[j]
		}
	}
	return b / a
}

func TestCrystalsRefused(t *testing.T) {
	w := newTruth(t, 0.03)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 200, background: 0.1})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 200, background: 0.1})
	p := mustPair(t, thin, thick, w.cat, nil)
	wrong := w.others(0.1, 5)
	for _, m := range wrong[0].Positions {
		// Strengths of other reflections, as after a wrong indexing.
		n := len(m.J)
		moved := make([]float64, n)
		for u := range moved {
			moved[u] = m.J[(u+n/2)%n] / w.local[(u+n/2)%n] * w.local[u]
		}
		m.J = moved
	}
	_, err := p.Crystals(wrong)
	var refused *RefusedError
	if !errors.As(err, &refused) || !(refused.Correlation < 0.3) || refused.N == 0 {
		t.Errorf("got %v", err)
	}
	if _, err = p.Crystals(nil); err == nil {
		t.Error("no crystal is accepted")
	}
	if _, err = p.Crystals([]OtherCrystal{{Name: "L2", Positions: []*intensity.Merged{{}}}}); err == nil {
		t.Error("a position of another catalogue is accepted")
	}
	if _, err = p.Third(intensity.Merge(w.cat.Len(), &intensity.Scaled{})); err == nil {
		t.Error("a third position without a reflection is accepted")
	}
}

func TestCrystalsScaleFree(t *testing.T) {
	w := newTruth(t, 0.03)
	thin := w.position(invention{seed: 1, crystal: 1, gain: 200, background: 0.1})
	thick := w.position(invention{seed: 2, crystal: 1, gain: 200, background: 0.1})
	p := mustPair(t, thin, thick, w.cat, nil)
	one, err := p.Crystals(w.others(0.1, 5, 6))
	if err != nil {
		t.Fatal(err)
	}
	set := w.others(0.1, 5, 6)
	for k, m := range set[1].Positions {
		c := float64(k + 3)
		for u := range m.J {
			m.J[u] *= c
			m.Var[u] *= c * c
		}
	}
	two, err := p.Crystals(set)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.CheckSlice(t, "strength", two.Z, one.Z, 1e-10, 1e-10)
	missing, err := p.Crystals([]OtherCrystal{{"L2", []*intensity.Merged{emptied(set[0].Positions[0], p.Unique[4])}}})
	if err != nil || !math.IsNaN(missing.Z[4]) || missing.N != p.Len()-countNaN(missing.Z) || len(missing.Warnings) != 1 {
		t.Errorf("a reflection measured nowhere else: %v, %v", missing, err)
	}
}

func emptied(m *intensity.Merged, u int32) *intensity.Merged {
	m.J[u], m.Var[u], m.N[u] = 0, math.Inf(1), 0
	return m
}

func countNaN(x []float64) int {
	n := 0
	for _, v := range x {
		if math.IsNaN(v) {
			n++
		}
	}
	return n
}

// Null series of counting noise, thin noisier than thick: the naive axes draw
// a pattern, the ghost follows it, the inverse-variance mean and the truth are
// flat. With the thin sigmas understated by 1.5 the inverse-variance mean is
// not, and the tipping ratio says that 1.5 undoes it.
func TestNaiveScores(t *testing.T) {
	w := newTruth(t, 0.12)
	thin := w.position(invention{seed: 3, crystal: 1, gain: 15, background: 0.4})
	thick := w.position(invention{seed: 4, crystal: 2, gain: 60, background: 0.4})
	p := mustPair(t, thin, thick, w.cat, nil)
	for _, axis := range []Axis{AxisThin, AxisThick, AxisMean} {
		s, err := p.Score(axis)
		if err != nil {
			t.Fatal(err)
		}
		r, _ := intensity.Correlate(s.Mean, s.GhostMean)
		t.Logf("%s: score %.1f, ghost %.1f, share %.2f, correlation %.3f", axis, s.Value, s.Ghost, s.Share, r)
		if !(s.Value > 5 && r > 0.9 && s.Share > 0.9) {
			t.Errorf("%s: score %.1f, ghost %.1f, share %.2f, correlation %.3f", axis, s.Value, s.Ghost, s.Share, r)
		}
		floatcmp.Check(t, axis.String()+": ghost score", s.Ghost, s.Value, 3, 0.3)
	}
	flat, err := p.Score(AxisInverseVariance)
	if err != nil {
		t.Fatal(err)
	}
	// Mean of 20 squares: 1 +- 0.32.
	floatcmp.Check(t, "inverse-variance", flat.Value, 1, 1.1, 0)
	floatcmp.Check(t, "its ghost", flat.Ghost, 1, 1e-12, 0)
	floatcmp.Check(t, "its share", flat.Share, math.NaN(), 0, 0)
	z := make([]float64, p.Len())
	for i, u := range p.Unique {
		z[i] = w.j[u] / w.local[u]
	}
	floatcmp.Check(t, "truth", ScoreOf(z, p.Eps()).Value, 1, 1.1, 0)

	understated := w.position(invention{seed: 3, crystal: 1, gain: 15, background: 0.4})
	for o := range understated.Var {
		understated.Var[o] /= 1.5 * 1.5
	}
	q := mustPair(t, understated, thick, w.cat, nil)
	wrong, err := q.Score(AxisInverseVariance)
	if err != nil {
		t.Fatal(err)
	}
	if !(wrong.Value > 2.5) {
		t.Errorf("with wrong sigmas the score is %.2f", wrong.Value)
	}
	eps := q.Eps()
	tip, err := q.Tipping(context.Background(), func(_ context.Context, z []float64) (float64, error) {
		// P value of twenty squares by the normal approximation of Wilson & Hilferty (1931).
		x := (math.Cbrt(ScoreOf(z, eps).Value) - (1 - 2./180)) / math.Sqrt(2./180)
		return 0.5 * math.Erfc(x/math.Sqrt2), nil
	}, nil)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("tipping %+v", *tip)
	if !(tip.P < 0.001 && tip.Up > 1.05 && tip.Up < 1.6 && tip.Nearest == tip.Up && tip.Down == 0) {
		t.Errorf("tipping %+v", *tip)
	}
}

func TestTipping(t *testing.T) {
	p := &Pairs{Thin: []float64{2}, Thick: []float64{1}, VarThin: []float64{1}, VarThick: []float64{1}, MeanPooled: []float64{1}}
	// z = (2 + r^2)/(1 + r^2) for the ratio r: 1.5 at r = 1, 1.2 at r = 2, 1.8 at 1/2.
	test := func(limitUp, limitDown float64) func(context.Context, []float64) (float64, error) {
		return func(_ context.Context, z []float64) (float64, error) {
			if z[0] < limitUp || z[0] > limitDown {
				return 0.5, nil
			}
			return 0.01, nil
		}
	}
	got, err := p.Tipping(context.Background(), test(1.2, 1.8), nil)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "up", got.Up, 2, 0, 0.011)
	floatcmp.Check(t, "down", got.Down, 0.5, 0, 0.011)
	floatcmp.Check(t, "nearest", got.Nearest, 2, 0, 0.011)
	if got, err = p.Tipping(context.Background(), test(1.01, 1.8), nil); err != nil || !math.IsInf(got.Up, 1) {
		t.Errorf("no tipping above: %+v, %v", got, err)
	}
	if got, err = p.Tipping(context.Background(), test(9, 9), nil); err != nil || *got != (Tipping{0.5, 1, 1, 1}) {
		t.Errorf("nothing found to begin with: %+v, %v", got, err)
	}
	broken := errors.New("broken")
	if _, err = p.Tipping(context.Background(), func(context.Context, []float64) (float64, error) { return 0, broken }, nil); !errors.Is(err, broken) {
		t.Errorf("got %v", err)
	}
	if _, err = p.Tipping(context.Background(), test(1, 2), &TippingSettings{Level: 2}); err == nil {
		t.Error("a level of 2 is accepted")
	}
}

func TestLinearAxes(t *testing.T) {
	p := &Pairs{Thin: []float64{3, 4}, Thick: []float64{1, 2}, VarThin: []float64{1, 1}, VarThick: []float64{3, 1}, MeanPooled: []float64{2, 4}}
	for _, c := range []struct {
		s      *Strengths
		z, v   []float64
		expect Axis
	}{
		{p.Naive(AxisThin), []float64{1.5, 1}, []float64{0.25, 1. / 16}, AxisThin},
		{p.Naive(AxisThick), []float64{0.5, 0.5}, []float64{0.75, 1. / 16}, AxisThick},
		{p.Naive(AxisMean), []float64{1, 0.75}, []float64{0.25, 1. / 32}, AxisMean},
		{p.InverseVariance(0), []float64{1.25, 0.75}, []float64{3. / 16, 1. / 32}, AxisInverseVariance},
		{p.InverseVariance(math.Sqrt(3)), []float64{1, 2.5 / 4}, []float64{1.5 / 4, 0.75 / 16}, AxisInverseVariance},
	} {
		floatcmp.CheckSlice(t, c.expect.String(), c.s.Z, c.z, 0, 1e-14)
		floatcmp.CheckSlice(t, c.expect.String()+" variance", c.s.Var, c.v, 0, 1e-14)
		if c.s.Axis != c.expect || c.s.N != 2 {
			t.Errorf("%+v", c.s)
		}
	}
	defer func() {
		if got := recover(); got != "difference: Naive: axis third is not naive" {
			t.Errorf("panic %v", got)
		}
	}()
	p.Naive(AxisThird)
}

func TestScoreOfEdges(t *testing.T) {
	s := ScoreOf(make([]float64, 39), make([]float64, 39))
	floatcmp.Check(t, "too few", s.Value, math.NaN(), 0, 0)
	nan := math.NaN()
	z, eps := make([]float64, 60), make([]float64, 60)
	for i := range z {
		z[i], eps[i] = float64(i), float64(i%2)
	}
	all := ScoreOf(z, eps)
	floatcmp.Check(t, "missing are left out", ScoreOf(append(z, nan), append(eps, 100)).Value, all.Value, 0, 0)
	if len(all.Mean) != ScoreBins || len(all.Strength) != ScoreBins {
		t.Errorf("%d bins", len(all.Mean))
	}
}
