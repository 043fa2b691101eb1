package intensity

import (
	"errors"
	"math/rand/v2"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

var tarnCell = crystal.Cell{A: 24.1, B: 29.3, C: 34.7, Alpha: 90, Beta: 90, Gamma: 90}

func lookup(t testing.TB, symbol string) *crystal.Group {
	t.Helper()
	g, err := crystal.Lookup(symbol)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// indices makes columns of intensity 1 from indices.
func indices(hkl ...crystal.HKL) *Columns {
	c := &Columns{}
	for _, x := range hkl {
		c.H, c.K, c.L = append(c.H, int16(x.H)), append(c.K, int16(x.K)), append(c.L, int16(x.L))
		c.I, c.Sigma = append(c.I, 1), append(c.Sigma, 1)
	}
	return c
}

func TestCatalogue(t *testing.T) {
	g := lookup(t, "P 21 21 21")
	a := indices(crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: -1, K: -2, L: 3}, crystal.HKL{H: 3}, crystal.HKL{H: 1, K: 2, L: 3})
	b := indices(crystal.HKL{H: -1, K: -2, L: -3}, crystal.HKL{K: 2, L: 1}, crystal.HKL{L: 4})
	c, err := NewCatalogue(tarnCell, g, a, b)
	if err != nil {
		t.Fatal(err)
	}
	if c.Len() != 4 || c.RawLen() != 6 {
		t.Fatalf("%d unique of %d raw indices: %v", c.Len(), c.RawLen(), c.HKL)
	}
	ua, err := c.Assign(a)
	if err != nil {
		t.Fatal(err)
	}
	ub, err := c.Assign(b)
	if err != nil {
		t.Fatal(err)
	}
	if ua[0] != ua[1] || ua[0] != ua[3] || ua[0] != ub[0] {
		t.Errorf("equivalents and Friedel mates are apart: %v, %v", ua, ub)
	}
	ra, rb := c.RawIDs(a), c.RawIDs(b)
	if ra[0] != ra[3] || ra[0] == ra[1] || ra[0] == rb[0] {
		t.Errorf("raw indices: %v, %v", ra, rb)
	}
	if c.RawHKL(ra[1]) != (crystal.HKL{H: -1, K: -2, L: 3}) || c.RawUnique(ra[1]) != ua[1] {
		t.Error("the raw table does not lead back")
	}
	if !c.Absent[ua[2]] || c.Absent[ub[2]] || !c.Centric[ub[1]] || c.Centric[ua[0]] || c.Epsilon[ub[2]] != 2 || c.Epsilon[ua[0]] != 1 {
		t.Error("3 0 0 is forbidden, 0 2 1 centric, 0 0 4 has epsilon 2 in this group")
	}
	floatcmp.Check(t, "s2", c.S2[ub[2]], 16/(4*34.7*34.7), 0, 1e-12)
	var row *RowError
	if _, err = c.Assign(indices(crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: 9})); !errors.As(err, &row) || row.Row != 1 {
		t.Errorf("an unknown index: %v", err)
	}
}

func TestCatalogueApart(t *testing.T) {
	g := lookup(t, "P 21 21 21")
	rows := indices(crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: -1, K: -2, L: -3}, crystal.HKL{H: -1, K: -2, L: 3}, crystal.HKL{K: 2, L: 1}, crystal.HKL{K: -2, L: -1})
	c, err := NewCatalogueApart(tarnCell, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	u, err := c.Assign(rows)
	if err != nil {
		t.Fatal(err)
	}
	if u[0] == u[1] || u[0] != u[2] || u[3] != u[4] || c.Len() != 3 {
		t.Errorf("mates apart: %v of %v", u, c.HKL)
	}
	if !c.Plus[u[0]] || c.Plus[u[1]] || !c.Plus[u[3]] {
		t.Errorf("sides: %v for %v", c.Plus, c.HKL)
	}
}

