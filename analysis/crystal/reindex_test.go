package crystal

import (
	"slices"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func mustLookup(t testing.TB, symbol string) *Group {
	t.Helper()
	g, err := Lookup(symbol)
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// parseIndices reads "k,h,-l" as a matrix acting on index rows.
func parseIndices(t *testing.T, text string) matrix {
	t.Helper()
	o, err := ParseOp(strings.NewReplacer("h", "x", "k", "y", "l", "z").Replace(text))
	if err != nil {
		t.Fatal(err)
	}
	var m matrix
	for i := range 3 {
		for j := range 3 {
			m[j][i] = int(o.R[i][j]) // component i of the new row is column i of m
		}
	}
	return m
}

// Expected cosets: those of the point group in the rotation group of the lattice, by a
// second enumeration; they agree with the standard tables of merohedry as remembered.
// Any member of a coset would do, so membership is compared.
func TestAlternativeIndexings(t *testing.T) {
	hexagonal := Cell{40, 40, 57, 90, 90, 120}
	tetragonal := Cell{40, 40, 57, 90, 90, 90}
	cubic := Cell{40, 40, 40, 90, 90, 90}
	general := Cell{24.1, 31.7, 45.3, 90, 90, 90}
	trigonal := []string{"h,k,l", "-h,-k,l", "k,h,-l", "-k,-h,-l"}
	for _, c := range []struct {
		symbols string
		cell    Cell
		want    []string
	}{
		{"P3;P31;P-3", hexagonal, trigonal},
		{"P312;P321;P3121;P3112", hexagonal, []string{"h,k,l", "-h,-k,l"}},
		{"R3:H;R-3:H;P6;P61;P63;P-6", hexagonal, []string{"h,k,l", "k,h,-l"}},
		{"R32:H;P622;P6122;P-6m2;P6/mmm", hexagonal, []string{"h,k,l"}},
		{"P4;P41;I4;P-4;I41/a", tetragonal, []string{"h,k,l", "k,h,-l"}},
		{"P422;P-42m;P4mm;I41/amd", tetragonal, []string{"h,k,l"}},
		{"P23;P213;I213;Pa-3;F23", cubic, []string{"h,k,l", "k,h,-l"}},
		{"P432;F-43m;Ia-3d", cubic, []string{"h,k,l"}},
		{"P222;P212121;Pm;Fdd2;C2/c", general, []string{"h,k,l"}},
	} {
		for symbol := range strings.SplitSeq(c.symbols, ";") {
			g := mustLookup(t, symbol)
			if g.System() == "monoclinic" {
				c.cell.Beta = 97.3
			}
			got := AlternativeIndexings(g, c.cell, 0.1)
			if len(got) != len(c.want) || !got[0].Identity() {
				t.Errorf("%s: %v, want cosets of %v", symbol, got, c.want)
				continue
			}
			for _, text := range c.want {
				want := rational{parseIndices(t, text), 1}
				if !slices.ContainsFunc(got, func(r Reindexing) bool { return sameCoset(g, rational{r.M, r.Den}, want) }) {
					t.Errorf("%s: no coset of %s among %v", symbol, text, got)
				}
			}
		}
	}
}

func sameCoset(g *Group, a, b rational) bool {
	for _, o := range g.coset {
		p, _, _ := properPart(widen(o.R))
		if a.times(rational{p, 1}) == b {
			return true
		}
	}
	return false
}

// Lattices with more symmetry than the group by the accident of their cell, and
// the tolerance that decides.
func TestPseudoSymmetry(t *testing.T) {
	root3 := 1.7320508075688772
	for _, c := range []struct {
		symbol    string
		cell      Cell
		tolerance float64
		n         int
		contains  string // the text of one, empty for none
	}{
		// beta near 90: twofold axes along a and c, 0.4 degrees oblique.
		{"P 1 21 1", Cell{20, 30, 40, 90, 90.4, 90}, 1, 2, "h,-k,-l"},
		{"P 1 21 1", Cell{20, 30, 40, 90, 90.4, 90}, 0.3, 1, ""},
		// a = c: the bisectors of a and c.
		{"P 1 21 1", Cell{20, 30, 20, 90, 103, 90}, 0, 2, "l,-k,h"},
		{"P 1 21 1", Cell{20, 30, 20.1, 90, 103, 90}, 0, 1, ""},
		// a near b in an orthorhombic cell: 10 and 10.1 put [110] 0.57 degrees off.
		{"P 21 21 21", Cell{10, 10.1, 25, 90, 90, 90}, 1, 2, "k,h,-l"},
		{"P 21 21 21", Cell{10, 10.1, 25, 90, 90, 90}, 0.5, 1, ""},
		// Three equal edges: all of the cube, 24 rotations over the 4 of 222.
		{"P 21 21 21", Cell{30, 30, 30, 90, 90, 90}, 0.1, 6, "k,l,h"},
		{"P 1", Cell{30, 30, 30, 90, 90, 90}, 0.1, 24, "k,l,h"},
		{"P -1", Cell{30, 30, 30, 90, 90, 90}, 0.1, 24, "k,l,h"},
		// A C-centred cell with b = a sqrt 3 is hexagonal.
		{"C 2 2 21", Cell{10, 10 * root3, 31, 90, 90, 90}, 0.1, 3, ""},
		// Rhombohedral at 60 degrees is face-centred cubic: 24 over 3.
		{"R 3 :R", Cell{20, 20, 20, 60, 60, 60}, 0.1, 8, ""},
		{"R 3 2 :R", Cell{20, 20, 20, 85, 85, 85}, 0.1, 1, ""},
		{"R 3 :R", Cell{20, 20, 20, 85, 85, 85}, 0.1, 2, "-k,-h,-l"},
		// A group whose cell is a little off its own symmetry keeps that symmetry.
		{"P 4", Cell{40, 40.4, 57, 90, 90, 90}, 0, 2, "k,h,-l"},
		{"P 1", Cell{10, 11, 12, 80, 95, 110}, 3, 1, ""},
		{"P 1", Cell{10, 11, 12, 80, 95, 300}, 3, 1, ""},
	} {
		g := mustLookup(t, c.symbol)
		got := AlternativeIndexings(g, c.cell, c.tolerance)
		if len(got) != c.n || !got[0].Identity() {
			t.Errorf("%s %s within %g: %v, want %d", c.symbol, c.cell, c.tolerance, got, c.n)
			continue
		}
		if c.contains != "" && !slices.ContainsFunc(got, func(r Reindexing) bool { return r.String() == c.contains }) {
			t.Errorf("%s: %v lacks %s", c.symbol, got, c.contains)
		}
		box(3, func(h HKL) {
			for _, r := range got {
				if !g.centringForbids(int64(h.H), int64(h.K), int64(h.L)) && !r.Maps(h) {
					t.Errorf("%s: %s has no image of %v", c.symbol, r, h)
				}
			}
		})
	}
}

// Re-indexing leaves spacings as they are, to the tolerance, and its text is what
// it does.
func TestReindexing(t *testing.T) {
	root3 := 1.7320508075688772
	cell := Cell{10, 10 * root3, 31, 90, 90, 90}
	options := AlternativeIndexings(mustLookup(t, "C 2 2 21"), cell, 0.1)
	for _, r := range options {
		box(4, func(h HKL) {
			if (h.H+h.K)%2 == 0 {
				floatcmp.Check(t, r.String(), cell.InvD2(r.Apply(h)), cell.InvD2(h), 1e-12, 1e-9)
			}
		})
	}
	if options[1].Den != 2 || options[1].Maps(HKL{1, 0, 0}) || !options[1].Maps(HKL{1, 1, 0}) {
		t.Errorf("%s: denominator %d", options[1], options[1].Den)
	}
	if got := (Reindexing{M: [3][3]int{{1, 1, 0}, {3, -1, 0}, {0, 0, -2}}, Den: 2}).String(); got != "(h+3k)/2,(h-k)/2,-l" {
		t.Error(got)
	}
	r := AlternativeIndexings(mustLookup(t, "P 21 21 21"), Cell{10, 10.1, 25, 90, 90, 90}, 1)[1]
	floatcmp.Check(t, "change of cell", r.Change.Length, 0.1/10.05, 1e-12, 0)
	if r.Apply(HKL{1, 2, 3}) != (HKL{2, 1, -3}) {
		t.Errorf("%s takes 1 2 3 to %v", r, r.Apply(HKL{1, 2, 3}))
	}
}
