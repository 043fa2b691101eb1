package crystal

import (
	"fmt"
	"slices"
	"strings"
	"testing"
)

func TestLookupSpellings(t *testing.T) {
	for _, c := range []struct {
		spellings string // separated by |
		number    int
		hall      string
	}{
		{"P 21 21 21|P212121|p212121|P 2_1 2_1 2_1|P2_12_12_1|P2(1)2(1)2(1)|P 21 21 21 |'P 21 21 21'|\"P 21 21 21\"|19|#19|P 2ac 2ab|p 2AC 2AB|P2\u2081 2\u2081 2\u2081|P2_{1}2_{1}2_{1}|P 2 1 2 1 2 1", 19, "P 2ac 2ab"},
		{"P 1 21/n 1|P21/n|P 21/n|p 21/n|P2_1/n|P2(1)/n|P121/n1|14:b2|P 21/c :b2|-P 2yn|P 21 / n|P2~1~/n", 14, "-P 2yn"},
		{"P 1 21/c 1|P21/c|P2_1/c|14|-P 2ybc|14:b1|P 1 2_1/c 1", 14, "-P 2ybc"},
		{"P 1 1 21/b|P21/b|14:c3", 14, "-P 2bc"},
		{"P 21/c 1 1", 14, "-P 2xac"},
		{"P 2|P2|P 1 2 1|P121|3", 3, "P 2y"},
		{"P 1 1 2|P112|3:c", 3, "P 2"},
		{"C 2|C2|C 1 2 1|5|c2", 5, "C 2y"},
		{"I 2|I 1 2 1|I121", 5, "I 2y"},
		{"B 2|B2|B 1 1 2", 5, "B 2"},
		{"C 2/c|C2/c|C 1 2/c 1|15", 15, "-C 2yc"},
		{"I 2/a|I 1 2/a 1", 15, "-I 2ya"},
		{"P -1|P-1|p-1|P\u22121|P1\u0305|P 1\u0304|$P\\bar{1}$|P\\bar1|2|-P 1", 2, "-P 1"},
		{"P 1|P1|1", 1, "P 1"},
		{"P n m a|Pnma|pnma|PNMA|62|P 21/n 21/m 21/a|-P 2ac 2n", 62, "-P 2ac 2n"},
		{"P b n m|Pbnm|62:cab", 62, "-P 2c 2ab"},
		{"C m c e|Cmce|C m c a|Cmca|64", 64, "-C 2bc 2"},
		{"C c c a|Ccca|C c c e|68", 68, "-C 2b 2bc"},
		{"A b a 2|Aba2|A e a 2|41", 41, "A 2 -2ac"},
		{"A b m 2|Abm2|Aem2|39", 39, "A 2 -2c"},
		{"C m m a|Cmma|67", 67, "-C 2b 2"},
		{"C m m b|Cmmb|67:ba-c", 67, "-C 2b 2b"},
		{"B b a b|Bbab", 68, "-B 2b 2bc"},
		{"B b c b|Bbcb|B b e b", 68, "-B 2bc 2b"},
		{"F d d 2|Fdd2|43", 43, "F 2 -2d"},
		{"F d d d|Fddd|F d d d :2|F d d d (origin choice 2)|F d d d Z|FdddZ|70", 70, "-F 2uv 2vw"},
		{"F d d d :1|Fddd:1|70:1|Fddd origin 1|F d d d S", 70, "F 2 2 -1d"},
		{"P n c b :1", 50, "P 2 2 -1bc"},
		{"P 31|P31|P3_1|P 3_1|144", 144, "P 31"},
		{"P 32|P32|P3_2|145", 145, "P 32"},
		{"P 3 1 2|P312|149", 149, "P 3 2"},
		{"P 3 2 1|P321|150", 150, "P 3 2\""},
		{"P 31 1 2|P3112|P3_112|151|P 31 2c (0 0 1)", 151, "P 31 2c (0 0 1)"},
		{"P 31 2 1|P3121|P3_121|152|P 31 2\"", 152, "P 31 2\""},
		{"R 3|R3|H 3|H3|H 3 :H|R 3 :H|R 3 hexagonal axes|R3:h|r3h|R 3 H|146|146:H", 146, "R 3"},
		{"R 3 :R|R3:R|R 3 (rhombohedral axes)|146:r|R 3 R|P 3*", 146, "P 3*"},
		{"R 3 2|R32|H 3 2|H32|R 3 2 :H|155", 155, "R 3 2\""},
		{"R -3 c :H|R-3c|R -3 c|r-3c:h|R-3cH|H -3 c|R -3 2/c|167|-R 3 2\"c|R\u22123c", 167, "-R 3 2\"c"},
		{"R -3 c :R|R-3c:r", 167, "-P 3* 2n"},
		{"P 42|P42|P4_2|77", 77, "P 4c"},
		{"P 41 21 2|P41212|92", 92, "P 4abw 2nw"},
		{"P 42 21 2|P42212|94", 94, "P 4n 2n"},
		{"P 42/n c m|P42/ncm|138|P4_2/ncm:2", 138, "-P 4ac 2ac"},
		{"I 41/a m d :1|I41/amd:1|141:1", 141, "I 4bw 2bw -1bw"},
		{"P 61|P61|169", 169, "P 61"},
		{"P 63/m m c|P63/mmc|P6_3/mmc|194", 194, "-P 6c 2c"},
		{"P 2 3|P23|195", 195, "P 2 2 3"},
		{"P 21 3|P213|198", 198, "P 2ac 2ab 3"},
		{"P a -3|Pa-3|Pa3|P 21/a -3|205", 205, "-P 2ac 2ab 3"},
		{"F d -3 m|Fd-3m|Fd3m|F d 3 m|227|Fd-3m:2|F 41/d -3 2/m", 227, "-F 4vw 2vw 3"},
		{"F d -3 m :1|Fd3m:1", 227, "F 4d 2 3 -1d"},
		{"I a -3 d|Ia-3d|Ia3d|230", 230, "-I 4bd 2c 3"},
		{"P m -3 m|Pm3m|Pm-3m|221", 221, "-P 4 2 3"},
		{"P 43 3 2|P4332|P4_332", 212, "P 4acd 2ab 3"},
	} {
		for symbol := range strings.SplitSeq(c.spellings, "|") {
			g, err := Lookup(symbol)
			if err != nil {
				t.Errorf("%q: %v", symbol, err)
			} else if g.Number() != c.number || g.Hall() != c.hall {
				t.Errorf("%q: %d %s, want %d %s", symbol, g.Number(), g.Hall(), c.number, c.hall)
			}
		}
	}
}

