package analysis

import (
	"fmt"
	"math"

	"thinward/analysis/curve"
	"thinward/analysis/pool"
)

// AcrossLine is the growth from one crystal to another: a point a crystal, mu of its
// primary contrast against what its thick position has more than its thin one, and
// York's line through them. Crystals share nothing but the scale of all thicknesses, so
// errors are independent in both directions; a line through the origin, as within
// crystals, has Intercept 0. Where no crystal has two thicknesses, the points are the
// contrasts between crystals that share no position. Slope is per 100 nm.
type AcrossLine struct {
	Crystals  []string  `json:"crystals"`
	T         []float64 `json:"thickness_nm"`
	TSU       []float64 `json:"thickness_su_nm"`
	Mu        []float64 `json:"mu"`
	MuSE      []float64 `json:"mu_se"`
	Slope     Interval  `json:"slope_per_100nm"`
	Intercept Interval  `json:"intercept"`
	Chi2      float64   `json:"chi2"`
	DF        int       `json:"df"`
	Why       string    `json:"why,omitempty"`
}

// leastAcross is the number of crystals below which a line with an intercept fits
// whatever there is.
const leastAcross = 3

// separate draws the line of separate crystals.
func (s *Study) separate() *AcrossLine {
	a := &AcrossLine{Slope: none(), Intercept: none(), Chi2: math.NaN()}
	for _, x := range s.apart() {
		c := x.Contrast
		thin, thick := &s.Series.Crystals[c.Crystal].Positions[c.Thin], &s.Series.Crystals[c.ThickCrystal].Positions[c.Thick]
		e := x.Result.Exchange
		if math.IsNaN(e.M) || e.M >= 1 || !(e.SE > 0) {
			continue
		}
		a.Crystals = append(a.Crystals, label(&x.Result))
		a.T, a.TSU = append(a.T, thick.ThicknessNM-thin.ThicknessNM), append(a.TSU, math.Hypot(thick.ThicknessSU, thin.ThicknessSU))
		a.Mu, a.MuSE = append(a.Mu, -math.Log(1-e.M)), append(a.MuSE, e.SE/(1-e.M))
	}
	if len(a.T) < leastAcross {
		a.Why = fmt.Sprintf("%d separate contrasts have an m, and a line needs %d", len(a.T), leastAcross)
		return a
	}
	spread, su := scatterOf(a.T), 0.0
	for _, v := range a.TSU {
		su += v * v / float64(len(a.TSU))
	}
	if su = math.Sqrt(su); !(spread > su) || spread == 0 {
		a.Why = fmt.Sprintf("from crystal to crystal the step in thickness differs by %.3g nm, which its uncertainty of %.3g nm explains", spread, su)
		return a
	}
	x, xSU := make([]float64, len(a.T)), make([]float64, len(a.T))
	for i := range x {
		x[i], xSU[i] = a.T[i]/100, a.TSU[i]/100
	}
	l, err := pool.York(x, a.Mu, xSU, a.MuSE, s.settings.Level)
	if err != nil {
		a.Why = err.Error()
		return a
	}
	a.Slope = s.slope(l.Slope, l.SlopeSE)
	half := zOf(s.settings.Level) * l.InterceptSE
	a.Intercept = interval(l.Intercept, l.Intercept-half, l.Intercept+half, "")
	a.Chi2, a.DF = l.Chi2, l.DF
	return a
}

// apart gives contrasts that share no position: the primary one of every crystal, or
// where there is none those between crystals, the first that use a position.
func (s *Study) apart() []*Compared {
	if list := s.primaries(); len(list) > 0 {
		return list
	}
	used := map[[2]int]bool{}
	var out []*Compared
	for _, c := range s.list {
		a, b := [2]int{c.Crystal, c.Thin}, [2]int{c.ThickCrystal, c.Thick}
		if c.Across() && !used[a] && !used[b] {
			used[a], used[b] = true, true
			out = append(out, s.compared[c])
		}
	}
	return out
}

// scatterOf is the standard deviation of v, with n - 1.
func scatterOf(v []float64) float64 {
	mean, sum := 0.0, 0.0
	for _, x := range v {
		mean += x / float64(len(v))
	}
	for _, x := range v {
		sum += (x - mean) * (x - mean)
	}
	return math.Sqrt(sum / float64(len(v)-1))
}

// rise fills the non-decreasing sequence nearest to mu, weighted by 1/se^2; the thinnest
// position, 0 by definition, bounds it from below.
func (l *ThicknessLine) rise() {
	if len(l.Mu) < 2 {
		return
	}
	w := make([]float64, len(l.Mu)-1)
	for k := range w {
		w[k] = 1 / (l.MuSE[k+1] * l.MuSE[k+1])
	}
	steps, err := curve.Isotonic(l.Mu[1:], w)
	if err != nil {
		return
	}
	l.Rising = []float64{0}
	for _, v := range steps {
		l.Rising = append(l.Rising, math.Max(0, v))
	}
}
