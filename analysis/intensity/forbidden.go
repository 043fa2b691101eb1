package intensity

import (
	"math"

	"thinward/analysis/crystal"
)

// Forbidden describes the reflections that one symmetry element of the group
// forbids, as measured in one position. Ratio is the mean of J over the local
// mean of allowed reflections (epsilon divided out of those), SU its standard
// uncertainty: from the variances, or from the scatter of the ratios where there are
// five or more and that is larger (of a few it may be small by chance). MeanZ is the mean of J/sqrt(Var). With N = 0
// the three are NaN and Why says so in words.
//
// Where a screw axis or glide plane forbids a reflection there is a lattice point, and
// scattering more than once can fill it. Where a centring forbids one there is none: waves
// of the crystal differ by vectors of the reciprocal lattice, however often they scatter
// (International Tables for Crystallography B, 5.2), so that what is measured there is
// background, overlap or a wrong lattice. Centring tells such a row, and "all" leaves
// these reflections out.
type Forbidden struct {
	Element  string // "all" for every reflection that a screw axis or glide plane forbids
	Centring bool
	N        int
	Ratio    float64
	SU       float64
	MeanZ    float64
	Why      string // empty when N is above zero
}

// Why of the row "all" in a group without systematic absences, and in one whose centring
// alone makes some.
const (
	NoneForbidden = "the group forbids none"
	OnlyCentring  = "the group has no screw axis or glide plane that forbids any, and where its centring does there is no lattice point to be filled"
)

// MeasureForbidden returns a row for all reflections that screw axes and glide planes
// forbid and one for each element of the group that forbids any, centring too, in the
// order of Group.Elements; a reflection that several elements forbid counts in each. The shells must be
// of cat.Shells; forbidden reflections outside them, or in one whose mean is
// not above zero, are not used.
func MeasureForbidden(m *Merged, cat *Catalogue, sh *Shells) []Forbidden {
	mean, _ := cat.Means(m, sh)
	elements := cat.Group.Elements()
	ratio := make([][]float64, len(elements)+1)
	relVar := make([][]float64, len(elements)+1)
	for u, h := range cat.HKL {
		s := sh.Of[u]
		if !cat.Absent[u] || m.N[u] == 0 || s < 0 || !(mean[s] > 0) {
			continue
		}
		r, v := m.J[u]/mean[s], m.Var[u]/(mean[s]*mean[s])
		by := cat.Group.ForbiddenBy(h)
		if elements[by[0]].Kind != crystal.CentringElement {
			ratio[0], relVar[0] = append(ratio[0], r), append(relVar[0], v)
		}
		for _, e := range by {
			ratio[e+1], relVar[e+1] = append(ratio[e+1], r), append(relVar[e+1], v)
		}
	}
	out := make([]Forbidden, len(ratio))
	for k := range out {
		out[k] = summarise(ratio[k], relVar[k])
		out[k].Element = "all"
		switch {
		case k > 0:
			out[k].Element, out[k].Centring = elements[k-1].Name, elements[k-1].Kind == crystal.CentringElement
		case len(elements) == 0:
			out[k].Why = NoneForbidden
		case onlyCentring(elements):
			out[k].Why = OnlyCentring
		}
	}
	return out
}

func onlyCentring(elements []crystal.Element) bool {
	for i := range elements {
		if elements[i].Kind != crystal.CentringElement {
			return false
		}
	}
	return true
}

func summarise(ratio, relVar []float64) Forbidden {
	f := Forbidden{N: len(ratio)}
	if f.N == 0 {
		f.Ratio, f.SU, f.MeanZ, f.Why = math.NaN(), math.NaN(), math.NaN(), "not recorded"
		return f
	}
	n, variance := float64(f.N), 0.0
	for i, r := range ratio {
		f.Ratio += r / n
		f.MeanZ += r / math.Sqrt(relVar[i]) / n
		variance += relVar[i] / (n * n)
	}
	if f.N >= 5 {
		scatter := 0.0
		for _, r := range ratio {
			scatter += (r - f.Ratio) * (r - f.Ratio) / (n * (n - 1))
		}
		variance = math.Max(variance, scatter)
	}
	f.SU = math.Sqrt(variance)
	return f
}
