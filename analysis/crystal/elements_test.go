package crystal

import (
	"slices"
	"strconv"
	"strings"
	"testing"
)

// Names and conditions as International Tables A 2.1.3 has them for these types
// (from memory), without the conditions that follow from the centring.
func TestElementNames(t *testing.T) {
	for _, c := range []struct{ symbol, names, conditions string }{
		{"P 1", "", ""},
		{"P 2 2 2", "", ""},
		{"C 2 2 2", "C centring", "hkl: h+k = 2n"},
		{"P 21 21 21", "2_1 along a|2_1 along b|2_1 along c", "h00: h = 2n|0k0: k = 2n|00l: l = 2n"},
		{"P 1 21/n 1", "2_1 along b|n glide perpendicular to b", "0k0: k = 2n|h0l: h+l = 2n"},
		{"P 1 21/c 1", "2_1 along b|c glide perpendicular to b", "0k0: k = 2n|h0l: l = 2n"},
		{"C 1 2/c 1", "C centring|c glide perpendicular to b", "hkl: h+k = 2n|h0l: l = 2n"},
		{"P n m a", "2_1 along a|2_1 along b|2_1 along c|n glide perpendicular to a|a glide perpendicular to c",
			"h00: h = 2n|0k0: k = 2n|00l: l = 2n|0kl: k+l = 2n|hk0: h = 2n"},
		{"F d d 2", "F centring|d glide perpendicular to a|d glide perpendicular to b",
			"hkl: h+k = 2n, h+l = 2n, k+l = 2n|0kl: k+l = 4n|h0l: h+l = 4n"},
		{"A e m 2", "A centring|e glide perpendicular to a", "hkl: k+l = 2n|0kl: k = 2n, l = 2n"},
		{"I b a m", "I centring|b glide perpendicular to a|a glide perpendicular to b", "hkl: h+k+l = 2n|0kl: k = 2n|h0l: h = 2n"},
		{"P 41", "4_1 along c", "00l: l = 4n"},
		{"P 42", "4_2 along c", "00l: l = 2n"},
		{"P 43 21 2", "2_1 along a and b|4_3 along c", "h00: h = 2n|0k0: k = 2n|00l: l = 4n"},
		{"I 41/a", "I centring|4_1 along c|a glide perpendicular to c", "hkl: h+k+l = 2n|00l: l = 4n|hk0: h = 2n"},
		{"P 32", "3_2 along c", "00l: l = 3n"},
		{"R 3", "R centring", "hkl: -h+k+l = 3n"},
		{"R -3 c :H", "R centring|c glide perpendicular to a, b and [110]", "hkl: -h+k+l = 3n|0kl: l = 2n|h0l: l = 2n|h-hl: l = 2n"},
		{"P 65", "6_5 along c", "00l: l = 6n"},
		{"P 62", "6_2 along c", "00l: l = 3n"},
		{"P 63/m m c", "6_3 along c|c glide perpendicular to [1-10], [210] and [120]", "00l: l = 2n|hhl: l = 2n|h-2hl: l = 2n|-2kkl: l = 2n"},
		{"P 21 3", "2_1 along a, b and c", "h00: h = 2n|0k0: k = 2n|00l: l = 2n"},
		{"I -4 3 d", "I centring|d glide perpendicular to [1-10] and equivalents", "hkl: h+k+l = 2n|hhl: 2h+l = 4n (and equivalents)"},
		{"P -4 3 n", "n glide perpendicular to [1-10] and equivalents", "hhl: l = 2n (and equivalents)"},
		{"F d -3 m", "F centring|4_1 along a, b and c|d glide perpendicular to a, b and c",
			"hkl: h+k = 2n, h+l = 2n, k+l = 2n|h00: h = 4n|0k0: k = 4n|00l: l = 4n|0kl: k+l = 4n|h0l: h+l = 4n|hk0: h+k = 4n"},
	} {
		g := mustLookup(t, c.symbol)
		var names []string
		for _, e := range g.Elements() {
			names = append(names, e.Name)
		}
		if got := strings.Join(names, "|"); got != c.names {
			t.Errorf("%s: elements %s, want %s", c.symbol, got, c.names)
		}
		if got := strings.Join(g.Conditions(), "|"); got != c.conditions {
			t.Errorf("%s: conditions %s, want %s", c.symbol, got, c.conditions)
		}
	}
}

