package figure

import (
	"math"
	"slices"
	"testing"

	"pgregory.net/rapid"

	"thinward/analysis/internal/floatcmp"
)

func TestTicksAreRoundAndInside(t *testing.T) {
	for _, c := range []struct {
		name            string
		axis            Axis
		length, spacing float64
		want            []string
	}{
		{"linear", Axis{Lo: -0.1, Hi: 0.52}, 200, 40, []string{"0", "0.2", "0.4"}},
		{"two and a half", Axis{Lo: 0, Hi: 0.1}, 200, 50, []string{"0", "0.025", "0.050", "0.075", "0.100"}},
		{"wide", Axis{Lo: 0, Hi: 3e7}, 200, 60, []string{"0", "1.0e+07", "2.0e+07", "3.0e+07"}},
		{"root", Axis{Scale: Root, Lo: 0, Hi: 9}, 300, 40, []string{"0", "0.2", "1", "2", "5", "7"}},
		{"log", Axis{Scale: Log, Lo: 0.5, Hi: 2000}, 300, 50, []string{"1", "10", "100", "1000"}},
	} {
		s := newScaler(c.axis, nil, nil)
		marks := s.ticks(c.length, c.spacing)
		var got []string
		last := -math.MaxFloat64
		for _, m := range marks {
			got = append(got, m.Label)
			if !s.within(m.At) || m.At <= last {
				t.Errorf("%s: mark %v outside or out of order", c.name, m)
			}
			last = m.At
		}
		if !slices.Equal(got, c.want) {
			t.Errorf("%s: %q, want %q", c.name, got, c.want)
		}
	}
}

func TestTickCountFollowsLength(t *testing.T) {
	s := newScaler(Axis{Lo: 0, Hi: 1}, nil, nil)
	few, many := len(s.ticks(120, 40)), len(s.ticks(900, 40))
	if few < 2 || many <= few {
		t.Errorf("%d marks on a short axis, %d on a long one", few, many)
	}
}

func TestLabels(t *testing.T) {
	for _, c := range []struct {
		v    float64
		want string
	}{{0, "0"}, {-0.25, "\u22120.25"}, {1234, "1234"}, {0.0125, "0.0125"}, {2.5e-7, "2.5e\u221207"}, {math.NaN(), "\u2013"}, {math.Inf(-1), "\u2212\u221e"}, {10, "10"}, {0.1 + 0.2, "0.3"}} {
		if got := Number(c.v); got != c.want {
			t.Errorf("Number(%g) = %q, want %q", c.v, got, c.want)
		}
	}
}

// On every scale the ends map to 0 and 1 and the order is kept.
func TestScalesAreMonotone(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		scale := Scale(rapid.IntRange(0, 3).Draw(t, "scale"))
		v := rapid.SliceOfN(rapid.Float64Range(0.001, 1e6), 3, 20).Draw(t, "v")
		if scale != Log && rapid.Bool().Draw(t, "negative") {
			v[0] = -v[0]
		}
		s := newScaler(Axis{Scale: scale, Reverse: rapid.Bool().Draw(t, "reverse")}, [][]float64{v}, nil)
		a, b := s.at(s.lo), s.at(s.hi)
		if s.reverse {
			a, b = b, a
		}
		if !floatcmp.Equal(a, 0, 1e-9, 0) || !floatcmp.Equal(b, 1, 1e-9, 0) {
			t.Fatalf("ends at %g and %g", a, b)
		}
		for i := range v {
			for j := range v {
				d := s.at(v[j]) - s.at(v[i])
				if s.reverse {
					d = -d
				}
				if v[j] > v[i] && d < 0 {
					t.Fatalf("%g lies behind %g", v[j], v[i])
				}
				if p := s.at(v[j]); p < -1e-9 || p > 1+1e-9 {
					t.Fatalf("%g lies at %g, outside", v[j], p)
				}
			}
		}
	})
}

