package analysis

import (
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/evidence"
)

// centring is one kind of lattice with the reflections that it allows (Hahn 2005,
// International Tables A, table 2.2.13.1).
type centring struct {
	name, condition string
	hexagonal       bool // asked for on hexagonal axes only
	allows          func(h, k, l int) bool
}

// centrings stand with the one that forbids most first, so that F comes before
// the three that it holds.
var centrings = []centring{
	{"F", "h, k, l all even or all odd", false, func(h, k, l int) bool { return (h+k)%2 == 0 && (k+l)%2 == 0 }},
	{"R", "-h+k+l = 3n", true, func(h, k, l int) bool { return (-h+k+l)%3 == 0 }},
	{"R reverse", "h-k+l = 3n", true, func(h, k, l int) bool { return (h-k+l)%3 == 0 }},
	{"I", "h+k+l = 2n", false, func(h, k, l int) bool { return (h+k+l)%2 == 0 }},
	{"C", "h+k = 2n", false, func(h, k, l int) bool { return (h+k)%2 == 0 }},
	{"A", "k+l = 2n", false, func(h, k, l int) bool { return (k+l)%2 == 0 }},
	{"B", "h+l = 2n", false, func(h, k, l int) bool { return (h+l)%2 == 0 }},
}

// Bounds of the judgement: with fewer reflections than fewestCentring nothing is said;
// above filledCentring a stated centring is wrong, below emptyCentring one that is
// not stated is there. Chosen, no source: the true values are 0 and about 1.
const (
	fewestCentring = 20
	filledCentring = 0.1
	emptyCentring  = 0.03
	pseudoCentring = 0.5
)

// centringResults asks of each kind of centring whether what it forbids is there:
// of that which the group has, and of those that would forbid more.
func (s *Study) centringResults(list []*standing) []CentringResult {
	var out []CentringResult
	explained := false
	for k := range centrings {
		c := &centrings[k]
		stated := s.Series.Group.Centring() == c.name
		if !stated && s.centred(c) || c.hexagonal && !isHexagonal(s.Series.Cell) {
			continue
		}
		r := s.centringResult(c, stated, list)
		judgeCentring(r, explained)
		explained = explained || !stated && r.Verdict == evidence.Caution.String()
		out = append(out, *r)
	}
	return out
}

// centred reports whether the translations of the group forbid all that c forbids.
func (s *Study) centred(c *centring) bool {
	all := true
	general(func(h crystal.HKL) {
		all = all && (c.allows(h.H, h.K, h.L) || s.Series.Group.Absent(h))
	})
	return all
}

// isHexagonal reports whether c can be hexagonal axes.
func isHexagonal(c crystal.Cell) bool {
	return math.Abs(c.Gamma-120) < latticeToleranceDeg && math.Abs(c.A/c.B-1) < defaultCellTolerance
}

// general visits reflections in general position of every class of parity and of
// division by three.
func general(f func(crystal.HKL)) {
	for h := range 6 {
		for k := range 6 {
			for l := range 6 {
				f(crystal.HKL{H: 13 + h, K: 31 + k, L: 67 + l})
			}
		}
	}
}

func (s *Study) centringResult(c *centring, stated bool, list []*standing) *CentringResult {
	cat := s.intake.Catalogue
	r := &CentringResult{Centring: c.name, Condition: c.condition, Stated: stated, Ratio: math.NaN(), SU: math.NaN()}
	var values []float64
	forbidden, kept := s.shareForbidden(c)
	for _, x := range list {
		// Local means over the reflections that c allows.
		sum, n := make([]float64, x.shells.N), make([]float64, x.shells.N)
		others := 0
		for u, h := range cat.HKL {
			if !x.has(u) || cat.Absent[u] || !c.allows(h.H, h.K, h.L) {
				continue
			}
			others++
			if k := x.shells.Of[u]; k >= 0 {
				sum[k] += x.merged.J[u] / float64(cat.Epsilon[u])
				n[k]++
			}
		}
		r.Expected += float64(others) * forbidden / kept
		for u, h := range cat.HKL {
			if !x.has(u) || c.allows(h.H, h.K, h.L) || cat.Absent[u] && !stated {
				continue
			}
			r.N++
			if k := x.shells.Of[u]; k >= 0 && sum[k] > 0 {
				values = append(values, x.merged.J[u]/float64(cat.Epsilon[u])/(sum[k]/n[k]))
			}
		}
	}
	if len(values) > 1 {
		r.Ratio, r.SU = mean(values), math.Sqrt(squareOfMean(values))
	}
	return r
}

