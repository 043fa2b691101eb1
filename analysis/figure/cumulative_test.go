package figure

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// cumulative is Wilson's acentric law 1 - exp(-z) (Wilson 1949, Acta Cryst. 2, 318)
// with one curve on it and one that lacks weak values.
func cumulative() *Cumulative {
	on, off := Distribution{Name: "thin", N: 400}, Distribution{Name: "thick", N: 900}
	for i := 1; i <= 10; i++ {
		z := float64(i) / 10
		law := 1 - math.Exp(-z)
		on.Z, on.Below, on.Law = append(on.Z, z), append(on.Below, law), append(on.Law, law)
		off.Z, off.Below, off.Law = append(off.Z, z), append(off.Below, law-0.08*math.Exp(-6*(z-0.1))), append(off.Law, law)
	}
	return &Cumulative{Title: "N(z)", Desc: "Shares below z.", X: Axis{Label: "z", Lo: 0, Hi: 1}, Law: "Wilson's law", Kinds: []DistributionKind{
		{Name: "acentric", Curves: []Distribution{on, off}},
		{Name: "centric", Curves: []Distribution{{Name: "thin", Z: on.Z, Below: on.Below}}},
	}}
}

func TestCumulativeWords(t *testing.T) {
	f := drawn(t, cumulative())
	for _, want := range []string{"Shares below z. acentric, thin: 0.0952 below 0.1 (by the law 0.0952), farthest from the law at 0.1, by 0.", "acentric, thick: 0.0152 below 0.1 (by the law 0.0952), farthest from the law at 0.1, by \u22120.08.", "centric, thin: 0.0952 below 0.1."} {
		if !strings.Contains(f.Desc, want) {
			t.Errorf("the text alternative lacks %q:\n%s", want, f.Desc)
		}
	}
	if n := strings.Count(f.SVG, "Wilson&#39;s law</text>"); n != 1 {
		t.Errorf("the law stands in %d legends, and one kind has a law", n)
	}
	if got := f.Table.Rows[10]; strings.Join(got, "|") != "acentric|thick|0.1|0.0152|0.0952|\u22120.08" {
		t.Errorf("row %q", got)
	}
	if got := f.Table.Rows[20]; got[4] != "\u2013" || got[5] != "\u2013" {
		t.Errorf("without a law: row %q", got)
	}
}

// The band is that of the fewest values: 1.96 sqrt(p(1-p)/n), p = 1 - exp(-0.5) and
// n = 400 give 0.04787.
func TestCumulativeChance(t *testing.T) {
	z, half := cumulative().Kinds[0].chance()
	if z[4] != 0.5 || !floatcmp.Equal(half[4], 0.04787, 5e-5, 0) {
		t.Errorf("half width %v at %v", half[4], z[4])
	}
	if z, half := cumulative().Kinds[1].chance(); z != nil || half != nil {
		t.Error("a band without a law")
	}
}

func TestCumulativeEach(t *testing.T) {
	list, err := cumulative().Each()
	if err != nil || len(list) != 2 {
		t.Fatalf("%d figures, %v", len(list), err)
	}
	if list[1].Title != "N(z): centric" || strings.Contains(list[1].Desc, "acentric") {
		t.Errorf("title %q, words %q", list[1].Title, list[1].Desc)
	}
}

func TestCumulativeRefuses(t *testing.T) {
	if _, err := (&Cumulative{Title: "N(z)"}).Draw(); err == nil || err.Error() != `figure: "N(z)" has no distribution` {
		t.Errorf("error %v", err)
	}
	c := cumulative()
	c.Kinds[0].Curves[1].Law = c.Kinds[0].Curves[1].Law[:3]
	if _, err := c.Each(); err == nil || err.Error() != `figure: distribution "thick" of "N(z)" has 10 places, 10 shares and 3 of the law` {
		t.Errorf("error %v", err)
	}
	empty := &Cumulative{Title: "N(z)", Kinds: []DistributionKind{{Name: "acentric"}}}
	if f := drawn(t, empty); !strings.Contains(f.SVG, "nothing to draw") {
		t.Error("an empty kind does not say so")
	}
	odd := cumulative()
	odd.Kinds[0].Curves[0].Below[0], odd.Kinds[0].Curves[0].Law[1], odd.Kinds[0].Curves[1].Z[2] = nan, inf, nan
	drawn(t, odd)
}
