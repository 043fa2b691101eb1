package difference

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// look is what one position saw of one raw index at one angle: an observation, or
// the mean of its repeats there. rows counts them.
type look struct {
	unique, raw, rows int32
	i, v, phi         float64
}

// single is a look of thin and a look of thick of one raw index at one angle.
type single struct{ thin, thick look }

const (
	// leastAgreement is the least share beyond chance of the looks that find a partner at
	// their angle, (found - chance)/(1 - chance) (Cohen 1960, Educ. Psychol. Meas. 20:37).
	leastAgreement = 0.25
	// mostChance is the share found by unrelated angles above which angles say nothing.
	mostChance = 0.5
	// leastOfAll is the share of all common reflections that matching must keep,
	// however small the common range of angles.
	leastOfAll = 0.1
)

// match finds the singles after thick's angles were turned, and says why they
// cannot be used; an empty text means they can. Counts are filled either way.
func (p *Pairs) match(t Turn) (why string) {
	s := &p.source
	s.single = nil
	turned := s.thick.Phi
	if !t.Identity() {
		turned = make([]float64, len(s.thick.Phi))
		for o, phi := range s.thick.Phi {
			turned[o] = t.Of(phi)
		}
	}
	lo, hi := commonRange(s.thin.Phi, turned, s.settings.AngleToleranceDeg)
	a := p.looks(s.thin, s.thin.Phi, lo, hi, &p.Counts.Thin)
	b := p.looks(s.thick, turned, lo, hi, &p.Counts.Thick)
	possible, chance := p.possible(a, b)
	s.single = oneToOne(a, b, s.settings.AngleToleranceDeg)
	p.Counts.MatchedObservations = len(s.single)
	common, matched := commonUnique(a, b), countUnique(s.single)
	needed := max(s.settings.LeastMatched*float64(common), leastOfAll*float64(p.Counts.Common))
	beyond := (float64(len(s.single)) - chance) / (possible - chance)
	switch {
	case len(s.single) > 0 && chance > mostChance*possible:
		return fmt.Sprintf("the angles tell too little: unrelated ones would bring %.0f of %.0f observations of one index to the same angle within %.3g degrees", chance, possible, s.settings.AngleToleranceDeg)
	case matched == 0 || s.settings.Matching != MatchAlways && float64(matched) < needed:
		return fmt.Sprintf("only %d of %d common reflections have observations at the same angle within %.3g degrees", matched, p.Counts.Common, s.settings.AngleToleranceDeg)
	case beyond < leastAgreement:
		return fmt.Sprintf("%d of %.0f observations of one index lie at the same angle within %.3g degrees, and unrelated angles would bring %.0f there by chance", len(s.single), possible, s.settings.AngleToleranceDeg, chance)
	}
	return ""
}

// looks gives the usable looks of allowed reflections between the angles lo and hi,
// in the order of unique, raw and angle, and counts what is not among them. A look
// reaches over one tolerance; its members are weighted by 1/v.
func (p *Pairs) looks(s *intensity.Scaled, phi []float64, lo, hi float64, side *SideCounts) []look {
	*side = SideCounts{}
	order := make([]int32, 0, len(s.Unique))
	for o, u := range s.Unique {
		switch {
		case p.source.catalogue.Absent[u]:
			side.Absent++
		case math.IsInf(s.Var[o], 1):
			side.WithoutWeight++
		case phi[o] < lo || phi[o] > hi:
			side.OutsideRange++
		default:
			order = append(order, int32(o))
		}
	}
	slices.SortFunc(order, func(a, b int32) int {
		return cmp.Or(cmp.Compare(s.Unique[a], s.Unique[b]), cmp.Compare(s.Raw[a], s.Raw[b]), cmp.Compare(phi[a], phi[b]), cmp.Compare(a, b))
	})
	out := make([]look, 0, len(order))
	for i := 0; i < len(order); {
		first := order[i]
		l := look{unique: s.Unique[first], raw: s.Raw[first]}
		var w float64
		for ; i < len(order); i++ {
			o := order[i]
			if s.Unique[o] != l.unique || s.Raw[o] != l.raw || phi[o] > phi[first]+p.source.settings.AngleToleranceDeg {
				break
			}
			x := 1 / s.Var[o]
			w += x
			l.i += x * s.I[o]
			l.phi += phi[o]
			l.rows++
		}
		l.i, l.v, l.phi = l.i/w, 1/w, l.phi/float64(l.rows)
		if l.rows == 1 {
			l.i, l.v = s.I[first], s.Var[first]
		}
		out = append(out, l)
	}
	side.Alone = len(order)
	return out
}

