package analysis

import (
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// standing is one position merged as it came, with the strength of each of its
// allowed reflections: I/epsilon over the local shell mean, NaN where not measured.
type standing struct {
	crystal, position int
	merged            *intensity.Merged
	shells            *intensity.Shells
	strength          []float64
	n                 int // allowed reflections measured
}

func (s *Study) standings() []*standing {
	var out []*standing
	for i := range s.intake.Positions {
		for j := range s.intake.Positions[i] {
			out = append(out, s.standing(i, j))
		}
	}
	return out
}

func (s *Study) standing(i, j int) *standing {
	cat := s.intake.Catalogue
	m := intensity.Merge(cat.Len(), s.raw(i, j))
	sh := cat.Shells(s.shellCount([]*intensity.Merged{m}), m)
	means, _ := cat.Means(m, sh)
	out := &standing{crystal: i, position: j, merged: m, shells: sh, strength: make([]float64, cat.Len())}
	for u := range out.strength {
		out.strength[u] = math.NaN()
		if m.N[u] == 0 || cat.Absent[u] {
			continue
		}
		out.n++
		if shell := sh.Of[u]; shell >= 0 && means[shell] > 0 {
			out.strength[u] = m.J[u] / float64(cat.Epsilon[u]) / means[shell]
		}
	}
	return out
}

// raw gives a position as it came, on its own scale, with the reported variances.
func (s *Study) raw(i, j int) *intensity.Scaled {
	a := &s.intake.Positions[i][j]
	out := &intensity.Scaled{Unique: a.Unique, Raw: a.Raw, I: a.Observations.I, Var: make([]float64, len(a.Unique)), Phi: a.Observations.Phi}
	for r, sigma := range a.Observations.Sigma {
		out.Var[r] = sigma * sigma
	}
	return out
}

func (x *standing) has(u int) bool { return x.merged.N[u] > 0 }

// commonResults compares every two positions of the series, in their order.
func (s *Study) commonResults(list []*standing) []CommonResult {
	var out []CommonResult
	for a := range list {
		for b := a + 1; b < len(list); b++ {
			out = append(out, s.commonResult(list[a], list[b]))
		}
	}
	return out
}

func (s *Study) commonResult(a, b *standing) CommonResult {
	cat := s.intake.Catalogue
	var dCommon, dAll, ours, theirs []float64
	n := 0
	for u := range cat.HKL {
		if cat.Absent[u] || !a.has(u) && !b.has(u) {
			continue
		}
		d := 1 / (2 * math.Sqrt(cat.S2[u]))
		dAll = append(dAll, d)
		if !a.has(u) || !b.has(u) {
			continue
		}
		n++
		dCommon = append(dCommon, d)
		for _, side := range []struct {
			from *standing
			to   *[]float64
		}{{a, &ours}, {b, &theirs}} {
			if v := side.from.strength[u]; !math.IsNaN(v) {
				*side.to = append(*side.to, v)
			}
		}
	}
	out := CommonResult{
		Crystal: s.Series.Crystals[a.crystal].Name, Position: s.Series.Crystals[a.crystal].Positions[a.position].Name,
		WithCrystal: s.Series.Crystals[b.crystal].Name, WithPosition: s.Series.Crystals[b.crystal].Positions[b.position].Name,
		Common: n, Share: float64(n) / float64(a.n), WithShare: float64(n) / float64(b.n), DCommon: middleOf(dCommon), DAll: middleOf(dAll),
	}
	out.Strength, out.StrengthSE = sampleMean(ours, out.Share)
	out.With, out.WithSE = sampleMean(theirs, out.WithShare)
	out.Why = unlike(&out)
	return out
}

// sampleMean is the mean of v, a share of all that there are, with its standard
// error as a sample without replacement (Cochran 1977, 2.6); NaN without two
// values.
func sampleMean(v []float64, share float64) (m, se float64) {
	if len(v) < 2 {
		return math.NaN(), math.NaN()
	}
	return mean(v), math.Sqrt(squareOfMean(v) * math.Max(1-share, 0))
}

// fewestCommon is the number of common reflections below which two positions can hardly
// be compared, and leastShare the share below which the common ones may not stand for
// the rest; chosen, no source.
const (
	fewestCommon = 50
	leastShare   = 0.7
)

// unlike says what makes the common reflections unlike the rest, empty for nothing:
// they are few, or stronger or weaker by more than 0.1 and three standard errors.
func unlike(c *CommonResult) string {
	switch {
	case c.Common == 0:
		return "no reflection is measured in both"
	case c.Common < fewestCommon:
		return fmt.Sprintf("only %d reflections are measured in both", c.Common)
	}
	for _, side := range []struct {
		name         string
		strength, se float64
	}{{c.Crystal + "/" + c.Position, c.Strength, c.StrengthSE}, {c.WithCrystal + "/" + c.WithPosition, c.With, c.WithSE}} {
		if off := math.Abs(side.strength - 1); off > 0.1 && off > 3*side.se {
			what := "stronger"
			if side.strength < 1 {
				what = "weaker"
			}
			return fmt.Sprintf("the common reflections are %s than all of %s (%.2f +- %.2f of their local mean): they do not stand for the rest", what, side.name, side.strength, side.se)
		}
	}
	if min(c.Share, c.WithShare) < leastShare {
		return fmt.Sprintf("less than %.0f %% of the reflections of one are common to both: they may not stand for the rest", 100*leastShare)
	}
	return ""
}

// warnOfCommon says once what is the same of several pairs of positions of one crystal.
func (s *Study) warnOfCommon() {
	var texts []string
	where := map[string]string{}
	for _, c := range s.sharing {
		if c.Why == "" || c.Crystal != c.WithCrystal {
			continue
		}
		if where[c.Why] == "" {
			texts = append(texts, c.Why)
		} else {
			where[c.Why] += ", "
		}
		where[c.Why] += c.Crystal + "/" + c.Position + " and " + c.WithCrystal + "/" + c.WithPosition
	}
	for _, text := range texts {
		s.warn("common", where[text], "%s", text)
	}
}

// inOthers is the share of the reflections of x that another crystal has too; NaN with
// one crystal.
func (s *Study) inOthers(x *standing, list []*standing) float64 {
	if len(s.Series.Crystals) < 2 {
		return math.NaN()
	}
	n := 0
	for u, absent := range s.intake.Catalogue.Absent {
		if absent || !x.has(u) {
			continue
		}
		if slices.ContainsFunc(list, func(o *standing) bool { return o.crystal != x.crystal && o.has(u) }) {
			n++
		}
	}
	return float64(n) / float64(x.n)
}

// within counts the allowed reflections of x that reach no farther than s2.
func (s *Study) within(x *standing, s2 float64) int {
	n := 0
	for u, v := range s.intake.Catalogue.S2 {
		if !s.intake.Catalogue.Absent[u] && x.has(u) && v <= s2*(1+1e-9) {
			n++
		}
	}
	return n
}

// reach is the largest s^2 of an allowed reflection of x.
func (s *Study) reach(x *standing) float64 {
	most := 0.0
	for u, v := range s.intake.Catalogue.S2 {
		if !s.intake.Catalogue.Absent[u] && x.has(u) {
			most = math.Max(most, v)
		}
	}
	return most
}