// shareForbidden counts, among reflections in general position that the group allows
// (all of them where the group has this centring itself), those that c forbids and
// those that it keeps.
func (s *Study) shareForbidden(c *centring) (forbidden, kept float64) {
	own := s.centred(c)
	general(func(h crystal.HKL) {
		switch allowed := c.allows(h.H, h.K, h.L); {
		case !own && s.Series.Group.Absent(h):
		case !allowed:
			forbidden++
		default:
			kept++
		}
	})
	return forbidden, kept
}

// nearlyCentred says what makes reflections that a centring forbids weak, but not absent.
const nearlyCentred = "background left in the intensities or spots that run into each other where the lattice is centred, or a translation that almost is a symmetry where it is not"

// judgeCentring gives the verdict: absent are reflections only that are within three standard
// uncertainties of 0. explained says that a kind that forbids more has
// been found already.
func judgeCentring(r *CentringResult, explained bool) {
	verdict, why := evidence.Fine, "what it would forbid is there: the lattice is not so centred"
	if r.Ratio < pseudoCentring {
		why += fmt.Sprintf(", though nearly (%.2f +- %.2f of the local mean of the others), as with a translation that almost is a symmetry: strengths then come in two kinds", r.Ratio, r.SU)
	}
	switch {
	case r.Stated && r.N < fewestCentring:
		verdict, why = evidence.NotKnown, fmt.Sprintf("%d reflections that it forbids were measured: the lists cannot tell", r.N)
	case r.Stated && r.Ratio-3*r.SU > filledCentring:
		verdict = evidence.Fails
		why = fmt.Sprintf("the group has this centring, but what it forbids is there (%.2f +- %.2f of the local mean of the others), and multiple scattering cannot fill it: write the group of the lattice without it, or these reflections are left out of everything", r.Ratio, r.SU)
	case r.Stated && r.Ratio-3*r.SU > 0:
		verdict = evidence.Caution
		why = fmt.Sprintf("the group has this centring, but what it forbids is not quite absent (%.3f +- %.3f of the local mean of the others): %s", r.Ratio, r.SU, nearlyCentred)
	case r.Stated:
		why = fmt.Sprintf("what it forbids is absent, as it must be (%.3f +- %.3f of the local mean of the others)", r.Ratio, r.SU)
	case float64(r.N) < 0.1*r.Expected && r.Expected >= fewestCentring:
		verdict = evidence.Caution
		why = fmt.Sprintf("hardly any of the reflections that it forbids are in the lists (%d, where %.0f would be like the others): the lattice looks centred, or somebody left them out; completeness counts them as missing", r.N, r.Expected)
	case r.N < fewestCentring:
		verdict, why = evidence.NotKnown, fmt.Sprintf("%d reflections that it forbids were measured: too few to tell", r.N)
	case r.Ratio+3*r.SU < emptyCentring:
		verdict = evidence.Caution
		why = fmt.Sprintf("the group allows them, but reflections that this centring forbids are absent (%.3f +- %.3f of the local mean of the others): write the group of the centred lattice, or half of what is compared is noise", r.Ratio, r.SU)
	case r.Ratio < filledCentring:
		verdict = evidence.Caution
		why = fmt.Sprintf("the group allows them, but reflections that this centring forbids are hardly there (%.3f +- %.3f of the local mean of the others): %s", r.Ratio, r.SU, nearlyCentred)
	}
	if verdict == evidence.Caution && explained {
		verdict, why = evidence.Fine, "no weaker than the centring above makes them"
	}
	r.Verdict, r.Why = verdict.String(), why
}
