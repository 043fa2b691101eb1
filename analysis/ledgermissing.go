package analysis

import (
	"cmp"
	"fmt"
	"slices"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// missing is a symmetry element that a group lacks and could have beside its own, with
// the unique reflections of the catalogue that the group allows and the element forbids.
type missing struct {
	name    string
	forbids []bool
}

// missingElements lists the centrings, screw axes and glide planes that the Laue class
// leaves room for and that would forbid reflections which the group allows. Elements
// that forbid the same ones are one, named by the first: centring, then axes from the
// highest order down, then planes.
func missingElements(g *crystal.Group, cat *intensity.Catalogue) []missing {
	list := possibleElements(g)
	out := make([]missing, len(list))
	for c := range list {
		out[c] = missing{list[c].name, make([]bool, cat.Len())}
	}
	turns := laueTurns(g)
	for u, h := range cat.HKL {
		if cat.Absent[u] {
			continue
		}
		alike := []crystal.HKL{h}
		if slices.ContainsFunc(turns[1:], func(t crystal.Op) bool { return t.ApplyHKL(h) == h }) {
			alike = g.Equivalents(h) // an element stands for those that the group makes equivalent to it
		}
		for c := range list {
			out[c].forbids[u] = slices.ContainsFunc(alike, list[c].forbids)
		}
	}
	return distinct(out)
}

// distinct keeps the first of those that forbid the same reflections, and none that forbids
// nothing.
func distinct(list []missing) []missing {
	var out []missing
	seen := map[string]bool{}
	for _, m := range list {
		key := make([]byte, len(m.forbids))
		for u, f := range m.forbids {
			if f {
				key[u] = 1
			}
		}
		if slices.Contains(m.forbids, true) && !seen[string(key)] {
			seen[string(key)] = true
			out = append(out, m)
		}
	}
	return out
}

// possible is an element by what it forbids: h R = h for one of its turns, unless it is a
// centring, and h t no whole number for one of its translations, which are in units of
// 1/unit.
type possible struct {
	name         string
	turn         *crystal.Op
	translations [][3]int
	unit         int
}

func (p *possible) forbids(h crystal.HKL) bool {
	if p.turn != nil && p.turn.ApplyHKL(h) != h {
		return false
	}
	return slices.ContainsFunc(p.translations, func(t [3]int) bool {
		return (h.H*t[0]+h.K*t[1]+h.L*t[2])%p.unit != 0
	})
}

const cellEdge = crystal.Twentyfourths

func possibleElements(g *crystal.Group) []possible {
	lattice := latticeOf(g)
	out := possibleCentrings(g)
	turns := laueTurns(g)
	for n := 6; n >= 2; n-- {
		for t := range turns {
			r := &turns[t]
			if r.Det() < 0 || orderOf(*r) != n {
				continue
			}
			u := axisOf(*r)
			v := shortestAlong(u, lattice)
			for k := 1; 2*k <= n; k++ {
				out = append(out, possible{screwName(n, k) + " along " + directionName(u), r, [][3]int{{k * v[0], k * v[1], k * v[2]}}, n * cellEdge})
			}
		}
	}
	for t := range turns {
		r := &turns[t]
		if r.Det() > 0 || orderOf(crystal.Inversion().Compose(*r)) != 2 {
			continue
		}
		normal := directionName(axisOf(crystal.Inversion().Compose(*r)))
		for _, v := range lattice {
			if imageOf(*r, v) == v && v != ([3]int{}) {
				out = append(out, possible{glideLetter(v) + " glide perpendicular to " + normal, r, [][3]int{v}, 2 * cellEdge})
			}
		}
	}
	return out
}

// laueTurns are the rotation parts of the Laue class, identity first.
func laueTurns(g *crystal.Group) []crystal.Op {
	out := []crystal.Op{crystal.Identity()}
	add := func(o crystal.Op) {
		if o.T = ([3]int8{}); !slices.Contains(out, o) {
			out = append(out, o)
		}
	}
	for _, o := range g.Operators() {
		add(o)
		add(crystal.Inversion().Compose(crystal.Op{R: o.R}))
	}
	return out
}

// latticeOf are the lattice vectors in 24ths of the edges with components under two
// edges, simple ones first.
func latticeOf(g *crystal.Group) [][3]int {
	var out [][3]int
	for _, o := range g.Operators() {
		if o.R != crystal.Identity().R {
			continue
		}
		for a := -1; a <= 1; a++ {
			for b := -1; b <= 1; b++ {
				for c := -1; c <= 1; c++ {
					out = append(out, [3]int{int(o.T[0]) + a*cellEdge, int(o.T[1]) + b*cellEdge, int(o.T[2]) + c*cellEdge})
				}
			}
		}
	}
	weight := func(v [3]int) int {
		n := 0
		for _, x := range v {
			if n += 4 * max(x, -x); x < 0 {
				n++
			}
		}
		return n
	}
	slices.SortStableFunc(out, func(a, b [3]int) int { return cmp.Or(cmp.Compare(weight(a), weight(b)), slices.Compare(b[:], a[:])) })
	return out
}

// possibleCentrings are those that a primitive lattice could have. A group with
// a centring is asked for that of all faces only.
func possibleCentrings(g *crystal.Group) []possible {
	const half, third = cellEdge / 2, cellEdge / 3
	a, b, c := [3]int{0, half, half}, [3]int{half, 0, half}, [3]int{half, half, 0}
	out := []possible{{"F centring", nil, [][3]int{a, b, c}, cellEdge}}
	if g.Centring() != "P" {
		return out
	}
	out = append(out, possible{"A centring", nil, [][3]int{a}, cellEdge}, possible{"B centring", nil, [][3]int{b}, cellEdge},
		possible{"C centring", nil, [][3]int{c}, cellEdge}, possible{"I centring", nil, [][3]int{{half, half, half}}, cellEdge})
	if s := g.System(); s == "trigonal" || s == "hexagonal" {
		out = append(out, possible{"R centring", nil, [][3]int{{2 * third, third, third}}, cellEdge}, possible{"R centring (reverse)", nil, [][3]int{{third, 2 * third, third}}, cellEdge})
	}
	return out
}

// orderOf is the order of a proper rotation, by its trace.
func orderOf(o crystal.Op) int {
	return map[int8]int{3: 1, -1: 2, 0: 3, 1: 4, 2: 6}[o.R[0][0]+o.R[1][1]+o.R[2][2]]
}

func imageOf(o crystal.Op, v [3]int) (out [3]int) {
	for i := range 3 {
		for j := range 3 {
			out[i] += int(o.R[i][j]) * v[j]
		}
	}
	return out
}

// axisOf is the axis of a proper rotation as a primitive direction of the cell: the sum
// of all powers projects on it.
func axisOf(o crystal.Op) [3]int {
	for _, v := range [][3]int{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}} {
		var sum [3]int
		for range orderOf(o) {
			for i := range 3 {
				sum[i] += v[i]
			}
			v = imageOf(o, v)
		}
		divisor := 0
		for _, x := range sum {
			divisor = greatestCommon(divisor, x)
		}
		if divisor != 0 {
			return [3]int{sum[0] / divisor, sum[1] / divisor, sum[2] / divisor}
		}
	}
	return [3]int{}
}

