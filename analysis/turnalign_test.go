package analysis

import (
	"context"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/crystal"
	"thinward/analysis/difference"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

// with replaces the rows of one position by copies that change alters.
func with(s *Series, i, j int, change func(*intensity.Columns)) {
	p := &s.Crystals[i].Positions[j]
	c := *p.Rows
	c.H, c.K, c.L, c.Phi = slices.Clone(c.H), slices.Clone(c.K), slices.Clone(c.L), slices.Clone(c.Phi)
	change(&c)
	p.Rows = &c
}

// TestAlign: positions whose angles count from another zero or the other way, and whose
// indices are of another equivalent setting, come back as they were, and the answer with
// them. Without the cure they are merged.
func TestAlign(t *testing.T) {
	// Positions of the plan lie by a tenth of a degree otherwise, which an offset takes up.
	const lying = 0.2
	ctx := context.Background()
	for _, apart := range []bool{false, true} {
		plain := seriesOf(t, smallPlan(3))
		plain.FriedelApart = apart
		spoilt := seriesOf(t, smallPlan(3))
		spoilt.FriedelApart = apart
		turns := map[[2]int]difference.Turn{{0, 2}: {Reversed: true, OffsetDeg: 60}, {1, 1}: {OffsetDeg: -37.25}, {1, 2}: {OffsetDeg: 12}}
		for at, turn := range turns {
			with(&spoilt, at[0], at[1], func(c *intensity.Columns) {
				for r, phi := range c.Phi {
					c.Phi[r] = turn.Of(phi)
				}
			})
			p := &spoilt.Crystals[at[0]].Positions[at[1]]
			p.TiltZeroDeg = turn.Of(p.TiltZeroDeg)
		}
		for _, at := range [][2]int{{1, 2}, {2, 1}} {
			with(&spoilt, at[0], at[1], func(c *intensity.Columns) {
				for r := range c.H {
					c.H[r], c.K[r] = -c.H[r], -c.K[r]
				}
			})
		}
		set := &Settings{Replicates: 20, Flips: 20}
		a, err := New(plain, set)
		if err != nil {
			t.Fatal(err)
		}
		b, err := New(spoilt, set)
		if err != nil {
			t.Fatal(err)
		}
		in, err := a.Intake(ctx)
		if err != nil {
			t.Fatal(err)
		}
		got, err := b.Intake(ctx)
		if err != nil {
			t.Fatal(err)
		}
		for i := range in.Positions {
			for j := range in.Positions[i] {
				x, y := &in.Positions[i][j], &got.Positions[i][j]
				name := a.place(i, j)
				if d := cmp.Diff([][]int16{x.Observations.H, x.Observations.K, x.Observations.L}, [][]int16{y.Observations.H, y.Observations.K, y.Observations.L}); d != "" {
					t.Fatalf("%s: other indices: %.300s", name, d)
				}
				if d := cmp.Diff([][]int32{x.Unique, x.Raw}, [][]int32{y.Unique, y.Raw}); d != "" {
					t.Fatalf("%s: numbered otherwise: %.300s", name, d)
				}
				floatcmp.CheckSlice(t, name, y.Observations.Phi, x.Observations.Phi, lying, 0)
				p := &b.Series.Crystals[i].Positions[j]
				floatcmp.Check(t, name+": tilt", tiltOf(7, y.Turn.Of(p.TiltZeroDeg)), tiltOf(7, a.Series.Crystals[i].Positions[j].TiltZeroDeg), lying, 0)
			}
		}
		var said []string
		for _, w := range b.Warnings() {
			if w.Code == "angles-aligned" {
				said = append(said, w.Where+": "+w.Text)
			}
		}
		if len(said) != 4 {
			t.Fatalf("%d: %q", len(said), said)
		}
		for k, words := range [][]string{{"L1/", "other way", "60 degrees - angle", "position"}, {"L2/", "another zero", "angle + 37."}, {"L2/", "-h,-k,l", "angle - 1"}, {"L3/", "equivalent setting", "-h,-k,l"}} {
			for _, w := range words {
				if !strings.Contains(said[k], w) {
					t.Errorf("%q lacks %q", said[k], w)
				}
			}
		}
		for _, w := range a.Warnings() {
			if w.Code == "angles-aligned" {
				t.Errorf("sound series: %s: %s", w.Where, w.Text)
			}
		}
		if apart {
			continue
		}
		for _, c := range a.Contrasts() {
			if !c.Primary {
				continue
			}
			x, err := a.Compare(ctx, c)
			if err != nil {
				t.Fatal(err)
			}
			y, err := b.Compare(ctx, c)
			if err != nil {
				t.Fatal(err)
			}
			if !x.Pairs.Matched || !y.Pairs.Matched {
				t.Errorf("%s: matched %v, spoilt %v", a.Name(c), x.Pairs.Matched, y.Pairs.Matched)
			}
			floatcmp.Check(t, a.Name(c), y.Result.Exchange.M, x.Result.Exchange.M, 0.002, 0)
		}
	}
}

// TestAlignLeavesWhatIsNotClear: angles that have nothing to do with the indices stay.
func TestAlignLeavesWhatIsNotClear(t *testing.T) {
	series := seriesOf(t, smallPlan(3))
	r := rand.New(rand.NewPCG(1, 1))
	with(&series, 0, 2, func(c *intensity.Columns) {
		r.Shuffle(len(c.Phi), func(a, b int) { c.Phi[a], c.Phi[b] = c.Phi[b], c.Phi[a] })
	})
	before := slices.Clone(series.Crystals[0].Positions[2].Rows.Phi)
	s, err := New(series, &Settings{Replicates: 20, Flips: 20})
	if err != nil {
		t.Fatal(err)
	}
	in, err := s.Intake(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	a := &in.Positions[0][2]
	if !slices.Equal(a.Observations.Phi, before) || !a.Turn.Identity() {
		t.Errorf("turned by %s", a.Turn)
	}
}

// TestRotations: as many as the Laue class has rotations, and with mates apart as the point
// group; each keeps every unique reflection.
func TestRotations(t *testing.T) {
	for _, c := range []struct {
		symbol          string
		together, apart int
	}{{"P 1", 1, 1}, {"P 21 21 21", 4, 4}, {"P 1 21/c 1", 2, 2}, {"P m", 2, 1}, {"P 4 3 2", 24, 24}, {"R 3", 3, 3}} {
		g, err := crystal.Lookup(c.symbol)
		if err != nil {
			t.Fatal(err)
		}
		for _, apart := range []bool{false, true} {
			s := &Study{Series: Series{Group: g, FriedelApart: apart}}
			list, want := s.rotations(), c.together
			if apart {
				want = c.apart
			}
			if len(list) != want || !list[0].Identity() {
				t.Errorf("%s, mates apart %v: %d rotations, want %d", c.symbol, apart, len(list), want)
			}
			h := crystal.HKL{H: 1, K: 2, L: 5}
			for _, r := range list {
				if g.Canonical(r.Apply(h)) != g.Canonical(h) {
					t.Errorf("%s: %s makes another reflection", c.symbol, r)
				}
				rep, plus := g.CanonicalApart(h)
				if rep2, plus2 := g.CanonicalApart(r.Apply(h)); apart && (rep != rep2 || plus != plus2) {
					t.Errorf("%s: %s makes a mate", c.symbol, r)
				}
			}
		}
	}
}
