package crystal

import (
	"cmp"
	"fmt"
	"slices"
	"strings"
)

// ElementKind says what kind of symmetry element forbids reflections.
type ElementKind int

// The kinds of Element.
const (
	CentringElement ElementKind = iota
	ScrewAxis
	GlidePlane
)

// String is "centring", "screw axis" or "glide plane".
func (k ElementKind) String() string {
	return [...]string{"centring", "screw axis", "glide plane"}[k]
}

// Element is a symmetry element that forbids reflections which the centring
// alone would allow, taken together with the elements that the group makes
// equivalent to it: in a tetragonal group the screws along a and b are one. An
// axis or plane that only repeats what the centring says, such as the screws
// that lie between the twofold axes of a C-centred cell, is no Element.
type Element struct {
	Kind       ElementKind
	Symbol     string   // "C"; "2_1", "4_3"; "a", "n", "d", "e" (of the first direction)
	Directions [][3]int // of the axes, or normal to the planes, in the direct lattice; nil for centring
	Name       string   // "C centring", "2_1 along a", "n glide perpendicular to b"
	Conditions []string // what the allowed reflections fulfil, "h00: h = 2n"
	tests      []zoneTest
}

// zoneTest forbids a reflection that w keeps in place when h t / gliding is no
// whole number.
type zoneTest struct {
	w weights
	t [3]int64
}

// gliding is the denominator of screw and glide vectors: 24 times the least
// common multiple of the orders of rotation.
const gliding = Twentyfourths * 12

// Elements returns the symmetry elements that forbid reflections: centring
// first, then screw axes, then glide planes. Empty when nothing is forbidden. The
// slice is a copy; what its elements point to must not be changed.
func (g *Group) Elements() []Element { return append([]Element(nil), g.elements...) }

// ForbiddenBy returns the indices into Elements of those that forbid h, nil when
// h is allowed. It is not empty exactly when Absent(h). Where the centring forbids
// h it stands alone: what a screw or glide says of such a reflection depends on
// which of the parallel ones is taken.
func (g *Group) ForbiddenBy(h HKL) []int {
	var by []int
	for i := range g.elements {
		if !g.elements[i].forbids(g, h) {
			continue
		}
		if by = append(by, i); g.elements[i].Kind == CentringElement {
			break
		}
	}
	return by
}

func (e *Element) forbids(g *Group, h HKL) bool {
	a, b, c := int64(h.H), int64(h.K), int64(h.L)
	if e.Kind == CentringElement {
		return g.centringForbids(a, b, c)
	}
	key := g.turns[0].w.of(a, b, c)
	for i := range e.tests {
		t := &e.tests[i]
		if t.w.of(a, b, c) == key && (a*t.t[0]+b*t.t[1]+c*t.t[2])%gliding != 0 {
			return true
		}
	}
	return false
}

// Conditions returns the reflection conditions as text, "hkl: h+k = 2n",
// "0kl: k+l = 2n", "00l: l = 4n": one for each centring, and for each zone in
// which a screw or glide allows less than the centring does. A condition holds on
// top of that of the centring, which is not repeated for the zones. Where more
// than three equivalent zones have the same condition the first stands for all
// and the text ends in "(and equivalents)".
func (g *Group) Conditions() []string {
	var all []string
	for i := range g.elements {
		all = append(all, g.elements[i].Conditions...)
	}
	return all
}

// part is one axis or plane before equivalent ones are gathered.
type part struct {
	kind      ElementKind
	direction [3]int
	symbol    string
	glides    [][3]int // screw or glide vectors in units of 1/gliding; two for an e glide
	turn      weights
	row       HKL // for an axis: the reflections it keeps are the multiples of row
}

// findElements derives the elements from the operators: the part of a
// translation that no choice of origin removes is the mean of t, R t, R^2 t, ...
// (International Tables A, 1.2.2.4), and it forbids something unless it is the
// projection of a lattice vector.
func findElements(g *Group) []Element {
	var elements []Element
	if len(g.lattice) > 1 {
		elements = append(elements, centringElement(g))
	}
	best := map[[3]int]part{}
	orders := map[[3]int]int{}
	var parts []part
	for i, o := range g.coset {
		p, n, axis := properPart(widen(o.R))
		switch {
		case n < 2 || o.Det() < 0 && n != 2:
		case o.Det() < 0:
			if glide, ok := glidePart(g, o, axis); ok {
				glide.turn = g.turns[i].w
				parts = append(parts, glide)
			}
		case n > orders[axis] && rightHanded(p, n, axis):
			orders[axis] = n
			delete(best, axis)
			if screw, ok := screwPart(g, o, n, axis); ok {
				screw.turn = g.turns[i].w
				best[axis] = screw
			}
		}
	}
	for _, screw := range best {
		parts = append(parts, screw)
	}
	slices.SortFunc(parts, func(a, b part) int {
		return cmp.Or(cmp.Compare(a.kind, b.kind), compareDirections(a.kind, a.direction, b.direction))
	})
	for len(parts) > 0 {
		var same, rest []part
		for _, p := range parts {
			if p.kind == parts[0].kind && g.equivalentDirections(p.direction, parts[0].direction) {
				same = append(same, p)
			} else {
				rest = append(rest, p)
			}
		}
		elements = append(elements, gather(same))
		parts = rest
	}
	return elements
}