func greatestCommon(a, b int) int {
	for b != 0 {
		a, b = b, a%b
	}
	return max(a, -a)
}

// shortestAlong is the shortest lattice vector along a primitive direction.
func shortestAlong(u [3]int, lattice [][3]int) [3]int {
	for k := 1; k < cellEdge; k++ {
		if v := [3]int{k * u[0], k * u[1], k * u[2]}; slices.ContainsFunc(lattice, func(l [3]int) bool {
			return (l[0]-v[0])%cellEdge == 0 && (l[1]-v[1])%cellEdge == 0 && (l[2]-v[2])%cellEdge == 0
		}) {
			return v
		}
	}
	return [3]int{cellEdge * u[0], cellEdge * u[1], cellEdge * u[2]}
}

// screwName names the screw n_k with the one that turns the other way, whose
// absences are the same.
func screwName(n, k int) string {
	if 2*k == n {
		return fmt.Sprintf("%d_%d", n, k)
	}
	return fmt.Sprintf("%d_%d or %d_%d", n, k, n, n-k)
}

// glideLetter is the letter of a glide by half the lattice vector v (International
// Tables A, 2.1.2).
func glideLetter(v [3]int) string {
	halves, quarters := "", false
	for j, x := range v {
		switch {
		case x%(2*cellEdge) == 0:
		case x%cellEdge == 0:
			halves += "abc"[j : j+1]
		default:
			quarters = true
		}
	}
	switch {
	case quarters:
		return "d"
	case len(halves) == 1:
		return halves
	}
	return "n"
}

func directionName(v [3]int) string {
	for j := range 3 {
		var edge [3]int
		if edge[j] = 1; v == edge {
			return "abc"[j : j+1]
		}
	}
	return fmt.Sprintf("[%d%d%d]", v[0], v[1], v[2])
}