// The root axis that does not cross 0 is the plain square root: 1 lies at one
// half of an axis from 0 to 4. On a log axis 10 lies halfway between 1 and 100.
// On a rank axis the places are even.
func TestScalesAgainstClosedForms(t *testing.T) {
	for _, c := range []struct {
		name   string
		axis   Axis
		values []float64
		v      float64
		want   float64
		tol    float64
	}{
		{"root", Axis{Scale: Root, Lo: 0, Hi: 4}, nil, 1, 0.5, 1e-15},
		{"log", Axis{Scale: Log, Lo: 1, Hi: 100}, nil, 10, 0.5, 1e-15},
		{"rank", Axis{Scale: Rank}, []float64{1, 7, 7, 1000, 3}, 7, 2.0 / 3, 1e-15},
		{"between ranks", Axis{Scale: Rank}, []float64{1, 3, 7}, 5, 0.75, 1e-15},
		{"reverse", Axis{Lo: 0, Hi: 1, Reverse: true}, nil, 0.25, 0.75, 1e-15},
		{"root across zero is odd", Axis{Scale: Root, Lo: -4, Hi: 4}, nil, 0, 0.5, 1e-15},
	} {
		if got := newScaler(c.axis, [][]float64{c.values}, nil).at(c.v); !floatcmp.Equal(got, c.want, c.tol, 0) {
			t.Errorf("%s: %g lies at %g, not %g", c.name, c.v, got, c.want)
		}
	}
}

// What lies inside the frame survives clipping unchanged, what crosses it ends on
// the frame.
func TestClipping(t *testing.T) {
	f := &frame{x0: 0, y0: 0, x1: 100, y1: 100, x: newScaler(Axis{Lo: 0, Hi: 1}, nil, nil), y: newScaler(Axis{Lo: 0, Hi: 1}, nil, nil)}
	lines := f.polyline([]float64{0.2, 0.8, 0.8, 0.4}, []float64{0.5, 0.5, 2, 0.5})
	if len(lines) != 2 || lines[0][0] != (point{20, 50}) || lines[0][len(lines[0])-1].y != 0 {
		t.Fatalf("pieces %v", lines)
	}
	for _, line := range lines {
		for _, p := range line {
			if !f.holds(p) {
				t.Errorf("%v lies outside", p)
			}
		}
	}
	if got := f.polyline([]float64{0.1, math.NaN(), 0.3, 0.4}, []float64{0.1, 0.1, 0.1, 0.1}); len(got) != 1 || len(got[0]) != 2 {
		t.Errorf("a gap gave %v", got)
	}
}

// Every point falls in the hexagon whose centre is nearest, found by trying all.
func TestHexagonsAgainstBruteForce(t *testing.T) {
	const r = 5.5
	dx, dy := math.Sqrt(3)*r, 1.5*r
	rapid.Check(t, func(t *rapid.T) {
		x, y := rapid.Float64Range(0, 200).Draw(t, "x"), rapid.Float64Range(0, 200).Draw(t, "y")
		best := math.Inf(1)
		for j := -1; j < 40; j++ {
			for i := -1; i < 40; i++ {
				best = min(best, centre(i, j, dx, dy, x, y))
			}
		}
		at := hexOf(x, y, dx, dy)
		if got := centre(at[0], at[1], dx, dy, x, y); !floatcmp.Equal(got, best, 1e-9, 0) {
			t.Fatalf("distance %g, the nearest is %g", got, best)
		}
	})
}

func centre(i, j int, dx, dy, x, y float64) float64 {
	cx := float64(i) * dx
	if j%2 != 0 {
		cx += dx / 2
	}
	return math.Hypot(x-cx, y-float64(j)*dy)
}

// contrast is the ratio of WCAG 2.1, 1.4.3, from relative luminances.
func contrast(a, b float64) float64 { return (max(a, b) + 0.05) / (min(a, b) + 0.05) }

func luminance(hex string) float64 {
	var l float64
	for i, w := range []float64{0.2126, 0.7152, 0.0722} {
		n := 0
		for _, c := range hex[1+2*i : 3+2*i] {
			n = 16 * n
			if c >= 'a' {
				n += int(c-'a') + 10
			} else {
				n += int(c - '0')
			}
		}
		v := float64(n) / 255
		if v <= 0.04045 {
			v /= 12.92
		} else {
			v = math.Pow((v+0.055)/1.055, 2.4)
		}
		l += w * v
	}
	return l
}

func TestSeriesAreSeenOnLightAndDark(t *testing.T) {
	for i := 0; i < seriesCount; i++ {
		l := luminance(tokens[seriesToken(i)].fallback)
		if c := contrast(l, luminance("#ffffff")); !(c >= 3) {
			t.Errorf("series %d has a contrast of %.2f on white", i+1, c)
		}
		if c := contrast(l, luminance("#111111")); !(c >= 3) {
			t.Errorf("series %d has a contrast of %.2f on near-black", i+1, c)
		}
	}
}