// compareDirections puts a, b, c first, then what is simple and lies in the plane
// of a and b; of planes [1-10] before [110], because its zone is hhl.
func compareDirections(kind ElementKind, a, b [3]int) int {
	negative := 10
	if kind == GlidePlane {
		negative = -10
	}
	rank := func(v [3]int) (r int) {
		for i, x := range v {
			r += 100 * abs(x)
			if x != 0 {
				r += 1 << i
			}
			if x < 0 {
				r += negative
			}
		}
		return r
	}
	return cmp.Or(cmp.Compare(rank(a), rank(b)), slices.Compare(b[:], a[:]))
}

func (g *Group) equivalentDirections(a, b [3]int) bool {
	for _, o := range g.coset {
		if primitive(widen(o.R).column(a)) == b {
			return true
		}
	}
	return false
}

// rightHanded reports whether p turns anticlockwise seen against its axis, which
// decides between 3_1 and 3_2.
func rightHanded(p matrix, n int, axis [3]int) bool {
	if n == 2 {
		return true
	}
	for _, x := range [][3]int{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}} {
		y := p.column(x)
		if d := det(matrix{axis, x, y}); d != 0 {
			return d > 0
		}
	}
	return false
}

// intrinsic is the mean of t, R t, ..., R^(n-1) t in units of 1/gliding.
func intrinsic(r matrix, n int, t [3]int) [3]int {
	var sum [3]int
	for range n {
		for j := range 3 {
			sum[j] += t[j]
		}
		t = r.column(t)
	}
	for j := range 3 {
		sum[j] *= 12 / n
	}
	return sum
}

// alternatives returns the intrinsic parts of o combined with every lattice
// vector near zero, and false when one of them vanishes.
func alternatives(g *Group, o Op, n int) ([][3]int, bool) {
	r := widen(o.R)
	var all [][3]int
	seen := map[[3]int]bool{}
	for _, v := range g.lattice {
		for a := -2; a <= 2; a++ {
			for b := -2; b <= 2; b++ {
				for c := -2; c <= 2; c++ {
					t := [3]int{int(o.T[0]) + v[0] + a*Twentyfourths, int(o.T[1]) + v[1] + b*Twentyfourths, int(o.T[2]) + v[2] + c*Twentyfourths}
					w := intrinsic(r, n, t)
					if w == ([3]int{}) {
						return nil, false
					}
					if !seen[w] {
						seen[w] = true
						all = append(all, w)
					}
				}
			}
		}
	}
	return all, true
}

// screwPart names the screw with the least translation of those parallel to
// axis.
func screwPart(g *Group, o Op, n int, axis [3]int) (part, bool) {
	all, ok := alternatives(g, o, n)
	if !ok {
		return part{}, false
	}
	repeat := gliding
	for _, v := range g.lattice {
		for k := 1; k < Twentyfourths; k++ {
			if v == [3]int{mod(k*axis[0], Twentyfourths), mod(k*axis[1], Twentyfourths), mod(k*axis[2], Twentyfourths)} {
				repeat = min(repeat, k*gliding/Twentyfourths)
			}
		}
	}
	p := part{kind: ScrewAxis, direction: axis, row: keptRow(o, n)}
	least := 0
	for _, w := range all {
		for j := range 3 {
			if axis[j] == 0 {
				continue
			}
			m := w[j] / axis[j] * n
			if m%repeat == 0 && m > 0 && (least == 0 || m/repeat < least) {
				least, p.glides = m/repeat, [][3]int{w}
			}
			break
		}
	}
	if least == 0 {
		// A lattice that is no conventional one: keep the vector without a name of its own.
		p.symbol, p.glides = fmt.Sprintf("%d-fold screw", n), all[:1]
		return p, true
	}
	p.symbol = fmt.Sprintf("%d_%d", n, least)
	return p, true
}

// keptRow is the primitive row h with h R = h for a rotation of order n.
func keptRow(o Op, n int) HKL {
	r := widen(o.R)
	for _, h := range []HKL{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}} {
		var sum [3]int
		for range n {
			sum[0], sum[1], sum[2] = sum[0]+h.H, sum[1]+h.K, sum[2]+h.L
			h = r.row(h)
		}
		if sum != ([3]int{}) {
			v := primitive(sum)
			return HKL{v[0], v[1], v[2]}
		}
	}
	return HKL{}
}

// gather makes one Element of equivalent parts.
func gather(parts []part) Element {
	e := Element{Kind: parts[0].kind, Symbol: parts[0].symbol}
	alike := true
	for _, p := range parts {
		e.Directions = append(e.Directions, p.direction)
		alike = alike && p.symbol == e.Symbol
		for _, w := range p.glides {
			e.tests = append(e.tests, zoneTest{p.turn, [3]int64{int64(w[0]), int64(w[1]), int64(w[2])}})
		}
	}
	e.Name = e.Symbol + " along "
	if e.Kind == GlidePlane {
		e.Name = e.Symbol + " glide perpendicular to "
	}
	if alike && len(parts) <= 3 {
		e.Name += listing(e.Directions)
	} else {
		e.Name += direction(e.Directions[0]) + " and equivalents"
	}
	if len(parts) > 3 {
		e.Conditions = []string{zoneCondition(parts[0]) + " (and equivalents)"}
		return e
	}
	for _, p := range parts {
		e.Conditions = append(e.Conditions, zoneCondition(p))
	}
	return e
}

func listing(directions [][3]int) string {
	names := make([]string, len(directions))
	for i, v := range directions {
		names[i] = direction(v)
	}
	if n := len(names); n > 1 {
		return strings.Join(names[:n-1], ", ") + " and " + names[n-1]
	}
	return names[0]
}
