package crystal

import (
	"slices"
	"strings"
)

// half and quarter of a cell edge in units of 1/gliding.
const (
	halfEdge    = gliding / 2
	quarterEdge = gliding / 4
)

// glidePart names the glide of the planes perpendicular to normal. Planes in a
// centred cell often are glides of two kinds at once; then the letter is the one
// that the Hermann-Mauguin symbol of the setting uses.
func glidePart(g *Group, o Op, normal [3]int) (part, bool) {
	all, ok := alternatives(g, o, 2)
	if !ok {
		return part{}, false
	}
	p := part{kind: GlidePlane, direction: normal}
	byLetter := map[string][3]int{}
	var letters []string
	for _, w := range all {
		letter := glideName(w)
		if old, known := byLetter[letter]; !known {
			letters = append(letters, letter)
			byLetter[letter] = w
		} else if size(w) < size(old) {
			byLetter[letter] = w
		}
	}
	slices.Sort(letters)
	if first, second, double := doubleGlide(g, normal, byLetter); double {
		p.symbol, p.glides = "e", [][3]int{byLetter[first], byLetter[second]}
		return p, true
	}
	p.symbol = letters[0]
	if want := glideInSymbol(g, normal); slices.Contains(letters, want) {
		p.symbol = want
	}
	p.glides = [][3]int{byLetter[p.symbol]}
	return p, true
}

// size ranks glide vectors by length, then by the number of minus signs.
func size(w [3]int) int {
	n := 0
	for _, x := range w {
		if n += 4 * abs(x); x < 0 {
			n++
		}
	}
	return n
}

// glideName is the letter of a glide vector: a, b, c for half an edge, n for half
// a diagonal, d for quarters, g for anything else (International Tables A,
// 2.1.2).
func glideName(w [3]int) string {
	halves, quarters, others := "", 0, 0
	for j := range 3 {
		switch m := mod(w[j], gliding); {
		case m == 0:
		case m == halfEdge:
			halves += "abc"[j : j+1]
		case m%quarterEdge == 0:
			quarters++
		default:
			others++
		}
	}
	switch {
	case others > 0:
		return "g"
	case quarters > 0:
		return "d"
	case len(halves) == 1:
		return halves
	}
	return "n"
}

// doubleGlide reports whether one and the same plane glides along two edges,
// which needs their half diagonal to be a lattice vector (de Wolff et al., 1992).
func doubleGlide(g *Group, normal [3]int, byLetter map[string][3]int) (first, second string, ok bool) {
	for axis, pair := range map[[3]int][2]string{{1, 0, 0}: {"b", "c"}, {0, 1, 0}: {"a", "c"}, {0, 0, 1}: {"a", "b"}} {
		if axis != normal {
			continue
		}
		var half [3]int
		for j := range 3 {
			if normal[j] == 0 {
				half[j] = Twentyfourths / 2
			}
		}
		_, one := byLetter[pair[0]]
		_, two := byLetter[pair[1]]
		return pair[0], pair[1], one && two && slices.Contains(g.lattice, half)
	}
	return "", "", false
}

// glideInSymbol is the letter that the symbol of the setting gives to the planes
// with this normal, empty when there is none.
func glideInSymbol(g *Group, normal [3]int) string {
	f := strings.Fields(g.setting.Full)
	if len(f) < 2 {
		return ""
	}
	axial := normal == [3]int{1, 0, 0} || normal == [3]int{0, 1, 0} || normal == [3]int{0, 0, 1}
	place := 0
	switch g.point.system {
	case "monoclinic", "orthorhombic":
		place = 1 + slices.Index(normal[:], 1)
	case "cubic":
		if place = 3; axial {
			place = 1
		}
	case "tetragonal":
		switch {
		case normal[2] == 1:
			place = 1
		case axial:
			place = 2
		default:
			place = 3
		}
	default:
		switch {
		case normal[2] == 1:
			place = 1
		case axial || normal == [3]int{1, 1, 0} || !g.point.hexagonal:
			place = 2
		default:
			place = 3
		}
	}
	if place < 1 || place >= len(f) {
		return ""
	}
	_, plane, ok := strings.Cut(f[place], "/")
	if !ok {
		plane = f[place]
	}
	return plane
}
