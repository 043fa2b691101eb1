package crystal

import (
	"math/rand/v2"
	"slices"
	"testing"
)

// Multiplicities by orbit counting in a second implementation, and International
// Tables A, 10.1.2.2, from memory.
func TestMultiplicity(t *testing.T) {
	reflections := []HKL{{1, 0, 0}, {0, 0, 1}, {1, 1, 0}, {1, 0, 1}, {1, 1, 1}, {1, 1, 2}, {2, 1, 0}, {0, 1, 2}, {3, 1, 2}}
	for _, c := range []struct {
		symbol, laue string
		want         [9]int // the last is a general reflection
	}{
		{"P -1", "-1", [9]int{2, 2, 2, 2, 2, 2, 2, 2, 2}},
		{"P 1 21/c 1", "1 2/m 1", [9]int{2, 2, 4, 2, 4, 4, 4, 4, 4}},
		{"P 21 21 21", "mmm", [9]int{2, 2, 4, 4, 8, 8, 4, 4, 8}},
		{"P 41", "4/m", [9]int{4, 2, 4, 8, 8, 8, 4, 8, 8}},
		{"P 41 21 2", "4/mmm", [9]int{4, 2, 4, 8, 8, 8, 8, 8, 16}},
		{"P 31", "-3", [9]int{6, 2, 6, 6, 6, 6, 6, 6, 6}},
		{"P 31 2 1", "-3m1", [9]int{6, 2, 6, 6, 12, 12, 12, 6, 12}},
		{"P 31 1 2", "-31m", [9]int{6, 2, 6, 12, 6, 6, 12, 12, 12}},
		{"P 61", "6/m", [9]int{6, 2, 6, 12, 12, 12, 6, 12, 12}},
		{"P 61 2 2", "6/mmm", [9]int{6, 2, 6, 12, 12, 12, 12, 12, 24}},
		{"P 21 3", "m-3", [9]int{6, 6, 12, 12, 8, 24, 12, 12, 24}},
		{"P 43 3 2", "m-3m", [9]int{6, 6, 12, 12, 8, 24, 24, 24, 48}},
	} {
		g := mustLookup(t, c.symbol)
		if g.LaueSetting() != c.laue {
			t.Errorf("%s: Laue class %s, want %s", c.symbol, g.LaueSetting(), c.laue)
		}
		for i, h := range reflections {
			if got := g.Multiplicity(h); got != c.want[i] {
				t.Errorf("%s %v: multiplicity %d, want %d", c.symbol, h, got, c.want[i])
			}
			if got := len(g.Equivalents(h)); got != c.want[i] {
				t.Errorf("%s %v: %d equivalents, want %d", c.symbol, h, got, c.want[i])
			}
		}
		if g.Multiplicity(HKL{}) != 1 {
			t.Errorf("%s: multiplicity of 000 is %d", c.symbol, g.Multiplicity(HKL{}))
		}
	}
}

// Counts over h, k, l from -6 to 6 without 000, by three routes that agree in
// every cell: the operator rule, the reflection conditions of International Tables A typed
// from memory, and |F| = 0 of five atoms at random places.
func TestAbsencesAndCentrics(t *testing.T) {
	for _, c := range []struct {
		symbol                   string
		absent, centric, present int
	}{
		{"P2_1", 6, 168, 2190}, {"C2", 1092, 90, 1104}, {"P2_1/c", 84, 2112, 2112}, {"C2/c", 1134, 1062, 1062},
		{"P2_12_12_1", 18, 450, 2178}, {"C222_1", 1098, 234, 1098}, {"Fdd2", 1682, 40, 514}, {"Pnma", 162, 2034, 2034},
		{"Fddd", 1698, 498, 498}, {"I4_1", 1102, 84, 1094}, {"I4_1/a", 1138, 1058, 1058}, {"P4_12_12", 22, 734, 2174},
		{"P4_32_12", 22, 734, 2174}, {"P3_1", 8, 0, 2188}, {"P3_121", 8, 472, 2188}, {"R3:H", 1464, 0, 732},
		{"R-3c", 1538, 658, 658}, {"P6_1", 10, 168, 2186}, {"P6_3", 6, 168, 2190}, {"P6_122", 10, 890, 2186},
		{"P6_322", 6, 894, 2190}, {"P2_13", 18, 450, 2178}, {"I2_13", 1098, 234, 1098}, {"Pa-3", 234, 1962, 1962},
		{"P4_332", 30, 1206, 2166}, {"I4_132", 1110, 606, 1086}, {"I-43d", 1330, 186, 866}, {"Fd-3m", 1698, 498, 498},
		{"Ia-3d", 1402, 794, 794},
	} {
		g := mustLookup(t, c.symbol)
		var absent, centric, present int
		box(6, func(h HKL) {
			switch {
			case h == (HKL{}):
			case g.Absent(h):
				absent++
			default:
				present++
				if g.Centric(h) {
					centric++
				}
			}
		})
		if absent != c.absent || centric != c.centric || present != c.present {
			t.Errorf("%s: %d/%d/%d, want %d/%d/%d", c.symbol, absent, centric, present, c.absent, c.centric, c.present)
		}
	}
}

func box(n int, f func(HKL)) {
	for h := -n; h <= n; h++ {
		for k := -n; k <= n; k++ {
			for l := -n; l <= n; l++ {
				f(HKL{h, k, l})
			}
		}
	}
}

