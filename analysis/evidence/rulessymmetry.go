package evidence

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"gonum.org/v1/gonum/stat/distuv"
)

// SymmetryClass is what was measured of the reflections that one symmetry element
// forbids, or would forbid if the group had it.
type SymmetryClass struct {
	Name string // the element: "2_1 along c"
	// Forbidden says that the group has the element.
	Forbidden bool
	// Centring says that the element is one: what it forbids has no lattice point that
	// scattering more than once could fill.
	Centring  bool
	Positions []ClassMean
	// Within are the numbers of classes in the list that hold all of this one and more: an
	// empty zone empties the axis in it, and only the zone is then named.
	Within []int
}

// ClassMean is a class in one position: how many acentric and centric reflections
// it has there, and the mean of J/epsilon over the local mean, 1 for allowed
// reflections, with the standard uncertainty that its measurement leaves.
type ClassMean struct {
	Acentric, Centric int
	Ratio, SU         float64
}

const (
	// symmetryErr is the chance that a group without fault is doubted, shared among
	// the classes asked.
	symmetryErr = 0.01
	// noiseReach is the number of standard uncertainties by which a class may be read
	// too low or too high.
	noiseReach = 3
	// filledAlways is the share of allowed intensity that scattering more than once can
	// give to forbidden reflections in the thinnest position. In Poisson's law of
	// elastic events with mean x = t/Lambda their share among scattered electrons is
	// 1 - x/(exp(x)-1), which is one half at x = 1.26, more than a mean free path and
	// a quarter; beyond that forbidden reflections tell nothing of the group.
	filledAlways = 0.5
	// emptyBelow is the most that a class may be, where it is weakest, to be called empty:
	// that share at half a mean free path.
	emptyBelow = 0.23
)

// SymmetryOf asks whether the reflections that the group forbids are weaker than
// allowed ones can be, and whether a class that it allows is weaker than allowed ones
// can be. Wilson's law (Wilson 1949, Acta Cryst. 2:318) makes J/(epsilon <J>)
// exponential for acentric and chi-squared with one degree of freedom for centric
// reflections, so that the sum over n of a class is gamma distributed with shape n
// or n/2, the chance to find a mean below x is known, and so are limits of the mean
// that the class stands for.
//
// The class is read in the position where it is weakest, as filling by scattering
// more than once grows with thickness, three standard uncertainties upward. An allowed class
// below 0.23 of what allowed ones are, and so with a chance under 0.01 over the number of
// classes: caution, and the element that forbids it is named. A forbidden class that is above zero by three
// standard uncertainties in every position and no weaker than allowed ones can be at the same
// chance: caution, and fails when the least it can stand for is above one half.
func SymmetryOf(classes []SymmetryClass) Finding {
	asked, of := map[bool]int{}, 0
	for _, c := range classes {
		if len(c.Positions) > 0 {
			asked[c.Forbidden]++
		}
		if c.Forbidden {
			of++
		}
	}
	if asked[true]+asked[false] == 0 {
		return unknown("no reflection tells the symmetry elements of the group")
	}
	f := Finding{Value: float64(asked[true] + asked[false]), Unit: "classes of reflections looked at", Verdict: Fine}
	found := make([]judgement, len(classes))
	for k := range classes {
		if c := &classes[k]; len(c.Positions) > 0 {
			found[k] = c.judge(symmetryErr / float64(asked[c.Forbidden]))
		}
	}
	var parts []string
	for k, j := range found {
		covered := slices.ContainsFunc(classes[k].Within, func(o int) bool { return found[o].verdict > Fine })
		if j.verdict <= Fine || covered {
			continue
		}
		if j.verdict > f.Verdict {
			f.Verdict, f.Value, f.Unit = j.verdict, j.ratio, "of the allowed where that class is weakest"
		}
		parts = append(parts, j.why)
	}
	if len(parts) > 0 {
		f.Why = strings.Join(parts, "; ")
		return f
	}
	f.Why = fmt.Sprintf("no class that the group allows is empty (%d looked at)", asked[false])
	f.Why += forbiddenFine(asked[true], of)
	return f
}