func TestCatalogueSearchesWhereTheBoxIsLarge(t *testing.T) {
	g := lookup(t, "P 1")
	rows := indices(crystal.HKL{H: 30000, K: 1, L: -20000}, crystal.HKL{H: -30000, K: 30000, L: 5}, crystal.HKL{H: 1, K: 1, L: 1})
	c, err := NewCatalogue(crystal.Cell{A: 900, B: 900, C: 900, Alpha: 90, Beta: 90, Gamma: 90}, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	ids := c.RawIDs(rows)
	for r, id := range ids {
		if want := (crystal.HKL{H: int(rows.H[r]), K: int(rows.K[r]), L: int(rows.L[r])}); id < 0 || c.RawHKL(id) != want {
			t.Errorf("row %d has raw index %d", r, id)
		}
	}
	if id := c.RawIDs(indices(crystal.HKL{H: 2, K: 1, L: 1})); id[0] != -1 {
		t.Errorf("an unknown index has number %d", id[0])
	}
}

func TestCatalogueErrors(t *testing.T) {
	if _, err := NewCatalogue(crystal.Cell{}, lookup(t, "P 1")); err == nil {
		t.Error("a cell of zeros is accepted")
	}
	if _, err := NewCatalogue(tarnCell, nil); err == nil {
		t.Error("no group is accepted")
	}
	if _, err := NewCatalogue(tarnCell, lookup(t, "P 1"), &Columns{I: []float64{1}}); err == nil {
		t.Error("columns of unequal length are accepted")
	}
	if c, err := NewCatalogue(tarnCell, lookup(t, "P 1")); err != nil || c.Len() != 0 {
		t.Errorf("no sets: %v, %v", c, err)
	}
}

func TestCatalogueMeans(t *testing.T) {
	g := lookup(t, "P 21 21 21")
	rows := indices(crystal.HKL{H: 1, K: 2, L: 3}, crystal.HKL{H: 2, K: 2, L: 3}, crystal.HKL{H: 3}, crystal.HKL{H: 4})
	c, err := NewCatalogue(tarnCell, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	u, _ := c.Assign(rows)
	m := Merge(c.Len(), &Scaled{Unique: u, Raw: c.RawIDs(rows), I: []float64{10, 20, 900, 60}, Var: []float64{1, 1, 1, 1}})
	mean, n := c.Means(m, c.Shells(1, m))
	if n[0] != 3 {
		t.Errorf("%d reflections in the mean, want 3 without the forbidden one", n[0])
	}
	floatcmp.Check(t, "mean with epsilon divided out", mean[0], (10+20+60/2.)/3, 0, 1e-14)
}

func BenchmarkCatalogue(b *testing.B) {
	for _, n := range []int{100_000, 1_000_000} {
		r := rand.New(rand.NewPCG(1, 1))
		c := &Columns{H: make([]int16, n), K: make([]int16, n), L: make([]int16, n), I: make([]float64, n), Sigma: make([]float64, n)}
		for i := range n {
			c.H[i], c.K[i], c.L[i] = int16(1+r.IntN(40)), int16(r.IntN(81)-40), int16(r.IntN(81)-40)
			c.I[i], c.Sigma[i] = r.Float64(), 1
		}
		g := lookup(b, "P 21 21 21")
		b.Run(map[int]string{100_000: "rows=1e5", 1_000_000: "rows=1e6"}[n], func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				cat, err := NewCatalogue(tarnCell, g, c)
				if err != nil {
					b.Fatal(err)
				}
				if _, err = cat.Assign(c); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkCollapse(b *testing.B) {
	const n = 1_000_000
	r := rand.New(rand.NewPCG(1, 1))
	c := &Columns{}
	for len(c.I) < n {
		h, k, l, i, f := int16(1+r.IntN(40)), int16(r.IntN(81)-40), int16(r.IntN(81)-40), r.Float64(), int32(r.IntN(900))
		for j := range int32(1 + r.IntN(3)) {
			c.H, c.K, c.L = append(c.H, h), append(c.K, k), append(c.L, l)
			c.I, c.Sigma, c.Frame = append(c.I, i), append(c.Sigma, 1), append(c.Frame, f+j)
		}
	}
	b.Run("rows=1e6", func(b *testing.B) {
		b.ReportAllocs()
		for b.Loop() {
			if _, _, err := Collapse(c, RowsAuto); err != nil {
				b.Fatal(err)
			}
		}
	})
}
