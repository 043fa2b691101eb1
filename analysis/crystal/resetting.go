package crystal

import (
	"fmt"
	"strings"
)

// Cell is the cell that goes with the new indices when c goes with the old ones:
// indices transform like basis vectors, so that the new vector j is the sum over i of
// M_ij/Den times the old one i.
func (r Reindexing) Cell(c Cell) Cell { return reindexedCell(c, rational{r.M, max(r.Den, 1)}) }

// Group is the space group that goes with the new indices when g goes with the old
// ones: coordinates become M^-1 x, and an operator (W, w) becomes
// (M^-1 W M, M^-1 w) (Arnold 2005, International Tables A, 5.2.2). It is an error
// when M has a determinant other than 1 or -1, or Den is not 1: such a change makes
// another lattice.
func (r Reindexing) Group(g *Group) (*Group, error) {
	m := matrix(r.M)
	d := det(m)
	if r.Den > 1 || d != 1 && d != -1 {
		return nil, fmt.Errorf("%s does not keep the cell volume", r)
	}
	inverse := adjugate(m)
	for i := range 3 {
		for j := range 3 {
			inverse[i][j] *= d
		}
	}
	ops := make([]Op, 0, len(g.ops))
	for _, o := range g.ops {
		w := inverse.times(widen(o.R)).times(m)
		t := inverse.column([3]int{int(o.T[0]), int(o.T[1]), int(o.T[2])})
		var n Op
		for i := range 3 {
			for j := range 3 {
				n.R[i][j] = int8(w[i][j])
			}
			n.T[i] = int8(mod(t[i], Twentyfourths))
		}
		ops = append(ops, n)
	}
	return FromOperators(ops)
}

// ParseReindexing reads "k,h,-l" or "h,k,h+l": each new index as a sum of the old
// ones. A constant in it, or a determinant other than 1 or -1 (which ParseOp refuses), is
// an error.
func ParseReindexing(text string) (Reindexing, error) {
	if strings.ContainsAny(text, "xyzXYZ") {
		return Reindexing{}, fmt.Errorf("%q is no change of indices: write it with h, k, l", text)
	}
	op, err := ParseOp(strings.NewReplacer("h", "x", "k", "y", "l", "z", "H", "x", "K", "y", "L", "z").Replace(text))
	if err != nil {
		return Reindexing{}, fmt.Errorf("%q is no change of indices: %w", text, err)
	}
	if op.T != [3]int8{} {
		return Reindexing{}, fmt.Errorf("%q is no change of indices: it holds a constant", text)
	}
	out := Reindexing{Den: 1}
	for i := range 3 {
		for j := range 3 {
			out.M[j][i] = int(op.R[i][j])
		}
	}
	return out, nil
}