// The packed methods against the definitions, applied to the operator list
// without any table, for every setting.
func TestReflectionDefinitions(t *testing.T) {
	for i, s := range Tabulated() {
		g, err := s.Group()
		if err != nil {
			t.Fatal(err)
		}
		n := 2
		if i%10 == 0 {
			n = 3
		}
		ops := g.Operators()
		box(n, func(h HKL) { checkDefinitions(t, g, ops, h) })
		if t.Failed() {
			t.Fatalf("in %s", s.Symbol())
		}
	}
}

func checkDefinitions(t *testing.T, g *Group, ops []Op, h HKL) {
	t.Helper()
	var absent, centric, reached bool
	kept := 0
	orbit := map[HKL]bool{}
	rep, plus := g.CanonicalApart(h)
	for _, o := range ops {
		r := o.ApplyHKL(h)
		orbit[r], orbit[HKL{-r.H, -r.K, -r.L}] = true, true
		reached = reached || r == rep
		if r == (HKL{-h.H, -h.K, -h.L}) {
			centric = true
		}
		if r == h {
			kept++
			absent = absent || (h.H*int(o.T[0])+h.K*int(o.T[1])+h.L*int(o.T[2]))%24 != 0
		}
	}
	if epsilon := kept / len(g.lattice); g.Epsilon(h) != epsilon {
		t.Errorf("%v: epsilon %d, want %d", h, g.Epsilon(h), epsilon)
	}
	if g.Absent(h) != absent || g.Centric(h) != centric || g.Multiplicity(h) != len(orbit) {
		t.Errorf("%v: absent %v, centric %v, multiplicity %d; want %v, %v, %d", h, g.Absent(h), g.Centric(h), g.Multiplicity(h), absent, centric, len(orbit))
	}
	if !orbit[rep] || plus != reached || g.Canonical(h) != rep {
		t.Errorf("%v: representative %v, plus %v; in its orbit %v, reached %v", h, rep, plus, orbit[rep], reached)
	}
	all := g.Equivalents(h)
	if len(all) != len(orbit) || all[0] != rep {
		t.Errorf("%v: %d equivalents from %v, want %d from %v", h, len(all), all[0], len(orbit), rep)
	}
	for _, e := range all {
		if !orbit[e] || g.Canonical(e) != rep {
			t.Errorf("%v: equivalent %v with representative %v", h, e, g.Canonical(e))
		}
	}
	if len(ops)*2 < len(orbit)*g.Epsilon(h) {
		t.Errorf("%v: orbit of %d with epsilon %d under %d operators", h, len(orbit), g.Epsilon(h), len(ops))
	}
}

// The representative has the indices of the usual asymmetric part.
func TestCanonicalIsPlain(t *testing.T) {
	for _, c := range []struct {
		symbol  string
		h, want HKL
	}{
		{"P 1 21/c 1", HKL{-3, -2, 5}, HKL{3, 2, -5}},
		{"P 21 21 21", HKL{-3, 2, -5}, HKL{3, 2, 5}},
		{"P 41 21 2", HKL{-2, -3, 5}, HKL{3, 2, 5}},
		{"P 61 2 2", HKL{2, -1, 0}, HKL{1, 1, 0}},
		{"P 61 2 2", HKL{2, -5, -4}, HKL{3, 2, 4}},
		{"P 31", HKL{-1, 0, 4}, HKL{1, 0, -4}},
		{"F d -3 m", HKL{-1, 5, 3}, HKL{5, 3, 1}},
		{"P 21 3", HKL{1, 3, -2}, HKL{3, 2, 1}},
	} {
		if got := mustLookup(t, c.symbol).Canonical(c.h); got != c.want {
			t.Errorf("%s %v: %v, want %v", c.symbol, c.h, got, c.want)
		}
	}
}

func TestCanonicalKeys(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 1))
	n := 500
	h, k, l := make([]int16, n), make([]int16, n), make([]int16, n)
	for i := range n {
		h[i], k[i], l[i] = int16(random.Uint32()), int16(random.Uint32()), int16(random.Uint32())
	}
	for _, symbol := range []string{"P 1", "P 21 21 21", "P 31 2 1", "R 3 :H", "P 61", "P 4", "I 21 3", "F d -3 m", "R -3 c :R"} {
		g := mustLookup(t, symbol)
		keys, minus := make([]int64, n), make([]bool, n)
		for i := range keys {
			keys[i], minus[i] = -1, true
		}
		g.CanonicalKeys(keys, minus, h, k, l)
		for i := range keys {
			rep, plus := g.CanonicalApart(HKL{int(h[i]), int(k[i]), int(l[i])})
			if g.KeyHKL(keys[i]) != rep || minus[i] == plus {
				t.Fatalf("%s %d %d %d: %v, minus %v; want %v, plus %v", symbol, h[i], k[i], l[i], g.KeyHKL(keys[i]), minus[i], rep, plus)
			}
		}
		again := make([]int64, n)
		g.CanonicalKeys(again, nil, h, k, l)
		if !slices.Equal(again, keys) {
			t.Errorf("%s: without minus the keys differ", symbol)
		}
		if got := testing.AllocsPerRun(10, func() {
			g.CanonicalKeys(keys, minus, h, k, l)
			g.Absent(HKL{1, 2, 3})
			g.CanonicalApart(HKL{1, 2, 3})
		}); got != 0 {
			t.Errorf("%s: %g allocations", symbol, got)
		}
	}
	defer func() {
		if r := recover(); r != "crystal: Group.CanonicalKeys: slices differ in length" {
			t.Errorf("panic %v", r)
		}
	}()
	mustLookup(t, "P 1").CanonicalKeys(make([]int64, 3), nil, h, k, l)
}
