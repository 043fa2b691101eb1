package crystal

import (
	"errors"
	"fmt"
	"strings"
)

// maxOperators bounds a group: 48 rotations times 64 lattice points in a cell,
// far above the 192 of the largest tabulated setting.
const maxOperators = 48 * 64

// Group is a space group in one setting: a closed list of operators with what
// follows from them. Make one with Lookup, FromHall, FromOperators or
// ParseOperators; it does not change afterwards and may be shared between
// goroutines.
type Group struct {
	ops      []Op     // all of them, in the order given
	lattice  [][3]int // centring translations in 24ths, zero first
	coset    []Op     // one for each rotation part, identity first
	point    pointGroup
	setting  Setting // zero when the type was not identified
	shift    [3]int  // origin shift from the setting, in 24ths
	half     []weights
	turns    []turn
	elements []Element
	packing  packing
}

// FromOperators makes a group of a complete list of operators, centring
// translations and inversion written out; their order is kept and repeats are
// dropped. A list that is not closed under composition is an error naming what
// is missing; so are a rotation part that fits no lattice and an empty list. The
// list need not be a tabulated setting: when it is, Number, HM and Hall say
// which; when it is one with its origin moved, they and OriginShift do.
func FromOperators(ops []Op) (*Group, error) {
	if len(ops) == 0 {
		return nil, errors.New("no symmetry operators")
	}
	given := make(map[Op]bool, len(ops))
	kept := make([]Op, 0, len(ops))
	for i, o := range ops {
		if err := o.check(); err != nil {
			return nil, fmt.Errorf("operator %d, %s: %w", i+1, o, err)
		}
		for j := range o.T {
			o.T[j] = int8(mod(int(o.T[j]), Twentyfourths))
		}
		if !given[o] {
			given[o] = true
			kept = append(kept, o)
		}
	}
	all, err := closure(kept)
	if err != nil {
		return nil, err
	}
	if len(all) > len(kept) {
		return nil, incomplete(kept, all, given)
	}
	g, err := newGroup(kept)
	if err != nil {
		return nil, err
	}
	return g.settle(identify(g)), nil
}

func incomplete(kept, all []Op, given map[Op]bool) error {
	var missing []string
	for _, o := range all {
		if !given[o] {
			missing = append(missing, o.String())
		}
	}
	n := len(missing)
	more := ""
	if n > 4 {
		missing, more = missing[:4], fmt.Sprintf(" and %d more", n-4)
	}
	return fmt.Errorf("list of %d symmetry operators is not complete: composing them gives %d; missing %s%s",
		len(kept), len(all), strings.Join(missing, "; "), more)
}

// closure returns the group that ops generate: identity first, then ops in their
// order, then what composing them adds.
func closure(ops []Op) ([]Op, error) {
	seen := map[Op]bool{Identity(): true}
	all := []Op{Identity()}
	for _, o := range ops {
		if !seen[o] {
			seen[o] = true
			all = append(all, o)
		}
	}
	gens := all[1:len(all):len(all)]
	for i := 0; i < len(all); i++ {
		for _, q := range gens {
			p := q.Compose(all[i])
			if seen[p] {
				continue
			}
			if err := p.check(); err != nil || len(all) == maxOperators {
				return nil, fmt.Errorf("symmetry operators %s and %s generate more operators than any space group has", q, all[i])
			}
			seen[p] = true
			all = append(all, p)
		}
	}
	return all, nil
}

// newGroup derives everything but the tabulated setting from a closed list.
func newGroup(ops []Op) (*Group, error) {
	g := &Group{ops: ops, lattice: [][3]int{{}}}
	first := map[[3][3]int8]bool{Identity().R: true}
	g.coset = []Op{Identity()}
	for _, o := range ops {
		if o.R == Identity().R {
			if o.T != ([3]int8{}) {
				g.lattice = append(g.lattice, [3]int{int(o.T[0]), int(o.T[1]), int(o.T[2])})
			}
			continue
		}
		if !first[o.R] {
			first[o.R] = true
			g.coset = append(g.coset, o)
		}
	}
	var err error
	if g.point, err = classify(g.coset); err != nil {
		return nil, err
	}
	g.prepare()
	return g, nil
}

