package crystal

import (
	"fmt"
	"strconv"
	"strings"
)

// FromHall makes the group of a Hall symbol by the rules of Hall (1981, Acta
// Cryst. A37, 517) and International Tables B, A1.4.2: a lattice letter P A B C
// I R S T F or H, with - before it when the inversion lies at the origin; then
// rotations N with an optional axis (x y z ' " *), screw digit and translations
// (a b c n u v w d), the axis implied where the rules imply it; then an optional
// change of origin, "(0 0 1)" in twelfths, or of basis, "(x,y,z+1/12)". A
// quote without an axis before it refers to z. Upper and lower case are alike.
// The error names the part that cannot be read.
func FromHall(symbol string) (*Group, error) {
	if err := tooLong(symbol); err != nil {
		return nil, err
	}
	g, err := expandHall(symbol)
	if err != nil {
		return nil, fmt.Errorf("Hall symbol %q: %w", symbol, err)
	}
	return g.settle(identify(g)), nil
}

// expandHall is FromHall without the search of the table.
func expandHall(symbol string) (*Group, error) {
	text := strings.ToLower(strings.ReplaceAll(strings.TrimSpace(symbol), "_", " "))
	basis := ""
	if i := strings.IndexByte(text, '('); i >= 0 {
		text, basis = strings.TrimSpace(text[:i]), text[i:]
	}
	fields := strings.Fields(text)
	if len(fields) == 0 {
		return nil, fmt.Errorf("empty")
	}
	gens, err := hallLattice(fields[0])
	if err != nil {
		return nil, err
	}
	if len(fields) < 2 {
		return nil, fmt.Errorf("no rotation after the lattice letter")
	}
	if len(fields) > 6 {
		return nil, fmt.Errorf("%d parts; a Hall symbol has at most a lattice and a few rotations", len(fields))
	}
	var before hallRotation
	for i, field := range fields[1:] {
		r, err := parseHallRotation(field, i, before)
		if err != nil {
			return nil, fmt.Errorf("rotation %d, %q: %w", i+1, field, err)
		}
		gens = append(gens, r.op())
		before = r
	}
	if basis != "" {
		v, err := parseHallBasis(basis)
		if err != nil {
			return nil, err
		}
		for i := range gens {
			gens[i] = v.Compose(gens[i]).Compose(v.Inverse())
			if err := gens[i].check(); err != nil {
				return nil, fmt.Errorf("change of basis %s: %w", basis, err)
			}
		}
	}
	ops, err := closure(gens)
	if err != nil {
		return nil, err
	}
	return newGroup(ops)
}

var latticeTranslations = map[byte][][3]int{
	'p': nil,
	'a': {{0, 12, 12}},
	'b': {{12, 0, 12}},
	'c': {{12, 12, 0}},
	'i': {{12, 12, 12}},
	'f': {{0, 12, 12}, {12, 0, 12}, {12, 12, 0}},
	'r': {{16, 8, 8}, {8, 16, 16}},
	's': {{8, 8, 16}, {16, 16, 8}},
	't': {{8, 16, 8}, {16, 8, 16}},
	'h': {{16, 8, 0}, {8, 16, 0}},
}

func hallLattice(field string) ([]Op, error) {
	var gens []Op
	letter := strings.TrimPrefix(field, "-")
	if letter != field {
		gens = append(gens, Inversion())
	}
	if len(letter) != 1 {
		return nil, fmt.Errorf("%q where a lattice letter, alone or after -, was expected", field)
	}
	vectors, ok := latticeTranslations[letter[0]]
	if !ok {
		return nil, fmt.Errorf("lattice letter %q is none of P A B C I R S T F H", strings.ToUpper(letter))
	}
	for _, v := range vectors {
		o := Identity()
		o.T = [3]int8{int8(v[0]), int8(v[1]), int8(v[2])}
		gens = append(gens, o)
	}
	return gens, nil
}

// hallRotation is one N A T part: order of the rotation, axis symbol, screw
// digit, translation in 24ths.
type hallRotation struct {
	improper bool
	n        int
	axis     byte // x y z, or ' " * for diagonals; 0 for order 1
	about    byte // the principal axis that ' and " refer to
	screw    int
	shift    [3]int
}

var hallTranslations = map[byte][3]int{
	'a': {12, 0, 0}, 'b': {0, 12, 0}, 'c': {0, 0, 12}, 'n': {12, 12, 12},
	'u': {6, 0, 0}, 'v': {0, 6, 0}, 'w': {0, 0, 6}, 'd': {6, 6, 6},
}

func parseHallRotation(field string, place int, before hallRotation) (hallRotation, error) {
	var r hallRotation
	text := strings.TrimPrefix(field, "-")
	r.improper = text != field
	if text == "" || strings.IndexByte("12346", text[0]) < 0 {
		return r, fmt.Errorf("begins with no rotation 1, 2, 3, 4 or 6")
	}
	r.n = int(text[0] - '0')
	for _, ch := range []byte(text[1:]) {
		switch {
		case strings.IndexByte("xyz'\"*", ch) >= 0:
			if r.axis != 0 {
				return r, fmt.Errorf("two axes, %c and %c", r.axis, ch)
			}
			r.axis = ch
		case ch >= '1' && ch <= '5':
			if r.screw != 0 {
				return r, fmt.Errorf("two screw digits, %d and %c", r.screw, ch)
			}
			if r.screw = int(ch - '0'); r.screw >= r.n {
				return r, fmt.Errorf("screw digit %d is not less than the order %d", r.screw, r.n)
			}
		default:
			v, ok := hallTranslations[ch]
			if !ok {
				return r, fmt.Errorf("%q is neither axis, screw digit nor translation", ch)
			}
			for i := range 3 {
				r.shift[i] += v[i]
			}
		}
	}
	return r, r.settleAxis(place, before)
}

