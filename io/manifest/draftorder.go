package manifest

import (
	"cmp"
	"regexp"
	"slices"
	"strings"
)

// hint finds a word of a name that says how thick a position is.
var hint = regexp.MustCompile(`(?i)(^|[^a-z])(thin|mid|middle|medium|thick)($|[^a-z])`)

var hintRank = map[string]int{"thin": 1, "mid": 2, "middle": 2, "medium": 2, "thick": 3}

// hinted splits a name into its rest and the rank of its hint, 0 for none.
func hinted(name string) (rest string, rank int) {
	m := hint.FindStringSubmatchIndex(name)
	if m == nil {
		return name, 0
	}
	return name[:m[4]] + name[m[5]:], hintRank[strings.ToLower(name[m[4]:m[5]])]
}

// order puts positions from thin to thick: all by the thickness that their files say, or
// those whose names differ in a hint only, which then stand together. Others keep the
// order of the files.
func (d *drafter) order() {
	all := len(d.positions) > 1
	first := map[string]int{}
	for k, p := range d.positions {
		all = all && p.thickness > 0 && p.unit == d.positions[0].unit
		if rest, rank := hinted(p.name); rank > 0 {
			d.sorted = true
			if _, ok := first[rest]; !ok {
				first[rest] = k
			}
		}
	}
	if d.sorted {
		place := map[string]int{}
		for k, p := range d.positions {
			rest, rank := hinted(p.name)
			if place[p.name] = k; rank > 0 {
				place[p.name] = first[rest]
			}
		}
		slices.SortStableFunc(d.positions, func(a, b draftPosition) int {
			_, x := hinted(a.name)
			_, y := hinted(b.name)
			return cmp.Or(cmp.Compare(place[a.name], place[b.name]), cmp.Compare(x, y))
		})
		return
	}
	if d.sorted = all; all {
		slices.SortStableFunc(d.positions, func(a, b draftPosition) int { return cmp.Compare(a.thickness, b.thickness) })
	}
}
