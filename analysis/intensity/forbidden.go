package intensity

import "math"

// Forbidden describes the reflections that one symmetry element of the group
// forbids, as measured in one position. Ratio is the mean of J over the local
// mean of allowed reflections (epsilon divided out of those), SU its standard
// uncertainty: from the variances, or from the scatter of the ratios where there are
// five or more and that is larger (of a few it may be small by chance). MeanZ is the mean of J/sqrt(Var). With N = 0
// the three are NaN and Why says so in words.
type Forbidden struct {
	Element string // "all" for every forbidden reflection
	N       int
	Ratio   float64
	SU      float64
	MeanZ   float64
	Why     string // empty when N is above zero
}

// NoneForbidden is the Why of a group without systematic absences.
const NoneForbidden = "the group forbids none"

// MeasureForbidden returns a row for all forbidden reflections and one for each
// element of the group that forbids any, in the order of Group.Elements; a
// reflection that several elements forbid counts in each. The shells must be
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
		ratio[0], relVar[0] = append(ratio[0], r), append(relVar[0], v)
		for _, e := range cat.Group.ForbiddenBy(h) {
			ratio[e+1], relVar[e+1] = append(ratio[e+1], r), append(relVar[e+1], v)
		}
	}
	out := make([]Forbidden, len(ratio))
	for k := range out {
		out[k] = summarise(ratio[k], relVar[k])
		out[k].Element = "all"
		if k > 0 {
			out[k].Element = elements[k-1].Name
		} else if len(elements) == 0 {
			out[k].Why = NoneForbidden
		}
	}
	return out
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
