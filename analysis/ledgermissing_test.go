package analysis

import (
	"slices"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// Take the screws and glides out of a group and the list of possible elements holds each of
// them again, by exactly the reflections that it forbids; take the centring out, and
// likewise. The conditions themselves are tested in crystal against the tables.
func TestMissingElementsHoldEveryElement(t *testing.T) {
	cell := crystal.Cell{A: 9, B: 9, C: 9, Alpha: 90, Beta: 90, Gamma: 90} // only the indices matter here
	rows := &intensity.Columns{}
	for h := int16(-8); h <= 8; h++ {
		for k := int16(-8); k <= 8; k++ {
			for l := int16(-8); l <= 8; l++ {
				if h != 0 || k != 0 || l != 0 {
					rows.H, rows.K, rows.L = append(rows.H, h), append(rows.K, k), append(rows.L, l)
					rows.I, rows.Sigma = append(rows.I, 1), append(rows.Sigma, 1)
				}
			}
		}
	}
	for _, symbol := range []string{
		"P 1 21 1", "P 1 c 1", "P 1 21/n 1", "C 1 c 1", "P 21 21 2", "P 21 21 21", "C 2 2 21", "P n m a", "P b c a", "P c c n", "I b c a", "F d d d", "C m c e",
		"P 41", "P 42", "I 41", "P 43 21 2", "P 4/n c c", "I 41/a c d", "P 31", "P 31 2 1", "R 3 c", "P 63", "P 61 2 2", "P 62", "P 63/m m c", "P 21 3", "P a -3", "P 41 3 2", "F d -3 m", "I a -3 d", "P n -3 n",
	} {
		g, err := crystal.Lookup(symbol)
		if err != nil {
			t.Fatal(err)
		}
		plain := without(t, g, false)
		cat, err := intensity.NewCatalogue(cell, plain, rows)
		if err != nil {
			t.Fatal(err)
		}
		list := missingElements(plain, cat)
		primitive := without(t, g, true)
		whole, err := intensity.NewCatalogue(cell, primitive, rows)
		if err != nil {
			t.Fatal(err)
		}
		centrings := missingElements(primitive, whole)
		for e, element := range g.Elements() {
			in, of := cat, list
			if element.Kind == crystal.CentringElement {
				in, of = whole, centrings
			}
			want := make([]bool, in.Len())
			for u, h := range in.HKL {
				want[u] = !in.Absent[u] && slices.Contains(g.ForbiddenBy(h), e)
			}
			k := slices.IndexFunc(of, func(m missing) bool { return slices.Equal(m.forbids, want) })
			if k < 0 {
				t.Errorf("%s: %s is not among the %d possible elements", symbol, element.Name, len(of))
			}
		}
		for _, m := range missingElements(g, mustCatalogue(t, cell, g, rows)) {
			for _, e := range g.Elements() {
				if m.name == e.Name {
					t.Errorf("%s has %s and is said to lack it", symbol, m.name)
				}
			}
		}
	}
}

func mustCatalogue(t *testing.T, cell crystal.Cell, g *crystal.Group, rows *intensity.Columns) *intensity.Catalogue {
	t.Helper()
	cat, err := intensity.NewCatalogue(cell, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	return cat
}

// without is the group of the rotation parts alone, with or without the centring.
func without(t *testing.T, g *crystal.Group, centring bool) *crystal.Group {
	t.Helper()
	var ops []crystal.Op
	for _, o := range g.Operators() {
		for _, c := range g.Operators() {
			if c.R == crystal.Identity().R && (!centring || c.T == [3]int8{}) {
				ops = append(ops, crystal.Op{R: o.R, T: c.T})
			}
		}
	}
	out, err := crystal.FromOperators(ops)
	if err != nil {
		t.Fatal(err)
	}
	return out
}