func TestLookupErrors(t *testing.T) {
	for _, c := range []struct{ symbol, want string }{
		{"", "empty symbol"},
		{"  ' ' ", "empty symbol"},
		{"0", "numbers run from 1 to 230"},
		{"231", "numbers run from 1 to 230"},
		{"P 21 21 22", "near it are P 21 21 2"},
		{"P 21/q", "near it are P 21/m, P 21/c, P 21/n"},
		{"P n m n n", "is not known; near it are"},
		{"Fd-3q", "F d -3"},
		{"P 21c", "is not known; near it are"},
		{"elephant", "give a number from 1 to 230"},
		{"P 3 2", "Hall symbol of P 3 1 2 (number 149) or a spelling of P 32 (number 145)"},
		{"P 4 2", "Hall symbol of P 4 2 2 (number 89) or a spelling of P 42 (number 77)"},
		{"P 6 2", "number 171"},
		{"R 3 :X", "no choice \"x\"; there are H, R"},
		{"19:2", "one setting only"},
		{"P 21 21 21 S", "one setting only"},
		{"-P 2yq", "Hall symbol"},
		{"P 2x 2y 2z 2z 2z 2z", "Hall symbol"},
	} {
		_, err := Lookup(c.symbol)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: error %v, want %q", c.symbol, err, c.want)
		}
	}
}

// Every number, full symbol, short symbol and Hall symbol of the table leads to
// its own type, in every way of spacing and case.
func TestLookupWholeTable(t *testing.T) {
	for _, s := range Tabulated() {
		for _, symbol := range []string{
			fmt.Sprint(s.Number), s.Full, s.Symbol(), strings.ToLower(s.Symbol()), strings.ReplaceAll(s.Symbol(), " ", ""),
			strings.ReplaceAll(s.Full, " ", ""), strings.ReplaceAll(s.Full, " ", "_"),
		} {
			g, err := Lookup(symbol)
			if err != nil {
				t.Errorf("%d %s: Lookup(%q): %v", s.Number, s.Choice, symbol, err)
			} else if g.Number() != s.Number {
				t.Errorf("%d %s: Lookup(%q) is number %d", s.Number, s.Choice, symbol, g.Number())
			}
		}
		g, err := FromHall(s.Hall)
		if err != nil {
			t.Errorf("%s: %v", s.Hall, err)
		} else if g.Number() != s.Number || g.Hall() != s.Hall {
			t.Errorf("FromHall(%q) is %d %s", s.Hall, g.Number(), g.Hall())
		}
		if s.Choice != "" {
			g, err := Lookup(fmt.Sprintf("%d:%s", s.Number, s.Choice))
			if err != nil {
				t.Errorf("%d:%s: %v", s.Number, s.Choice, err)
			} else if g.Hall() != s.Hall {
				t.Errorf("%d:%s is %s, want %s", s.Number, s.Choice, g.Hall(), s.Hall)
			}
		}
	}
}

