package difference

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/intensity"
)

// source keeps what the pairs were made of, for axes that need parts of it.
type source struct {
	thin, thick *intensity.Scaled
	catalogue   *intensity.Catalogue
	single      []single
	settings    Settings
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
// needs real angles in both and one crystal. Repeats of one index within one
// tolerance of angle are averaged first, with weights 1/v. Only the angles that
// both positions cover count. Where the angles as given do not coincide, those of
// thick are turned by Align, if it is clear, and a warning names the turn. Angles that
// coincide hardly more often than unrelated ones would are not matched.
// Merged pairs are of the inverse-variance means of each position. Forbidden
// reflections are left out of both and counted. Local means are taken over equal-count
// shells of the pairs; shells whose mean is not positive in both positions are left
// out with a warning. VarD is refitted as RefitVarD does.
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
	p.settle()
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
	default:
		if why = p.match(Turn{}); why != "" {
			why = p.matchTurned(why)
		}
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	if why == "" {
		p.Matched = true
		return nil
	}
	s.single, p.Counts.MatchedObservations = nil, 0
	if s.settings.Matching == MatchAlways {
		return fmt.Errorf("observations cannot be matched: %s", why)
	}
	p.Warnings = append(p.Warnings, intensity.Warning{Code: "merged", Text: "each position was merged before pairing, because " + why +
		"; the difference then holds what differs in geometry too"})
	return nil
}

// matchTurned matches after the angles of thick were turned; why says what was wrong
// without, and what it returns what is wrong still, empty for nothing.
func (p *Pairs) matchTurned(why string) string {
	s := &p.source
	a := Align(Angled{s.thin.Raw, s.thin.Phi}, Angled{s.thick.Raw, s.thick.Phi}, s.settings.AngleToleranceDeg)
	if !a.Clear {
		return why + ", and " + a.Why
	}
	if still := p.match(a.Turn); still != "" {
		return why + "; with " + a.Turn.String() + " for the thick position, " + still
	}
	p.Warnings = append(p.Warnings, intensity.Warning{Code: "angles-aligned", Text: a.describe("thick")})
	return ""
}

// describe says what a turn of the position called name does.
func (a *Alignment) describe(name string) string {
	how := "count from another zero, or the lattice lies turned about the axis"
	if a.Turn.Reversed {
		how = "run the other way"
	}
	return fmt.Sprintf("the rotation angles of the %s position %s: %s brings %d of %d observations of one index to the same angle, where chance would %.0f; they were matched after that", name, how, a.Turn, a.Within, a.Common, a.Chance)
}

// average fills the pairs from the matched singles for whose place keep is true
// (nil keeps all).
func (p *Pairs) average(keep func(int) bool) {
	s := &p.source
	list := s.single
	for i := 0; i < len(list); {
		var w, thin, thick, vt, vk float64
		var nt, nk int32
		u := list[i].thin.unique
		for ; i < len(list) && list[i].thin.unique == u; i++ {
			if keep != nil && !keep(i) {
				continue
			}
			a, b := &list[i].thin, &list[i].thick
			x := 1 / (a.v + b.v)
			w += x
			thin += x * a.i
			thick += x * b.i
			vt += x * x * a.v
			vk += x * x * b.v
			nt += a.rows
			nk += b.rows
		}
		if nt > 0 {
			p.add(u, thin/w, thick/w, vt/(w*w), vk/(w*w), nt, nk)
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
	put := func(u int32, phi, rows float64) {
		if i := place[u] - 1; i >= 0 {
			sum[i] += rows * phi
			count[i] += rows
		}
	}
	if p.Matched {
		for _, x := range s.single {
			put(x.thin.unique, x.thin.phi, float64(x.thin.rows))
		}
	} else {
		for o, u := range s.thin.Unique {
			if !math.IsInf(s.thin.Var[o], 1) {
				put(u, s.thin.Phi[o], 1)
			}
		}
	}
	for i := range sum {
		p.Phi[i] = sum[i] / count[i]
	}
}

// settle counts where the observations of either position went. Merged positions have
// no range and no partners: what is alone lies in reflections that the other lacks.
func (p *Pairs) settle() {
	s := &p.source
	for _, x := range []struct {
		s    *intensity.Scaled
		n    []int32
		side *SideCounts
	}{{s.thin, p.NThin, &p.Counts.Thin}, {s.thick, p.NThick, &p.Counts.Thick}} {
		if !p.Matched {
			*x.side = SideCounts{}
			for o, u := range x.s.Unique {
				switch {
				case s.catalogue.Absent[u]:
					x.side.Absent++
				case math.IsInf(x.s.Var[o], 1):
					x.side.WithoutWeight++
				default:
					x.side.Alone++
				}
			}
		}
		for _, n := range x.n {
			x.side.Used += int(n)
		}
		x.side.Alone -= x.side.Used
	}
	if p.Matched {
		p.warnAlone()
	}
}
