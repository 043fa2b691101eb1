package analysis

import (
	"math"
	"slices"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// twoTurns invents one crystal and gives two of its positions, the second changed.
func twoTurns(t *testing.T, change func(*intensity.Columns)) (*Study, []Accepted) {
	t.Helper()
	p := simulate.Sound(11)
	p.DMin = 1.3
	s := studyOf(t, p, nil)
	c := &s.Series.Crystals[0]
	c.Positions = c.Positions[:2]
	other := *c.Positions[1].Rows
	other.H, other.K, other.L, other.Phi = slices.Clone(other.H), slices.Clone(other.K), slices.Clone(other.L), slices.Clone(other.Phi)
	change(&other)
	return s, []Accepted{{Observations: c.Positions[0].Rows}, {Observations: &other}}
}

func reindexRows(c *intensity.Columns, f func(h, k, l int16) (int16, int16, int16)) {
	for r := range c.H {
		c.H[r], c.K[r], c.L[r] = f(c.H[r], c.K[r], c.L[r])
	}
}

// Each way in which angles and indices of two positions can fail to go together is
// told apart by geometry, with what to write; the change that was made is the oracle.
func TestTurns(t *testing.T) {
	for _, c := range []struct {
		name     string
		change   func(*intensity.Columns)
		verdict  string
		want     string // in the words
		zero     float64
		reversed bool
		reindex  string
	}{
		{"nothing", func(*intensity.Columns) {}, "fine", "agree", 0, false, ""},
		{"another zero", func(c *intensity.Columns) {
			for r := range c.Phi {
				c.Phi[r] += 12
			}
		}, "caution", "angle_shift_deg = -12.", -12, false, ""},
		{"the other way", func(c *intensity.Columns) {
			for r := range c.Phi {
				c.Phi[r] = 7 - c.Phi[r]
			}
		}, "caution", "angle_factor = -1.0", 7, true, ""},
		{"radians", func(c *intensity.Columns) {
			for r := range c.Phi {
				c.Phi[r] *= math.Pi / 180
			}
		}, "fails", "angle_factor = 57.2958", math.NaN(), false, ""},
		{"half of each step", func(c *intensity.Columns) {
			for r := range c.Phi {
				c.Phi[r] /= 2
			}
		}, "fails", "angle_factor = 2", math.NaN(), false, ""},
		{"a twofold axis", func(c *intensity.Columns) {
			reindexRows(c, func(h, k, l int16) (int16, int16, int16) { return -h, k, -l })
		}, "caution", `reindex = "-h,k,-l"`, 0, false, "-h,k,-l"},
		{"turned inside out", func(c *intensity.Columns) {
			reindexRows(c, func(h, k, l int16) (int16, int16, int16) { return -h, -k, -l })
		}, "caution", `reindex = "-h,-k,-l"`, 0, false, "-h,-k,-l"},
		{"one asymmetric unit", func(c *intensity.Columns) {
			reindexRows(c, func(h, k, l int16) (int16, int16, int16) { return max(h, -h), max(k, -k), max(l, -l) })
		}, "caution", "one asymmetric unit", math.NaN(), false, ""},
		{"angles of another column", func(c *intensity.Columns) {
			slices.Sort(c.Phi)
		}, "caution", "not those of one rotation", math.NaN(), false, ""},
		{"no angles", func(c *intensity.Columns) { c.Phi = nil }, "not known", "no rotation angles", math.NaN(), false, ""},
		{"ten degrees", func(c *intensity.Columns) {
			keep := make([]bool, c.Len())
			for r, phi := range c.Phi {
				keep[r] = phi > 0 && phi < 10
			}
			*c = *c.Select(keep)
		}, "not known", "too few", math.NaN(), false, ""},
	} {
		s, list := twoTurns(t, c.change)
		turns, warnings := s.turn(0, list)
		x := turns[1]
		if x.Verdict != c.verdict || !strings.Contains(x.Why, c.want) || x.Reversed != c.reversed || x.Reindex != c.reindex {
			t.Errorf("%s: %+v", c.name, x)
		}
		floatcmp.Check(t, c.name+": zero", x.ZeroDeg, c.zero, 0.3, 0)
		if turns[0].Verdict != "fine" || !(turns[0].MisfitDeg < 1) {
			t.Errorf("%s: reference %+v", c.name, turns[0])
		}
		if (len(warnings) == 1) != (c.verdict == "caution" || c.verdict == "fails") {
			t.Errorf("%s: %d warnings", c.name, len(warnings))
		}
	}
}

// A position on another grain has another axis; what is invented about two crystals of
// unrelated orientation serves for it.
func TestTurnsOfAnotherGrain(t *testing.T) {
	s, list := twoTurns(t, func(*intensity.Columns) {})
	list[1].Observations = s.Series.Crystals[1].Positions[0].Rows
	turns, _ := s.turn(0, list)
	if x := turns[1]; x.Verdict != "caution" || !strings.Contains(x.Why, "another axis") || !(x.AxisDeg > sameAxisDeg) {
		t.Errorf("%+v", x)
	}
}

// By hand: the beam along x and the axis along z is at 30 degrees where it was at 0
// when 30 is added. Angles that run the other way have the axis along -z.
func TestFrames(t *testing.T) {
	deg := math.Pi / 180
	g := frame{beam: [3]float64{1, 0, 0}, side: [3]float64{0, 1, 0}, axis: [3]float64{0, 0, 1}, sense: true}
	f := frameOf(&evidence.Axis{Direction: [3]float64{0, 0, 1}, Beam: [3]float64{math.Cos(30 * deg), math.Sin(30 * deg), 0}, Beam90: [3]float64{-math.Sin(30 * deg), math.Cos(30 * deg), 0}, Sense: true})
	axis, zero := f.against(g)
	floatcmp.Check(t, "axis", axis, 0, 1e-6, 0)
	floatcmp.Check(t, "zero", zero, 30, 1e-9, 0)
	_, zero = f.inverted().against(g)
	floatcmp.Check(t, "inverted", zero, -150, 1e-9, 0)
	f.sense = false
	_, zero = f.inverted().against(g)
	floatcmp.Check(t, "inverted, sense not known", zero, 30, 1e-9, 0)
	axis, zero = f.reversed().against(g)
	floatcmp.Check(t, "axis of reversed", axis, 180, 1e-6, 0)
	floatcmp.Check(t, "zero of reversed", zero, 30, 1e-9, 0)
	// An exchange of x and y that turns z over is a rotation of a cubic cell.
	cell := crystal.Cell{A: 7, B: 7, C: 7, Alpha: 90, Beta: 90, Gamma: 90}
	e := equivalent{crystal.Reindexing{M: [3][3]int{{0, 1, 0}, {1, 0, 0}, {0, 0, -1}}, Den: 1}, false}
	axis, _ = g.turned(e.cartesian(cell)).against(frame{beam: g.side, side: g.beam, axis: [3]float64{0, 0, -1}, sense: true})
	floatcmp.Check(t, "axis after the exchange", axis, 0, 1e-6, 0)
}
