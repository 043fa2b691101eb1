package analysis

import (
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
)

// symmetry asks whether the intensities go with the space group: what it forbids, and
// what a screw axis, glide plane or centring that it lacks would forbid.
func (s *Study) symmetry() evidence.Finding {
	cat, g := s.intake.Catalogue, s.Series.Group
	elements := g.Elements()
	classes := make([]evidence.SymmetryClass, 0, len(elements))
	members := make([][]bool, len(elements))
	for e := range elements {
		classes = append(classes, evidence.SymmetryClass{Name: elements[e].Name, Forbidden: true, Centring: elements[e].Kind == crystal.CentringElement})
		members[e] = make([]bool, cat.Len())
	}
	for u, h := range cat.HKL {
		if cat.Absent[u] {
			for _, e := range g.ForbiddenBy(h) {
				members[e][u] = true
			}
		}
	}
	for _, m := range missingElements(g, cat) {
		classes = append(classes, evidence.SymmetryClass{Name: m.name})
		members = append(members, m.forbids)
	}
	for _, sc := range s.scaled {
		var merged []*intensity.Merged
		for _, p := range sc.Positions {
			merged = append(merged, intensity.Merge(cat.Len(), p))
		}
		sh := cat.Shells(s.shellCount(merged), merged...)
		for _, m := range merged {
			mean, _ := cat.Means(m, sh)
			for c := range classes {
				if v := classMean(cat, m, sh, mean, members[c]); v.Acentric+v.Centric > 0 {
					classes[c].Positions = append(classes[c].Positions, v)
				}
			}
		}
	}
	for c := range classes {
		for o := range classes {
			if !classes[c].Forbidden && !classes[o].Forbidden && partOf(members[c], members[o]) {
				classes[c].Within = append(classes[c].Within, o)
			}
		}
	}
	return evidence.SymmetryOf(classes)
}

// classMean is the mean of J/(epsilon <J>) over the members measured.
func classMean(cat *intensity.Catalogue, m *intensity.Merged, sh *intensity.Shells, mean []float64, member []bool) evidence.ClassMean {
	var out evidence.ClassMean
	variance := 0.0
	for u, in := range member {
		k := sh.Of[u]
		if !in || m.N[u] == 0 || k < 0 || !(mean[k] > 0) {
			continue
		}
		unit := mean[k] * float64(cat.Epsilon[u])
		out.Ratio += m.J[u] / unit
		variance += m.Var[u] / (unit * unit)
		if cat.Centric[u] {
			out.Centric++
		} else {
			out.Acentric++
		}
	}
	n := float64(out.Acentric + out.Centric)
	out.Ratio /= n
	out.SU = math.Sqrt(variance) / n
	return out
}

// partOf reports whether a is part of b and not all of it.
func partOf(a, b []bool) bool {
	less := false
	for u := range a {
		if a[u] && !b[u] {
			return false
		}
		less = less || b[u] && !a[u]
	}
	return less
}
