package crystal

import (
	"errors"
	"fmt"
)

// pointGroup is the crystal class of a set of rotation parts.
type pointGroup struct {
	class, oriented    string
	laue, laueOriented string
	system             string
	inversion, proper  bool
	hexagonal          bool // three- or sixfold axis along c
}

// census counts the rotation parts by kind: index is the order of the rotation.
type census struct {
	total         int
	turn, inverse [7]int
	axis          [7][3]int // of the last turn or inverse of that order met
}

// order of a proper rotation by its trace, 0 when it fits no lattice.
func order(trace int) int {
	switch trace {
	case 3:
		return 1
	case -1:
		return 2
	case 0:
		return 3
	case 1:
		return 4
	case 2:
		return 6
	}
	return 0
}

// properPart returns det(R) R, the order of that rotation and its axis as a
// primitive lattice direction (zero for order 1).
func properPart(r matrix) (p matrix, n int, axis [3]int) {
	d := det(r)
	for i := range 3 {
		for j := range 3 {
			p[i][j] = d * r[i][j]
		}
	}
	n = order(p[0][0] + p[1][1] + p[2][2])
	if n < 2 {
		return p, n, axis
	}
	// The sum of all powers projects on the axis.
	sum, power := matrix{}, p
	for range n {
		for i := range 3 {
			for j := range 3 {
				sum[i][j] += power[i][j]
			}
		}
		power = power.times(p)
	}
	for j := range 3 {
		if v := [3]int{sum[0][j], sum[1][j], sum[2][j]}; v != ([3]int{}) {
			return p, n, primitive(v)
		}
	}
	return p, 0, axis
}

func classify(coset []Op) (pointGroup, error) {
	var c census
	twofold, mirror := map[[3]int]bool{}, map[[3]int]bool{}
	for _, o := range coset {
		_, n, axis := properPart(widen(o.R))
		if n == 0 {
			return pointGroup{}, fmt.Errorf("operator %s: the rotation part fits no lattice", o)
		}
		c.total++
		if o.Det() > 0 {
			c.turn[n]++
		} else {
			c.inverse[n]++
		}
		c.axis[n] = axis
		if n == 2 && o.Det() > 0 {
			twofold[axis] = true
		} else if n == 2 {
			mirror[axis] = true
		}
	}
	p := pointGroup{inversion: c.inverse[1] > 0, proper: true}
	for _, n := range c.inverse {
		if n > 0 {
			p.proper = false
		}
	}
	p.class, p.system, p.laue = c.class()
	if p.class == "" {
		return p, errors.New("the rotation parts are no crystallographic point group")
	}
	p.hexagonal = (p.system == "trigonal" || p.system == "hexagonal") && c.axis[3] == [3]int{0, 0, 1}
	p.oriented = orient(p, c, twofold, mirror, p.class)
	p.laueOriented = orient(p, c, twofold, mirror, p.laue)
	return p, nil
}

// class names the crystal class from the number of operations of each kind
// (International Tables A, 10.1.2).
func (c *census) class() (class, system, laue string) {
	inv := c.inverse[1] > 0
	pick := func(cases ...any) string {
		for i := 0; i < len(cases); i += 2 {
			if cases[i].(bool) {
				return cases[i+1].(string)
			}
		}
		return ""
	}
	n := c.total
	switch {
	case c.turn[3] == 8:
		class = pick(n == 12, "23", n == 24 && inv, "m-3", n == 24 && c.turn[4] > 0, "432", n == 24, "-43m", n == 48, "m-3m")
		return class, "cubic", pick(n == 12 || class == "m-3", "m-3", true, "m-3m")
	case c.turn[6] > 0 || c.inverse[6] > 0:
		class = pick(n == 6 && c.turn[6] > 0, "6", n == 6, "-6", n == 12 && inv, "6/m", n == 12 && c.inverse[6] > 0, "-6m2",
			n == 12 && c.turn[2] == 7, "622", n == 12, "6mm", n == 24, "6/mmm")
		return class, "hexagonal", pick(n == 6 || class == "6/m", "6/m", true, "6/mmm")
	case c.turn[3] == 2:
		class = pick(n == 3, "3", n == 6 && inv, "-3", n == 6 && c.turn[2] == 3, "32", n == 6, "3m", n == 12, "-3m")
		return class, "trigonal", pick(n == 3 || class == "-3", "-3", true, "-3m")
	case c.turn[4] > 0 || c.inverse[4] > 0:
		class = pick(n == 4 && c.turn[4] > 0, "4", n == 4, "-4", n == 8 && inv, "4/m", n == 8 && c.inverse[4] > 0, "-42m",
			n == 8 && c.turn[2] == 5, "422", n == 8, "4mm", n == 16, "4/mmm")
		return class, "tetragonal", pick(n == 4 || class == "4/m", "4/m", true, "4/mmm")
	case n == 8 || n == 4 && !inv:
		return pick(n == 8, "mmm", c.turn[2] == 3, "222", true, "mm2"), "orthorhombic", "mmm"
	case c.turn[2] > 0 || c.inverse[2] > 0:
		return pick(n == 4, "2/m", c.turn[2] > 0, "2", true, "m"), "monoclinic", "2/m"
	}
	return pick(inv, "-1", true, "1"), "triclinic", "-1"
}

// orient writes the class with its orientation relative to the cell axes.
func orient(p pointGroup, c census, twofold, mirror map[[3]int]bool, class string) string {
	along := func(v [3]int) bool { return twofold[v] || mirror[v] }
	switch p.system {
	case "monoclinic":
		switch c.axis[2] {
		case [3]int{1, 0, 0}:
			return class + " 1 1"
		case [3]int{0, 1, 0}:
			return "1 " + class + " 1"
		case [3]int{0, 0, 1}:
			return "1 1 " + class
		}
		return class + " along " + direction(c.axis[2])
	case "orthorhombic":
		if class == "mm2" {
			switch {
			case twofold[[3]int{1, 0, 0}]:
				return "2mm"
			case twofold[[3]int{0, 1, 0}]:
				return "m2m"
			}
		}
	case "tetragonal":
		if class == "-42m" && mirror[[3]int{1, 0, 0}] {
			class = "-4m2"
		}
		if c.axis[4] != [3]int{0, 0, 1} {
			return class + " along " + direction(c.axis[4])
		}
	case "hexagonal":
		if class == "-6m2" && twofold[[3]int{1, 0, 0}] {
			return "-62m"
		}
	case "trigonal":
		first := along([3]int{1, 0, 0})
		if !p.hexagonal {
			return class
		}
		switch {
		case class == "32" && first:
			return "321"
		case class == "32":
			return "312"
		case class == "3m" && first, class == "-3m" && first:
			return class + "1"
		case class == "3m", class == "-3m":
			return class[:len(class)-1] + "1m"
		}
	}
	return class
}

// direction writes a lattice direction: "a", "b", "c" or "[1-10]".
func direction(v [3]int) string {
	switch v {
	case [3]int{1, 0, 0}:
		return "a"
	case [3]int{0, 1, 0}:
		return "b"
	case [3]int{0, 0, 1}:
		return "c"
	}
	return fmt.Sprintf("[%d%d%d]", v[0], v[1], v[2])
}