// settleAxis supplies an implied axis and refuses one that does not go with the
// rotation.
func (r *hallRotation) settleAxis(place int, before hallRotation) error {
	if r.n == 1 {
		if r.axis != 0 || r.screw != 0 {
			return fmt.Errorf("order 1 takes neither axis nor screw digit")
		}
		r.about = before.about
		return nil
	}
	if r.axis == 0 {
		switch {
		case place == 0:
			r.axis = 'z'
		case r.n == 2 && (before.n == 2 || before.n == 4):
			r.axis = 'x'
		case r.n == 2 && (before.n == 3 || before.n == 6):
			r.axis = '\''
		case r.n == 3 && place >= 2:
			r.axis = '*'
		default:
			return fmt.Errorf("no axis is implied here; write x, y, z, ', \" or *")
		}
	}
	switch r.axis {
	case '\'', '"':
		if r.n != 2 {
			return fmt.Errorf("axis %c goes with order 2 only", r.axis)
		}
		if r.about = before.about; r.about == 0 {
			r.about = 'z'
		}
	case '*':
		if r.n != 3 {
			return fmt.Errorf("axis * goes with order 3 only")
		}
		r.about = before.about
	default:
		r.about = r.axis
	}
	if r.screw != 0 && (r.axis == '*' || r.axis == '\'' || r.axis == '"') {
		return fmt.Errorf("a screw digit goes with the axes x, y, z only")
	}
	return nil
}

// aboutZ holds the rotations about z, and the diagonal ones that refer to z.
var aboutZ = map[byte]matrix{
	'2':  {{-1, 0, 0}, {0, -1, 0}, {0, 0, 1}},
	'3':  {{0, -1, 0}, {1, -1, 0}, {0, 0, 1}},
	'4':  {{0, -1, 0}, {1, 0, 0}, {0, 0, 1}},
	'6':  {{1, -1, 0}, {1, 0, 0}, {0, 0, 1}},
	'\'': {{0, -1, 0}, {-1, 0, 0}, {0, 0, -1}},
	'"':  {{0, 1, 0}, {1, 0, 0}, {0, 0, -1}},
}

func (r hallRotation) op() Op {
	m := matrix{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}
	switch {
	case r.n == 1:
	case r.axis == '*':
		m = matrix{{0, 0, 1}, {1, 0, 0}, {0, 1, 0}}
	case r.axis == '\'' || r.axis == '"':
		m = turned(aboutZ[r.axis], r.about)
	default:
		m = turned(aboutZ['0'+byte(r.n)], r.about)
	}
	o := Op{}
	for i := range 3 {
		for j := range 3 {
			o.R[i][j] = int8(m[i][j])
			if r.improper {
				o.R[i][j] = -o.R[i][j]
			}
		}
	}
	if r.screw != 0 {
		r.shift[r.about-'x'] += Twentyfourths / r.n * r.screw
	}
	for i := range 3 {
		o.T[i] = int8(mod(r.shift[i], Twentyfourths))
	}
	return o
}

// turned moves a matrix written for the axis z to another principal axis by the
// cyclic exchange of axes.
func turned(m matrix, axis byte) matrix {
	k := int(axis-'x') + 1 // z: 3, so nothing moves; x: 1; y: 2
	var t matrix
	for i := range 3 {
		for j := range 3 {
			t[(i+k)%3][(j+k)%3] = m[i][j]
		}
	}
	return t
}

// parseHallBasis reads "(0 0 1)" or "(x,y,z+1/12)" as an operator that takes old
// coordinates to new ones.
func parseHallBasis(text string) (Op, error) {
	inner, ok := strings.CutSuffix(strings.TrimPrefix(strings.TrimSpace(text), "("), ")")
	if !ok {
		return Op{}, fmt.Errorf("change of origin %q has no closing bracket at its end", text)
	}
	if strings.Contains(inner, ",") {
		v, err := ParseOp(inner)
		if err != nil {
			return Op{}, fmt.Errorf("change of basis %q: %w", text, err)
		}
		return v, nil
	}
	fields := strings.Fields(inner)
	if len(fields) != 3 {
		return Op{}, fmt.Errorf("change of origin %q has %d numbers, want 3 whole twelfths", text, len(fields))
	}
	v := Identity()
	for i, field := range fields {
		n, err := strconv.Atoi(field)
		if err != nil || abs(n) > 12 {
			return Op{}, fmt.Errorf("change of origin %q: %q is not a whole number of twelfths", text, field)
		}
		v.T[i] = int8(mod(2*n, Twentyfourths))
	}
	return v, nil
}