// forbiddenFine says that what n of the group's elements forbid is no reason for doubt, those
// whose reflections were measured.
func forbiddenFine(n, of int) string {
	const weak = "weaker than allowed reflections can be, or too weak or too few to tell"
	switch {
	case n == 0:
		return ""
	case of == 1:
		return ", and what its one symmetry element forbids is " + weak
	case n == of:
		return fmt.Sprintf(", and what its %d symmetry elements forbid is %s", n, weak)
	case n == 1:
		return fmt.Sprintf(", and what one of its %d symmetry elements forbids is %s; of the others nothing was measured", of, weak)
	}
	return fmt.Sprintf(", and what %d of its %d symmetry elements forbid is %s; of the others nothing was measured", n, of, weak)
}

type judgement struct {
	verdict Verdict
	why     string
	ratio   float64
}

func (c *SymmetryClass) judge(chance float64) judgement {
	weakest, least, lowest, n := 1.0, math.Inf(1), math.Inf(1), 0
	out := judgement{verdict: Fine, ratio: math.Inf(1)}
	filled := true
	for _, p := range c.Positions {
		high, low := math.Max(0, p.Ratio+noiseReach*p.SU), p.Ratio-noiseReach*p.SU
		weakest, lowest = math.Min(weakest, p.below(high)), math.Min(lowest, high)
		if filled = filled && low > 0; filled {
			least = math.Min(least, p.leastMean(low, chance))
		}
		if p.Ratio < out.ratio {
			out.ratio, n = p.Ratio, p.Acentric+p.Centric
		}
	}
	empty := weakest < chance
	switch {
	case empty && !c.Forbidden && lowest < emptyBelow:
		out.verdict = Caution
		out.why = fmt.Sprintf("%s that the group allows and %s would forbid: all but empty, %s of what allowed ones are in the position where they are weakest (a chance of %.1g by Wilson's law), so that the group may lack that element", reflections(n), c.Name, num(out.ratio), weakest)
	case empty || !c.Forbidden || !filled:
	case least > filledAlways:
		out.verdict = Fails
		out.why = fmt.Sprintf("%s that %s forbids: as strong as allowed ones at every thickness, %s of them where weakest, so that the space group is wrong; what it forbids is left out of the analysis", reflections(n), c.Name, num(out.ratio))
	case c.Centring:
		out.verdict = Caution
		out.why = fmt.Sprintf("%s that %s forbids: %s of what allowed ones are in the position where they are weakest, and so few allowed ones can be that weak by chance: the lattice is another, or background or neighbours stand there at every thickness; scattering cannot, as no lattice point is there", reflections(n), c.Name, num(out.ratio))
	default:
		out.verdict = Caution
		out.why = fmt.Sprintf("%s that %s forbids: %s of what allowed ones are in the position where they are weakest, and so few allowed ones can be that weak by chance: the group is wrong there, or scattering more than once fills them at every thickness", reflections(n), c.Name, num(out.ratio))
	}
	return out
}

func reflections(n int) string {
	if n == 1 {
		return "1 reflection"
	}
	return fmt.Sprintf("%d reflections", n)
}

// below is an upper bound on the chance that allowed reflections have a mean of x or
// less; exact when all are centric or all acentric. The sum of both kinds is not
// less than either, nor than a gamma variable of shape Acentric + Centric/2.
func (p ClassMean) below(x float64) float64 {
	n := float64(p.Acentric + p.Centric)
	sum := n * x
	gamma := func(shape, s float64) float64 {
		if shape == 0 {
			return 1
		}
		return distuv.ChiSquared{K: 2 * shape}.CDF(2 * s)
	}
	a, c := float64(p.Acentric), float64(p.Centric)
	return math.Min(gamma(a+c/2, sum), math.Min(gamma(a, sum), gamma(c/2, sum/2)))
}

// leastMean is the lower confidence limit of the mean that a class of mean x stands
// for: that of which x or more has the given chance. Exact as below; a sum of both
// kinds is not more than twice a gamma variable of shape Acentric + Centric/2.
func (p ClassMean) leastMean(x, chance float64) float64 {
	n := float64(p.Acentric + p.Centric)
	scale, shape := 2.0, float64(p.Acentric)+float64(p.Centric)/2
	if p.Centric == 0 {
		scale = 1
	}
	highest := distuv.ChiSquared{K: 2 * shape}.Quantile(1-chance) / 2 * scale / n
	return x / highest
}
