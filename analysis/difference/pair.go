package difference

import (
	"cmp"
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// source keeps what the pairs were made of, for axes that need parts of it.
type source struct {
	thin, thick *intensity.Scaled
	catalogue   *intensity.Catalogue
	single      []single
	settings    Settings
}

// single is one matched pair of observations: of thin and of thick.
type single struct {
	unique      int32
	thin, thick int32
}

func (o *Settings) filled() Settings {
	var s Settings
	if o != nil {
		s = *o
	}
	if s.AngleToleranceDeg == 0 {
		s.AngleToleranceDeg = 1
	}
	if s.LeastMatched == 0 {
		s.LeastMatched = 0.5
	}
	if s.TailDF == 0 {
		s.TailDF = 4
	}
	return s
}

// Pair brings two positions together, reflection by reflection.
//
// Matched pairs are of observations with the same raw index and angles within
// the tolerance, one to one in the order of angle, averaged over equivalents
// with weights 1/(v1 + v2), so that both positions saw the same geometry; it
// needs real angles in both and one crystal. Merged pairs are of the
// inverse-variance means of each position. Forbidden reflections are left out
// of both and counted. Local means are taken over equal-count shells of the
// pairs; shells whose mean is not positive in both positions are left out with
// a warning. VarD is refitted as RefitVarD does.
//
// Errors: observations that Scaled.Check refuses, matching demanded and not
// possible, fewer than two pairs. thin and thick are kept, not copied.
func Pair(ctx context.Context, thin, thick *intensity.Scaled, cat *intensity.Catalogue, o *Settings) (*Pairs, error) {
	set := o.filled()
	if !(set.AngleToleranceDeg > 0) {
		return nil, fmt.Errorf("angle tolerance of %g degrees is not above zero", set.AngleToleranceDeg)
	}
	for _, x := range []struct {
		name string
		s    *intensity.Scaled
	}{{"thin", thin}, {"thick", thick}} {
		if err := x.s.Check(cat.Len()); err != nil {
			return nil, fmt.Errorf("%s position: %w", x.name, err)
		}
	}
	p := &Pairs{source: source{thin: thin, thick: thick, catalogue: cat, settings: set}}
	mt, mk := intensity.Merge(cat.Len(), thin), intensity.Merge(cat.Len(), thick)
	p.count(mt, mk)
	if err := p.choose(ctx); err != nil {
		return nil, err
	}
	if p.Matched {
		p.average(nil)
	} else {
		p.join(mt, mk)
	}
	p.angles()
	if err := p.localMeans(); err != nil {
		return nil, err
	}
	if err := ctx.Err(); err != nil {
		return nil, err
	}
	return p, p.RefitVarD(ctx, nil)
}

func (p *Pairs) count(mt, mk *intensity.Merged) {
	c, cat := &p.Counts, p.source.catalogue
	c.ThinObservations, c.ThickObservations = len(p.source.thin.I), len(p.source.thick.I)
	for u, absent := range cat.Absent {
		a, b := mt.N[u] > 0, mk.N[u] > 0
		switch {
		case absent && (a || b):
			c.Absent++
		case absent:
		default:
			if a {
				c.ThinUnique++
			}
			if b {
				c.ThickUnique++
			}
			if a && b {
				c.Common++
			}
		}
	}
}

// choose decides between matched and merged and finds the matched singles.
func (p *Pairs) choose(ctx context.Context) error {
	s := &p.source
	if s.settings.Matching == MatchNever {
		return nil
	}
	why := ""
	switch {
	case !s.settings.SameCrystal:
		why = "the positions lie on different crystals"
	case s.thin.Phi == nil || s.thick.Phi == nil:
		why = "one of the positions has no angles"
	}
	if why == "" {
		inThin, inThick := p.match()
		if err := ctx.Err(); err != nil {
			return err
		}
		n := countUnique(s.single)
		if n > 0 && (s.settings.Matching == MatchAlways || float64(n) >= s.settings.LeastMatched*float64(p.Counts.Common)) {
			p.Matched = true
			p.Counts.MatchedObservations = len(s.single)
			p.warnAlone(inThin, inThick)
			return nil
		}
		why = fmt.Sprintf("only %d of %d common reflections have observations at the same angle within %.3g degrees", n, p.Counts.Common, s.settings.AngleToleranceDeg)
		s.single, p.Counts.OutsideRange = nil, 0
	}
	if s.settings.Matching == MatchAlways {
		return fmt.Errorf("observations cannot be matched: %s", why)
	}
	p.Warnings = append(p.Warnings, intensity.Warning{Code: "merged", Text: "each position was merged before pairing, because " + why +
		"; the difference then holds what differs in geometry too"})
	return nil
}

func countUnique(s []single) int {
	n := 0
	for i := range s {
		if i == 0 || s[i].unique != s[i-1].unique {
			n++
		}
	}
	return n
}

// leastPartnered is the share of the observations of either position within the
// common range of angles that should find a partner.
const leastPartnered = 0.8

// warnAlone says how many observations matching one to one leaves out.
func (p *Pairs) warnAlone(inThin, inThick int) {
	n := len(p.source.single)
	for _, side := range []struct {
		name string
		in   int
	}{{"thin", inThin}, {"thick", inThick}} {
		if float64(n) < leastPartnered*float64(side.in) {
			p.Warnings = append(p.Warnings, intensity.Warning{Code: "unpartnered", Text: fmt.Sprintf(
				"%d of %d observations of the %s position within the common range of angles have no partner at the same angle and are left out of the difference (of repeats of one index only as many are used as the other position has)",
				side.in-n, side.in, side.name)})
		}
	}
}

// match pairs observations one to one, in the order of unique, raw and angle. It
// returns how many of either position could have been paired by their angle.
func (p *Pairs) match() (inThin, inThick int) {
	s := &p.source
	lo, hi := commonRange(s.thin.Phi, s.thick.Phi, s.settings.AngleToleranceDeg)
	a, outA := p.sorted(s.thin, lo, hi)
	b, outB := p.sorted(s.thick, lo, hi)
	p.Counts.OutsideRange = outA + outB
	for i, j := 0, 0; i < len(a) && j < len(b); {
		x, y := a[i], b[j]
		c := cmp.Or(cmp.Compare(s.thin.Unique[x], s.thick.Unique[y]), cmp.Compare(s.thin.Raw[x], s.thick.Raw[y]))
		gap := s.thin.Phi[x] - s.thick.Phi[y]
		switch {
		case c < 0 || (c == 0 && gap < -s.settings.AngleToleranceDeg):
			i++
		case c > 0 || gap > s.settings.AngleToleranceDeg:
			j++
		default:
			s.single = append(s.single, single{s.thin.Unique[x], x, y})
			i++
			j++
		}
	}
	return len(a), len(b)
}

func commonRange(a, b []float64, tolerance float64) (lo, hi float64) {
	if len(a) == 0 || len(b) == 0 {
		return math.Inf(1), math.Inf(-1)
	}
	return max(slices.Min(a), slices.Min(b)) - tolerance, min(slices.Max(a), slices.Max(b)) + tolerance
}

// sorted returns the usable observations of allowed reflections between the
// angles lo and hi, and how many lie outside.
func (p *Pairs) sorted(s *intensity.Scaled, lo, hi float64) (order []int32, outside int) {
	for o, u := range s.Unique {
		switch {
		case p.source.catalogue.Absent[u] || math.IsInf(s.Var[o], 1):
		case s.Phi[o] < lo || s.Phi[o] > hi:
			outside++
		default:
			order = append(order, int32(o))
		}
	}
	slices.SortFunc(order, func(a, b int32) int {
		return cmp.Or(cmp.Compare(s.Unique[a], s.Unique[b]), cmp.Compare(s.Raw[a], s.Raw[b]), cmp.Compare(s.Phi[a], s.Phi[b]), cmp.Compare(a, b))
	})
	return order, outside
}

// average fills the pairs from the matched singles for whose place keep is true
// (nil keeps all).
func (p *Pairs) average(keep func(int) bool) {
	s := &p.source
	list := s.single
	for i := 0; i < len(list); {
		var w, thin, thick, vt, vk float64
		n := int32(0)
		u := list[i].unique
		for ; i < len(list) && list[i].unique == u; i++ {
			if keep != nil && !keep(i) {
				continue
			}
			v1, v2 := s.thin.Var[list[i].thin], s.thick.Var[list[i].thick]
			x := 1 / (v1 + v2)
			w += x
			thin += x * s.thin.I[list[i].thin]
			thick += x * s.thick.I[list[i].thick]
			vt += x * x * v1
			vk += x * x * v2
			n++
		}
		if n > 0 {
			p.add(u, thin/w, thick/w, vt/(w*w), vk/(w*w), n, n)
		}
	}
}

func (p *Pairs) join(mt, mk *intensity.Merged) {
	for u, absent := range p.source.catalogue.Absent {
		if !absent && mt.N[u] > 0 && mk.N[u] > 0 {
			p.add(int32(u), mt.J[u], mk.J[u], mt.Var[u], mk.Var[u], mt.N[u], mk.N[u])
		}
	}
}

func (p *Pairs) add(u int32, thin, thick, vt, vk float64, nt, nk int32) {
	cat := p.source.catalogue
	p.Unique = append(p.Unique, u)
	p.S2 = append(p.S2, cat.S2[u])
	p.Epsilon = append(p.Epsilon, float64(cat.Epsilon[u]))
	p.Centric = append(p.Centric, cat.Centric[u])
	p.Thin, p.Thick = append(p.Thin, thin), append(p.Thick, thick)
	p.VarThin, p.VarThick = append(p.VarThin, vt), append(p.VarThick, vk)
	p.NThin, p.NThick = append(p.NThin, nt), append(p.NThick, nk)
}

// angles fills Phi from the observations that the pairs are made of.
func (p *Pairs) angles() {
	s := &p.source
	p.Phi = make([]float64, p.Len())
	place := make([]int32, s.catalogue.Len())
	for i, u := range p.Unique {
		place[u] = int32(i) + 1
		p.Phi[i] = math.NaN()
	}
	if s.thin.Phi == nil {
		return
	}
	sum, count := make([]float64, p.Len()), make([]float64, p.Len())
	put := func(o int32) {
		if i := place[s.thin.Unique[o]] - 1; i >= 0 && !math.IsInf(s.thin.Var[o], 1) {
			sum[i] += s.thin.Phi[o]
			count[i]++
		}
	}
	if p.Matched {
		for _, x := range s.single {
			put(x.thin)
		}
	} else {
		for o := range s.thin.I {
			put(int32(o))
		}
	}
	for i := range sum {
		p.Phi[i] = sum[i] / count[i]
	}
}
