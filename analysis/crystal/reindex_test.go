package crystal

import (
	"slices"
	"strings"
	"testing"
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

// Expected cosets: checks 12.5, in agreement with the standard tables of
// merohedry; any member of a coset would do, so membership is compared.
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
