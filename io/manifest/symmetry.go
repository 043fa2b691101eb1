package manifest

import (
	"fmt"
	"strings"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// symmetry settles the space group: of the manifest, or that of the files where it gives none
// and they agree in all that counts.
func (l *loader) symmetry() error {
	f := l.file
	top := place{crystal: -1, position: -1}
	var err error
	switch {
	case len(f.Operators) > 0:
		if l.out.Group, err = crystal.ParseOperators(f.Operators); err != nil {
			return l.fail(top, "operators", err.Error(), "list every operator of the group, centring included", err)
		}
	case f.SpaceGroup != "":
		if l.out.Group, err = crystal.Lookup(f.SpaceGroup); err != nil {
			return l.fail(top, "space_group", err.Error(), `write a Hermann-Mauguin symbol such as "P 21 21 21", a Hall symbol or a number`, err)
		}
	}
	given := l.out.Group != nil
	said := map[string][]string{}
	var order []string
	for _, g := range l.groups {
		if l.out.Group == nil {
			l.out.Group = g.group
			continue
		}
		text, grave := compareGroups(g.group, l.out.Group)
		if text == "" {
			continue
		}
		if grave && !given {
			return l.fail(top, "space_group", fmt.Sprintf("%s gives space group %s, the files before it %s: %s", g.file, nameOf(g.group), nameOf(l.out.Group), text), "fix the group for all files with space_group", nil)
		}
		text = fmt.Sprintf("space group %s in the file, %s in the series: %s", nameOf(g.group), nameOf(l.out.Group), text)
		if said[text] == nil {
			order = append(order, text)
		}
		said[text] = append(said[text], g.file)
	}
	for _, text := range order {
		l.out.Warnings = append(l.out.Warnings, intensity.Warning{Code: "group-differs", Text: text, Where: fileNames(said[text])})
	}
	if l.out.Group == nil {
		return l.fail(top, "space_group", "neither the manifest nor a file gives the symmetry", `add space_group = "P 21 21 21" or operators = [...]`, nil)
	}
	return nil
}

// fileNames names up to three files and counts the others.
func fileNames(names []string) string {
	if len(names) > 3 {
		return fmt.Sprintf("%s, %s and %d other files", names[0], names[1], len(names)-2)
	}
	return strings.Join(names, ", ")
}

// farthestIndex bounds the reflections over which absences are compared: translations are
// 24ths, and of those that occur 12 holds every class twice.
const farthestIndex = 12

// compareGroups says in what a group differs from that of the series, as far as an
// analysis can see it: the reflections that are equivalent, those that are forbidden,
// those that are centric. The last alone is not grave. Empty when it is the same in all.
func compareGroups(a, series *crystal.Group) (text string, grave bool) {
	if x, y := laueOf(a), laueOf(series); !sameRotations(x, y) {
		classes := fmt.Sprintf("Laue class %s against %s", a.LaueSetting(), series.LaueSetting())
		if a.LaueSetting() == series.LaueSetting() {
			classes = fmt.Sprintf("Laue class %s about other axes", a.LaueClass())
		}
		return "they make different reflections equivalent (" + classes + ")", true
	}
	var here, there *crystal.HKL
	centric := false
	for _, h := range smallIndices() {
		switch x, y := a.Absent(h), series.Absent(h); {
		case x && !y && here == nil:
			here = &h
		case y && !x && there == nil:
			there = &h
		}
		centric = centric || a.Centric(h) != series.Centric(h)
	}
	var parts []string
	for _, p := range []struct {
		h *crystal.HKL
		g *crystal.Group
	}{{here, a}, {there, series}} {
		if p.h != nil {
			parts = append(parts, fmt.Sprintf("%d %d %d by %s only", p.h.H, p.h.K, p.h.L, nameOf(p.g)))
		}
	}
	switch {
	case len(parts) > 0:
		return "they forbid different reflections, such as " + strings.Join(parts, " and "), true
	case centric:
		return "they forbid the same reflections and make the same ones equivalent, but other ones are centric, which only the statistics of strengths see", false
	}
	return "", false
}

// smallIndices lists reflections up to farthestIndex, one of each Friedel pair, the
// plainest first.
func smallIndices() []crystal.HKL {
	var out []crystal.HKL
	for size := 1; size <= farthestIndex; size++ {
		for h := range size + 1 {
			for k := range size + 1 {
				for l := range size + 1 {
					if max(h, k, l) == size {
						out = append(out, crystal.HKL{H: h, K: k, L: l}, crystal.HKL{H: h, K: k, L: -l}, crystal.HKL{H: h, K: -k, L: l}, crystal.HKL{H: h, K: -k, L: -l})
					}
				}
			}
		}
	}
	return out
}

// laueOf is the set of rotations of the Laue class, as their proper parts.
func laueOf(g *crystal.Group) map[[3][3]int8]bool {
	out := map[[3][3]int8]bool{}
	for _, o := range g.Operators() {
		r := o.R
		if o.Det() < 0 {
			for i := range r {
				for j := range r[i] {
					r[i][j] = -r[i][j]
				}
			}
		}
		out[r] = true
	}
	return out
}

func sameRotations(a, b map[[3][3]int8]bool) bool {
	for r := range a {
		if !b[r] {
			return false
		}
	}
	return len(a) == len(b)
}

func nameOf(g *crystal.Group) string {
	for _, s := range []string{g.HM(), g.Hall()} {
		if s != "" {
			return s
		}
	}
	return fmt.Sprintf("of %d operators", len(g.Operators()))
}
