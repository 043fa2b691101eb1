package analysis

import (
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/internal/floatcmp"
)

// apartStudy has one primary contrast a crystal, m as given, with steps in nm.
func apartStudy(steps, su, m, se []float64, between bool) *Study {
	s := &Study{settings: (*Settings)(nil).filled(), compared: map[Contrast]*Compared{}}
	for i := range steps {
		s.Series.Crystals = append(s.Series.Crystals, Specimen{Name: string(rune('A' + i)), Positions: []Position{
			{Name: "thin", ThicknessNM: 100}, {Name: "thick", ThicknessNM: 100 + steps[i], ThicknessSU: su[i]}}})
	}
	for i := range steps {
		c := Contrast{Crystal: i, ThickCrystal: i, Thin: 0, Thick: 1, Primary: true}
		if between {
			c = Contrast{Crystal: i, ThickCrystal: (i + 1) % len(steps), Thin: 0, Thick: 1, Primary: i == 0}
		}
		s.list = append(s.list, c)
		r := ContrastResult{Crystal: s.Series.Crystals[i].Name, Thin: "thin", Thick: "thick"}
		r.Exchange.M, r.Exchange.SE = m[i], se[i]
		s.compared[c] = &Compared{Contrast: c, Result: r}
	}
	return s
}

// The line of separate crystals: with exact thicknesses it is weighted least squares, in
// closed form; with uncertain ones its slope is steeper and its error wider.
func TestSeparateCrystals(t *testing.T) {
	steps, su := []float64{60, 110, 180, 240}, []float64{0, 0, 0, 0}
	mu, muSE := []float64{0.02, 0.06, 0.07, 0.13}, []float64{0.01, 0.02, 0.01, 0.02}
	var m, se []float64
	for i := range mu {
		m = append(m, -math.Expm1(-mu[i]))
		se = append(se, muSE[i]*math.Exp(-mu[i]))
	}
	got := apartStudy(steps, su, m, se, false).separate()
	var s0, sx, sy, sxx, sxy float64
	for i := range mu {
		w, x := 1/(muSE[i]*muSE[i]), steps[i]/100
		s0, sx, sy, sxx, sxy = s0+w, sx+w*x, sy+w*mu[i], sxx+w*x*x, sxy+w*x*mu[i]
	}
	d := s0*sxx - sx*sx
	slope, intercept := (s0*sxy-sx*sy)/d, (sxx*sy-sx*sxy)/d
	floatcmp.CheckSlice(t, "mu", got.Mu, mu, 1e-12, 0)
	floatcmp.CheckSlice(t, "its error", got.MuSE, muSE, 1e-12, 0)
	floatcmp.Check(t, "slope", got.Slope.Value, slope, 0, 1e-9)
	floatcmp.Check(t, "intercept", got.Intercept.Value, intercept, 1e-9, 0)
	floatcmp.Check(t, "half width", got.Slope.Hi-slope, 1.959963985*math.Sqrt(s0/d), 0, 1e-6)
	floatcmp.Check(t, "half width of the intercept", got.Intercept.Hi-intercept, 1.959963985*math.Sqrt(sxx/d), 0, 1e-6)
	if got.DF != 2 || got.Why != "" || cmp.Diff(got.Crystals, []string{"A", "B", "C", "D"}) != "" {
		t.Errorf("%+v", got)
	}
	unsure := apartStudy(steps, []float64{20, 20, 20, 20}, m, se, false).separate()
	if !(unsure.Slope.Value > got.Slope.Value) || !(unsure.Slope.Hi-unsure.Slope.Lo > got.Slope.Hi-got.Slope.Lo) {
		t.Errorf("slope %+v with uncertain thicknesses, %+v without", unsure.Slope, got.Slope)
	}
	for _, c := range []struct {
		study *Study
		word  string
	}{
		{apartStudy(steps[:2], su[:2], m[:2], se[:2], false), "2 separate contrasts"},
		{apartStudy([]float64{100, 105, 95, 100}, []float64{15, 15, 15, 15}, m, se, false), "uncertainty"},
		{apartStudy([]float64{100, 100, 100, 100}, su, m, se, false), "differs by 0 nm"},
	} {
		if a := c.study.separate(); !strings.Contains(a.Why, c.word) || !math.IsNaN(a.Slope.Value) || !math.IsInf(a.Intercept.Hi, 1) {
			t.Errorf("%s: %+v", c.word, a)
		}
	}
	// Between crystals only: each contrast uses positions that no other has used.
	across := apartStudy(steps, su, m, se, true)
	if a := across.separate(); len(a.Mu) != 4 || a.Why != "" || !strings.Contains(a.Crystals[0], "A/thin") && a.Crystals[0] != "A" {
		t.Errorf("%+v", a)
	}
	for i := range across.list {
		c := across.list[i]
		x := across.compared[c]
		c.ThickCrystal = 3
		if i == 3 {
			c.ThickCrystal = 0
		}
		x.Contrast, across.list[i], across.compared[c] = c, c, x
	}
	if a := across.separate(); len(a.Mu) != 2 || !strings.Contains(a.Why, "2 separate contrasts") {
		t.Errorf("contrasts that share their thick position: %+v", a)
	}
}

// The nearest non-decreasing sequence: pooled neighbours by weight, never below the
// thinnest.
func TestRise(t *testing.T) {
	for _, c := range []struct{ mu, se, want []float64 }{
		{[]float64{0, 0.02, 0.05}, []float64{0, 0.01, 0.01}, []float64{0, 0.02, 0.05}},
		{[]float64{0, 0.06, 0.02}, []float64{0, 0.01, 0.02}, []float64{0, 0.052, 0.052}},
		{[]float64{0, -0.03, 0.01}, []float64{0, 0.01, 0.01}, []float64{0, 0, 0.01}},
		{[]float64{0}, []float64{0}, nil},
	} {
		l := &ThicknessLine{Mu: c.mu, MuSE: c.se}
		l.rise()
		floatcmp.CheckSlice(t, "rising", l.Rising, c.want, 1e-12, 0)
	}
}