// Totals of International Tables A, from memory; counts over a tabulation by a second
// implementation agree.
func TestTotals(t *testing.T) {
	systems, laue, classes := map[string]int{}, map[string]int{}, map[string]int{}
	chiral, centro := 0, 0
	for n := 1; n <= 230; n++ {
		g := mustLookup(t, fmt.Sprint(n))
		systems[g.System()]++
		laue[g.LaueClass()]++
		classes[g.PointGroup()]++
		if g.Chiral() {
			chiral++
		}
		if g.Centrosymmetric() {
			centro++
		}
	}
	if got := fmt.Sprint(systems); got != "map[cubic:36 hexagonal:27 monoclinic:13 orthorhombic:59 tetragonal:68 triclinic:2 trigonal:25]" {
		t.Error(got)
	}
	if got := fmt.Sprint(laue); got != "map[-1:2 -3:6 -3m:19 2/m:13 4/m:14 4/mmm:54 6/m:9 6/mmm:18 m-3:12 m-3m:24 mmm:59]" {
		t.Error(got)
	}
	for class, want := range map[string]int{"mmm": 28, "mm2": 22, "4/mmm": 20, "222": 9, "422": 10, "32": 7, "622": 6, "23": 5, "432": 8, "m-3m": 10} {
		if classes[class] != want {
			t.Errorf("%s: %d types, want %d", class, classes[class], want)
		}
	}
	if len(classes) != 32 || chiral != 65 || centro != 92 {
		t.Errorf("%d classes, %d chiral, %d centrosymmetric", len(classes), chiral, centro)
	}
}

// The orientation that the class alone does not tell (International Tables A,
// table 2.1.3.3).
func TestOrientedClasses(t *testing.T) {
	for _, c := range []struct{ symbol, point, laue string }{
		{"P 1 2 1", "1 2 1", "1 2/m 1"},
		{"P 1 1 2", "1 1 2", "1 1 2/m"},
		{"P m 1 1", "m 1 1", "2/m 1 1"},
		{"P 2 m m", "2mm", "mmm"},
		{"P m 2 m", "m2m", "mmm"},
		{"P m m 2", "mm2", "mmm"},
		{"P -4 2 m", "-42m", "4/mmm"},
		{"P -4 m 2", "-4m2", "4/mmm"},
		{"P 3 2 1", "321", "-3m1"},
		{"P 3 1 2", "312", "-31m"},
		{"P 3 m 1", "3m1", "-3m1"},
		{"P 3 1 m", "31m", "-31m"},
		{"P -3 m 1", "-3m1", "-3m1"},
		{"P -3 1 m", "-31m", "-31m"},
		{"R -3 c :H", "-3m1", "-3m1"},
		{"R -3 c :R", "-3m", "-3m"},
		{"R 3 :R", "3", "-3"},
		{"P -6 m 2", "-6m2", "6/mmm"},
		{"P -6 2 m", "-62m", "6/mmm"},
		{"P 4x", "4 along a", "4/m along a"},
		{"P 2\"", "2 along [110]", "2/m along [110]"},
	} {
		g, err := Lookup(c.symbol)
		if err != nil {
			t.Error(err)
			continue
		}
		if g.PointGroupSetting() != c.point || g.LaueSetting() != c.laue {
			t.Errorf("%s: %s, %s; want %s, %s", c.symbol, g.PointGroupSetting(), g.LaueSetting(), c.point, c.laue)
		}
	}
}

func TestOperatorsAreCopied(t *testing.T) {
	g := mustLookup(t, "P 21 21 21")
	ops := g.Operators()
	slices.Reverse(ops)
	ops[0].T[0] = 5
	if g.Operators()[0] != Identity() {
		t.Error("changing the list that Operators returns changes the group")
	}
}

// A text of ten thousand letters is no symbol, and is refused at once.
func TestLongTextIsRefused(t *testing.T) {
	long := "P" + strings.Repeat("x", 10000)
	for name, f := range map[string]func(string) (*Group, error){"Lookup": Lookup, "FromHall": FromHall} {
		if _, err := f(long); err == nil || !strings.Contains(err.Error(), "10001 bytes are no symbol") || len(err.Error()) > 200 {
			t.Errorf("%s: %.200v", name, err)
		}
	}
}
