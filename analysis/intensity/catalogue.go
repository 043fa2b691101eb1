package intensity

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/crystal"
)

// Catalogue lists every unique reflection of a series. HKL is the
// representative index, S2 is s^2 = (sin(theta)/lambda)^2 = 1/(4 d^2) in
// 1/angstrom^2, Epsilon the factor by which the group enhances the mean
// intensity of such reflections, Centric and Absent (forbidden) are by group.
// All are parallel and in ascending order of h, k, l.
type Catalogue struct {
	Cell    crystal.Cell
	Group   *crystal.Group
	HKL     []crystal.HKL
	S2      []float64
	Epsilon []int8
	Centric []bool
	Absent  []bool

	// Apart says that Friedel mates are different reflections; Plus is then
	// false for the mate of the representative, whose HKL is the negative.
	Apart bool
	Plus  []bool

	raw rawTable
}

// Len returns the number of unique reflections.
func (c *Catalogue) Len() int { return len(c.HKL) }

// RawLen returns the number of indices as measured, over the whole series.
func (c *Catalogue) RawLen() int { return len(c.raw.key) }

// NewCatalogue collects the unique reflections of all sets, Friedel mates
// together. The sets are those of one series, all on the axes of cell, and may
// be empty. Errors: what Cell.Check refuses, a nil group, sets of unequal
// column lengths.
func NewCatalogue(cell crystal.Cell, group *crystal.Group, sets ...*Columns) (*Catalogue, error) {
	return newCatalogue(cell, group, false, sets)
}

// NewCatalogueApart is NewCatalogue with Friedel mates as different
// reflections (the two mates of a centric reflection stay one).
func NewCatalogueApart(cell crystal.Cell, group *crystal.Group, sets ...*Columns) (*Catalogue, error) {
	return newCatalogue(cell, group, true, sets)
}

func newCatalogue(cell crystal.Cell, group *crystal.Group, apart bool, sets []*Columns) (*Catalogue, error) {
	if err := cell.Check(); err != nil {
		return nil, err
	}
	if group == nil {
		return nil, fmt.Errorf("no space group given")
	}
	for i, s := range sets {
		if err := s.checkLengths(); err != nil {
			return nil, fmt.Errorf("set %d: %w", i, err)
		}
	}
	c := &Catalogue{Cell: cell, Group: group, Apart: apart, raw: newRawTable(sets)}
	c.number()
	c.describe()
	return c, nil
}

// representative returns what the catalogue lists for a measured index.
func (c *Catalogue) representative(h crystal.HKL) (rep crystal.HKL, plus bool) {
	if !c.Apart {
		return c.Group.Canonical(h), true
	}
	rep, plus = c.Group.CanonicalApart(h)
	if !plus {
		rep = crystal.HKL{H: -rep.H, K: -rep.K, L: -rep.L}
	}
	return rep, plus
}

// number gives each raw index the number of its unique reflection.
func (c *Catalogue) number() {
	type found struct {
		rep  crystal.HKL
		plus bool
		raw  int32
	}
	list := make([]found, len(c.raw.key))
	for i, k := range c.raw.key {
		rep, plus := c.representative(unpack(k))
		list[i] = found{rep, plus, int32(i)}
	}
	slices.SortFunc(list, func(a, b found) int {
		return cmp.Or(cmp.Compare(a.rep.H, b.rep.H), cmp.Compare(a.rep.K, b.rep.K), cmp.Compare(a.rep.L, b.rep.L), cmp.Compare(a.raw, b.raw))
	})
	c.raw.unique = make([]int32, len(list))
	for i, f := range list {
		if i == 0 || f.rep != list[i-1].rep {
			c.HKL = append(c.HKL, f.rep)
			c.Plus = append(c.Plus, f.plus)
		}
		c.raw.unique[f.raw] = int32(len(c.HKL) - 1)
	}
}

func (c *Catalogue) describe() {
	n := len(c.HKL)
	c.S2, c.Epsilon = make([]float64, n), make([]int8, n)
	c.Centric, c.Absent = make([]bool, n), make([]bool, n)
	metric := c.Cell.ReciprocalMetric()
	for u, h := range c.HKL {
		c.S2[u] = crystal.InvD2(metric, h) / 4
		c.Epsilon[u] = int8(c.Group.Epsilon(h))
		c.Centric[u] = c.Group.Centric(h)
		c.Absent[u] = c.Group.Absent(h)
	}
}

// Assign returns the number of the unique reflection of each row. A row whose
// index is in none of the sets the catalogue was made from is a *RowError.
func (c *Catalogue) Assign(rows *Columns) ([]int32, error) {
	out := c.RawIDs(rows)
	for r, id := range out {
		if id < 0 {
			return nil, &RowError{r, "index", fmt.Sprintf("%d %d %d is not in the catalogue", rows.H[r], rows.K[r], rows.L[r])}
		}
		out[r] = c.raw.unique[id]
	}
	return out, nil
}

// RawIDs returns the place of each row's index in the series-wide table of
// indices as measured, -1 for an index that is not in the catalogue.
func (c *Catalogue) RawIDs(rows *Columns) []int32 {
	out := make([]int32, rows.Len())
	for r := range out {
		out[r] = c.raw.find(rows.H[r], rows.K[r], rows.L[r])
	}
	return out
}

// RawHKL returns the index as measured with number id of the raw table.
func (c *Catalogue) RawHKL(id int32) crystal.HKL { return unpack(c.raw.key[id]) }

// RawUnique returns the unique reflection that raw index id belongs to.
func (c *Catalogue) RawUnique(id int32) int32 { return c.raw.unique[id] }

// Shells cuts the allowed reflections measured in any of ms (all allowed ones
// when none is given) into n shells of equal count and places every reflection
// of the catalogue in them, the forbidden ones too; -1 outside.
func (c *Catalogue) Shells(n int, ms ...*Merged) *Shells {
	var s2 []float64
	for u, x := range c.S2 {
		if c.Absent[u] {
			continue
		}
		seen := len(ms) == 0
		for _, m := range ms {
			seen = seen || m.N[u] > 0
		}
		if seen {
			s2 = append(s2, x)
		}
	}
	sh := EqualCountShells(s2, n)
	sh.Of = make([]int32, len(c.S2))
	for u, x := range c.S2 {
		sh.Of[u] = int32(sh.Find(x))
	}
	return sh
}

// Means returns the mean of J/epsilon over the allowed, measured reflections of
// each shell, which must have been made by c.Shells, and their number; the mean
// of a shell without any is NaN.
func (c *Catalogue) Means(m *Merged, sh *Shells) (mean []float64, n []int) {
	value := make([]float64, len(c.S2))
	for u := range value {
		value[u] = math.NaN()
		if m.N[u] > 0 && !c.Absent[u] {
			value[u] = m.J[u] / float64(c.Epsilon[u])
		}
	}
	return sh.Means(value, nil)
}