// settle records the tabulated setting and names the elements, which follow the
// symbol of the setting where it leaves a choice.
func (g *Group) settle(s Setting, shift [3]int) *Group {
	g.setting, g.shift = s, shift
	g.elements = findElements(g)
	return g
}

// Number is the number of the space-group type in International Tables, 1 to
// 230, or 0 when the operators are neither a tabulated setting nor one with its
// origin moved.
func (g *Group) Number() int { return g.setting.Number }

// HM is the Hermann-Mauguin symbol of the setting, such as "P 21 21 21",
// "P 1 21/n 1", "R -3 c :H" or "F d d d :2", empty when Number is 0. Lookup reads
// it back; an OriginShift is not part of it.
func (g *Group) HM() string { return g.setting.Symbol() }

// Choice is the tabulated choice of axes, cell or origin, such as "b1", "cab",
// "2", "H"; empty where there is only one.
func (g *Group) Choice() string { return g.setting.Choice }

// Hall is the Hall symbol of the setting, with the origin shift when there is
// one; empty when Number is 0.
func (g *Group) Hall() string { return g.setting.shiftedHall(g.shift) }

// OriginShift is the vector in 24ths that was added to coordinates of the
// tabulated setting to give these operators; zero for the setting itself.
func (g *Group) OriginShift() [3]int { return g.shift }

// PointGroup is the crystal class, one of the 32 symbols such as "222", "-42m",
// "m-3m", whatever the orientation.
func (g *Group) PointGroup() string { return g.point.class }

// PointGroupSetting is the crystal class with its orientation: "321" or "312",
// "-42m" or "-4m2", "2mm" or "mm2", "1 2/m 1" or "1 1 2/m"; "32" and the like
// alone mean rhombohedral axes.
func (g *Group) PointGroupSetting() string { return g.point.oriented }

// LaueClass is one of the 11 Laue classes: -1, 2/m, mmm, 4/m, 4/mmm, -3, -3m,
// 6/m, 6/mmm, m-3, m-3m.
func (g *Group) LaueClass() string { return g.point.laue }

// LaueSetting is the Laue class with its orientation: "-3m1", "-31m", or "-3m"
// for rhombohedral axes; "1 2/m 1" and the like.
func (g *Group) LaueSetting() string { return g.point.laueOriented }

// System is the crystal system: triclinic, monoclinic, orthorhombic, tetragonal,
// trigonal, hexagonal or cubic.
func (g *Group) System() string { return g.point.system }

// Centring is the letter of the lattice: P, A, B, C, I, F, R (obverse), or
// "R (reverse)", "H", and for a lattice without a letter the list of its
// translations. A rhombohedral lattice on rhombohedral axes is P.
func (g *Group) Centring() string { return centringName(g.lattice) }

// Operators returns a copy of the complete list, centring included.
func (g *Group) Operators() []Op { return append([]Op(nil), g.ops...) }

// Order is the number of operators, centring included.
func (g *Group) Order() int { return len(g.ops) }

// Centrosymmetric reports whether the point group holds the inversion.
func (g *Group) Centrosymmetric() bool { return g.point.inversion }

// Chiral reports whether the group holds proper rotations and screws only (the
// 65 types in which one hand of a molecule can crystallise).
func (g *Group) Chiral() bool { return g.point.proper }

// String is the Hermann-Mauguin symbol, or the point group and centring when the
// operators are of no tabulated type.
func (g *Group) String() string {
	if s := g.HM(); s != "" {
		return s
	}
	return fmt.Sprintf("untabulated group of %d operators, point group %s, centring %s", len(g.ops), g.point.oriented, g.Centring())
}
