package crystal

import (
	"slices"
	"strings"
	"testing"
)

// The full Hermann-Mauguin symbol says which rotations, screws, mirrors and glides stand
// along which directions (International Tables A, 1.4.1 and tables 2.1.3.1 and 2.1.2.1,
// definitions from memory). It is read here from the symbol alone and looked for in the
// operators that the Hall symbol expands to, so that the two columns of the table check each
// other in all 530 settings.
func TestOperatorsGoWithTheSymbol(t *testing.T) {
	settings := Tabulated()
	other, told := 0, 0
	for _, s := range settings {
		g, err := s.Group()
		if err != nil {
			t.Fatal(err)
		}
		if missing := symbolMissing(s.Full, g); missing != "" {
			t.Errorf("%d %s, %s: no operator for %s", s.Number, s.Full, s.Hall, missing)
		}
		// A check that any setting passes would be none: most settings of the same type
		// with another symbol fail it.
		for _, o := range settings {
			if o.Number == s.Number && o.Full != s.Full {
				other++
				if symbolMissing(o.Full, g) != "" {
					told++
				}
			}
		}
	}
	t.Logf("%d of %d symbols of another setting are told apart", told, other)
	if told < other*9/10 || other < 1000 {
		t.Errorf("%d of %d symbols of another setting are told apart", told, other)
	}
}

// symbolMissing names the first element of a full symbol that g has not.
func symbolMissing(full string, g *Group) string {
	fields := strings.Fields(full)[1:]
	directions := directionsOf(g, len(fields))
	for k, f := range fields {
		for part := range strings.SplitSeq(f, "/") {
			if part != "1" && !slices.ContainsFunc(directions[k], func(u [3]int) bool { return hasElement(g, part, u) }) {
				return part
			}
		}
	}
	return ""
}

// directionsOf lists, for each place of the symbol, directions that it may refer to.
func directionsOf(g *Group, places int) [][][3]int {
	x, y, z := [3]int{1, 0, 0}, [3]int{0, 1, 0}, [3]int{0, 0, 1}
	body, side := [3]int{1, 1, 1}, [3]int{1, -1, 0}
	switch system := g.System(); {
	case system == "triclinic":
		return [][][3]int{{x}}
	case system == "tetragonal":
		return [][][3]int{{z}, {x}, {side, {1, 1, 0}}}
	case system == "cubic":
		return [][][3]int{{x, y, z}, {body}, {side, {1, 1, 0}}}
	case system == "trigonal" && g.setting.Choice == "R":
		return [][][3]int{{body}, {side}}
	case system == "trigonal" || system == "hexagonal":
		return [][][3]int{{z}, {x}, {side}}
	}
	return [][][3]int{{x}, {y}, {z}}
}

// hasElement looks for a rotation, screw, mirror or glide, as a symbol writes it, along or
// across u.
func hasElement(g *Group, part string, u [3]int) bool {
	if part == "-1" {
		return slices.Contains(g.Operators(), Inversion()) || g.Centrosymmetric()
	}
	if part == "e" { // two glides across one direction
		n := 0
		for _, letter := range []string{"a", "b", "c"} {
			if hasElement(g, letter, u) {
				n++
			}
		}
		return n >= 2
	}
	for _, o := range g.Operators() {
		m := widen(o.R)
		sign := det(m)
		order := properOrder(m, sign)
		if order == 1 || !along(m, sign, u) {
			continue
		}
		if part[0] >= 'a' {
			if sign == -1 && order == 2 && glides(o, part, u) {
				return true
			}
			continue
		}
		want, improper := part, part[0] == '-'
		if improper {
			want = part[1:]
		}
		if improper != (sign == -1) || order != int(want[0]-'0') {
			continue
		}
		step := 0
		if len(want) == 2 {
			step = int(want[1] - '0')
		}
		if improper || screws(o, order, step, u) {
			return true
		}
	}
	return false
}

// properOrder is the order of the rotation in sign times m, by its trace.
func properOrder(m matrix, sign int) int {
	return map[int]int{3: 1, -1: 2, 0: 3, 1: 4, 2: 6}[sign*(m[0][0]+m[1][1]+m[2][2])]
}

// along reports whether the axis of sign times m is u.
func along(m matrix, sign int, u [3]int) bool {
	v := m.column(u)
	return v == [3]int{sign * u[0], sign * u[1], sign * u[2]}
}

// shifted visits the operator's translation, in 24ths, plus every lattice translation
// of up to one cell.
func shifted(o Op, f func(w [3]int) bool) bool {
	for a := -1; a <= 1; a++ {
		for b := -1; b <= 1; b++ {
			for c := -1; c <= 1; c++ {
				if f([3]int{int(o.T[0]) + 24*a, int(o.T[1]) + 24*b, int(o.T[2]) + 24*c}) {
					return true
				}
			}
		}
	}
	return false
}

// turnSum is n times the part of a translation that no choice of origin takes away: the
// sum of W^i w over a whole turn, which is the translation of the n-th power.
func turnSum(o Op, n int, w [3]int) (sum [3]int) {
	for range n {
		for i := range 3 {
			sum[i] += w[i]
		}
		w = widen(o.R).column(w)
	}
	return sum
}

// screws reports whether o is a rotation by 360/order degrees about u, counter-clockwise,
// with a step of step/order along it; step 0 is a rotation. For order 2 the sense is none.
func screws(o Op, order, step int, u [3]int) bool {
	away := [3]int{1, 0, 0}
	if u[1] == 0 && u[2] == 0 {
		away = [3]int{0, 1, 0}
	}
	image := widen(o.R).column(away)
	if order > 2 && det(matrix{u, away, image}) < 0 {
		return false
	}
	return shifted(o, func(w [3]int) bool {
		sum := turnSum(o, order, w)
		for i := range 3 {
			if u[i] == 0 && sum[i] != 0 || mod(sum[i]-24*step*u[i], 24*order) != 0 {
				return false
			}
		}
		return true
	})
}

// glides reports whether the reflection o across u has the glide of the letter.
func glides(o Op, letter string, u [3]int) bool {
	h, q := 24, 12 // twice a half and twice a quarter of an edge, in 24ths
	diagonal := u[0]*u[1] != 0 || u[1]*u[2] != 0
	return shifted(o, func(w [3]int) bool {
		s := turnSum(o, 2, w)
		for i := range 3 {
			s[i] = max(s[i], -s[i])
		}
		switch letter {
		case "m":
			return s == [3]int{}
		case "a":
			return s == [3]int{h, 0, 0}
		case "b":
			return s == [3]int{0, h, 0}
		case "c":
			// On rhombohedral axes c is the half of the body diagonal.
			return s == [3]int{0, 0, h} || s == [3]int{h, h, h}
		case "n":
			if diagonal {
				return s == [3]int{h, h, h}
			}
			return s == across(u, h)
		case "d":
			if diagonal {
				return s == [3]int{q, q, q}
			}
			return s == across(u, q)
		}
		return false
	})
}

// across is v along both edges square to the edge u.
func across(u [3]int, v int) (s [3]int) {
	for i := range 3 {
		if u[i] == 0 {
			s[i] = v
		}
	}
	return s
}