// In every setting a reflection is absent exactly when an element forbids it,
// exactly when the text of a condition does, read by a reader that knows only the
// text; and equivalents are forbidden by the same elements.
func TestElementsExplainAbsences(t *testing.T) {
	for i, s := range Tabulated() {
		g, err := s.Group()
		if err != nil {
			t.Fatal(err)
		}
		n := 3
		if i%8 == 0 {
			n = 5
		}
		conditions := g.Conditions()
		box(n, func(h HKL) {
			by := g.ForbiddenBy(h)
			if (len(by) > 0) != g.Absent(h) {
				t.Fatalf("%s %v: forbidden by %v, absent %v", s.Symbol(), h, by, g.Absent(h))
			}
			if rep := g.ForbiddenBy(g.Canonical(h)); !slices.Equal(by, rep) {
				t.Fatalf("%s %v: forbidden by %v, its representative by %v", s.Symbol(), h, by, rep)
			}
			broken := false
			for _, text := range conditions {
				broken = broken || breaks(t, g, text, h)
			}
			if broken != g.Absent(h) {
				t.Fatalf("%s %v: absent %v, conditions %v say %v", s.Symbol(), h, g.Absent(h), conditions, broken)
			}
		})
	}
}

// breaks evaluates the text of a reflection condition.
func breaks(t *testing.T, g *Group, text string, h HKL) bool {
	t.Helper()
	zoneText, rest, ok := strings.Cut(text, ": ")
	if !ok {
		t.Fatalf("condition %q", text)
	}
	images := []HKL{h}
	if all, found := strings.CutSuffix(rest, " (and equivalents)"); found {
		rest, images = all, g.Equivalents(h)
	}
	for _, image := range images {
		if !inZone(t, zoneText, image) {
			continue
		}
		for part := range strings.SplitSeq(rest, ", ") {
			sum, multiple, _ := strings.Cut(part, " = ")
			n, err := strconv.Atoi(strings.TrimSuffix(multiple, "n"))
			if err != nil {
				t.Fatalf("condition %q: %v", text, err)
			}
			total := 0
			for _, term := range terms(t, sum) {
				total += term.factor * [3]int{image.H, image.K, image.L}[strings.IndexByte("hkl", term.index)]
			}
			if total%n != 0 {
				return true
			}
		}
	}
	return false
}

type term struct {
	factor int
	index  byte // 0 for a zero
}

// terms splits "h-2hl" or "-h+k+l" into signed indices.
func terms(t *testing.T, text string) []term {
	var out []term
	for text != "" {
		x := term{factor: 1}
		if text[0] == '-' || text[0] == '+' {
			if text[0] == '-' {
				x.factor = -1
			}
			text = text[1:]
		}
		if text[0] == '0' {
			out, text = append(out, term{}), text[1:]
			continue
		}
		if text[0] >= '1' && text[0] <= '9' {
			x.factor *= int(text[0] - '0')
			text = text[1:]
		}
		if !strings.ContainsRune("hkl", rune(text[0])) {
			t.Fatalf("term %q", text)
		}
		x.index, text = text[0], text[1:]
		out = append(out, x)
	}
	return out
}

// inZone reports whether h has the form of the text, such as h-hl.
func inZone(t *testing.T, text string, h HKL) bool {
	t.Helper()
	parts := terms(t, text)
	if len(parts) != 3 {
		t.Fatalf("zone %q", text)
	}
	values := map[byte]int{}
	indices := [3]int{h.H, h.K, h.L}
	for i, p := range parts {
		if p.factor == 1 {
			if old, set := values[p.index]; set && old != indices[i] {
				return false
			}
			values[p.index] = indices[i]
		}
	}
	for i, p := range parts {
		if p.factor == 0 && indices[i] != 0 || p.factor != 0 && values[p.index]*p.factor != indices[i] {
			return false
		}
	}
	return true
}

func TestElementKindString(t *testing.T) {
	if got := CentringElement.String() + ", " + ScrewAxis.String() + ", " + GlidePlane.String(); got != "centring, screw axis, glide plane" {
		t.Error(got)
	}
}