// oneToOne pairs looks of one index within the tolerance, in the order of angle.
func oneToOne(a, b []look, tolerance float64) []single {
	var out []single
	for i, j := 0, 0; i < len(a) && j < len(b); {
		c := cmp.Or(cmp.Compare(a[i].unique, b[j].unique), cmp.Compare(a[i].raw, b[j].raw))
		gap := a[i].phi - b[j].phi
		switch {
		case c < 0 || (c == 0 && gap < -tolerance):
			i++
		case c > 0 || gap > tolerance:
			j++
		default:
			out = append(out, single{a[i], b[j]})
			i++
			j++
		}
	}
	return out
}

// possible is how many singles the common indices could make at most, and chance how
// many they would make if angles had nothing to do with indices.
func (p *Pairs) possible(a, b []look) (possible, chance float64) {
	x, y := make([]float64, len(a)), make([]float64, len(b))
	for i := range a {
		x[i] = a[i].phi
	}
	for i := range b {
		y[i] = b[i].phi
	}
	each := chanceOf(x, y, p.source.settings.AngleToleranceDeg)
	for i, j := 0, 0; i < len(a) && j < len(b); {
		m, n := runOf(a, i), runOf(b, j)
		c := cmp.Or(cmp.Compare(a[i].unique, b[j].unique), cmp.Compare(a[i].raw, b[j].raw))
		if c == 0 {
			few := float64(min(m, n))
			possible += few
			chance += few * min(1, each*float64(max(m, n)))
		}
		if c <= 0 {
			i += m
		}
		if c >= 0 {
			j += n
		}
	}
	return possible, chance
}

// runOf counts the looks from i on that share its index.
func runOf(l []look, i int) int {
	n := 1
	for i+n < len(l) && l[i+n].unique == l[i].unique && l[i+n].raw == l[i].raw {
		n++
	}
	return n
}

// commonUnique counts the reflections that both lists hold.
func commonUnique(a, b []look) int {
	n := 0
	for i, j := 0, 0; i < len(a) && j < len(b); {
		switch x, y := a[i].unique, b[j].unique; {
		case x < y:
			i++
		case x > y:
			j++
		default:
			n++
			for i < len(a) && a[i].unique == x {
				i++
			}
		}
	}
	return n
}

func countUnique(s []single) int {
	n := 0
	for i := range s {
		if i == 0 || s[i].thin.unique != s[i-1].thin.unique {
			n++
		}
	}
	return n
}

func commonRange(a, b []float64, tolerance float64) (lo, hi float64) {
	if len(a) == 0 || len(b) == 0 {
		return math.Inf(1), math.Inf(-1)
	}
	return max(slices.Min(a), slices.Min(b)) - tolerance, min(slices.Max(a), slices.Max(b)) + tolerance
}

// leastPartnered is the share of the observations of either position within the
// common range of angles that should find a partner, and leastInRange the share of
// all that should lie in that range.
const (
	leastPartnered = 0.8
	leastInRange   = 0.9
)

// warnAlone says how many observations matching leaves out.
func (p *Pairs) warnAlone() {
	for _, side := range []struct {
		name string
		SideCounts
	}{{"thin", p.Counts.Thin}, {"thick", p.Counts.Thick}} {
		in := side.Used + side.Alone
		if all := in + side.OutsideRange; float64(in) < leastInRange*float64(all) {
			p.Warnings = append(p.Warnings, intensity.Warning{Code: "outside-range", Text: fmt.Sprintf(
				"%d of %d observations of the %s position lie outside the range of angles that both positions cover and are left out of the difference", side.OutsideRange, all, side.name)})
		}
		if float64(side.Used) < leastPartnered*float64(in) {
			p.Warnings = append(p.Warnings, intensity.Warning{Code: "unpartnered", Text: fmt.Sprintf(
				"%d of %d observations of the %s position within the common range of angles have no partner at the same angle and are left out of the difference",
				side.Alone, in, side.name)})
		}
	}
}
