package analysis

import (
	"context"
	"math"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/simulate"
)

// declaredPlan is a sound series of one true group that is said to be of another.
func declaredPlan(group, declared string, cell simulate.Cell) *simulate.Plan {
	p := simulate.Sound(3)
	p.SpaceGroup, p.Declared, p.Cell, p.DMin = group, declared, cell, 1.1
	p.Crystals = p.Crystals[:2]
	return p
}

// Wilson's strengths of reflections that no operation joins have nothing to do with each
// other, those of equivalents are equal: the operations of the declared class that the true
// one lacks are refused, and only they.
func TestLaueClassIsAskedOfTheIntensities(t *testing.T) {
	tetragonal, hexagonal, monoclinic := simulate.Cell{A: 14, B: 14, C: 11}, simulate.Cell{A: 14, B: 14, C: 11, Gamma: 120}, simulate.Cell{A: 11, B: 14, C: 9}
	for _, c := range []struct {
		group, declared string
		cell            simulate.Cell
		refused         string
		subgroup        string
	}{
		{"P 3", "P 6", hexagonal, "x-y,x,z -x,-y,z", "P 3 (Laue class -3)"},
		{"P 3", "P 3", hexagonal, "", ""},
		{"P 4", "P 4 2 2", tetragonal, "x,-y,-z -y,-x,-z y,x,-z -x,y,-z", "P 4 (Laue class 4/m)"},
		{"P 1 21 1", "P 21 21 21", monoclinic, "-x+1/2,-y,z+1/2 x+1/2,-y+1/2,-z", "P 1 21 1 (Laue class 2/m)"},
		{"P 1", "P 1 2 1", monoclinic, "-x,y,-z", "P 1 (Laue class -1)"},
		{"P 21 21 21", "P 1 21 1", monoclinic, "", ""},
	} {
		s := studyOf(t, declaredPlan(c.group, c.declared, c.cell), nil)
		d, err := s.IntakeDetails(context.Background())
		if err != nil {
			t.Fatal(err)
		}
		var refused []string
		for _, o := range d.Laue.Operators {
			if o.Refused {
				refused = append(refused, o.Operator)
			}
		}
		if got := strings.Join(refused, " "); got != c.refused || d.Laue.Subgroup != c.subgroup {
			t.Errorf("%s as %s: refused %q, subgroup %q, want %q and %q: %+v", c.group, c.declared, got, d.Laue.Subgroup, c.refused, c.subgroup, d.Laue)
		}
		want := VerdictFine
		if c.refused != "" {
			want = VerdictFails
		}
		if d.Laue.Verdict != want {
			t.Errorf("%s as %s: %s: %s", c.group, c.declared, d.Laue.Verdict, d.Laue.Why)
		}
		said := false
		for _, w := range d.Warnings {
			said = said || w.Code == "laue-class"
		}
		if said != (want == VerdictFails) {
			t.Errorf("%s as %s: warned %t", c.group, c.declared, said)
		}
		if hint := strings.Contains(d.Laue.Why, "may be higher"); hint != (c.declared == "P 1 21 1") {
			t.Errorf("%s as %s: hint at a higher class %t: %+v", c.group, c.declared, hint, d.Laue)
		}
	}
}

// A failed class leaves no answer and blames neither sigmas nor the positions.
func TestFailedLaueClassLeavesNoAnswer(t *testing.T) {
	r := &Result{Ledger: []LedgerEntry{{Check: checkLaue, Verdict: VerdictFails}}}
	made := func() []Answer {
		return []Answer{{Verdict: VerdictYes, Text: "They differ."}, {Verdict: VerdictNo, Text: "Not seen."}, {Verdict: VerdictFails, Text: "Checks fail."}}
	}
	list := undecidedByLaue(r, made())
	for k, want := range []string{VerdictUnsure, VerdictUnsure, VerdictFails} {
		if list[k].Verdict != want {
			t.Errorf("answer %d is %q, want %q", k, list[k].Verdict, want)
		}
	}
	if !strings.Contains(list[0].Text, "of means of unlike ones. They differ.") {
		t.Error(list[0].Text)
	}
	r.Ledger[0].Verdict = VerdictCaution
	if list := undecidedByLaue(r, made()); list[0].Verdict != VerdictYes || list[0].Text != "They differ." {
		t.Errorf("a caution withdrew the answer: %+v", list[0])
	}
}

// Of 24 rotations the largest subgroup without those refused, by hand.
func TestLargestAllowedSubgroup(t *testing.T) {
	for _, c := range []struct{ group, refused, want string }{
		{"P 4 3 2", "-y,x,z", "P 2 3 (Laue class m-3)"},
		{"P 2 3", "z,x,y", "P 2 2 2 (Laue class mmm)"},
		{"P 6 2 2", "-y,x-y,z", "(Laue class mmm)"},
		{"P 21 21 21", "x+1/2,-y+1/2,-z", "P 1 1 21 (Laue class 2/m)"},
	} {
		g, err := crystal.Lookup(c.group)
		if err != nil {
			t.Fatal(err)
		}
		refused := map[string]bool{}
		rotations := laueRotations(g)
		for _, r := range rotations {
			if c.group == "P 21 21 21" {
				refused[r.name] = r.name != "-x+1/2,-y,z+1/2"
				continue
			}
			op, err := crystal.ParseOp(c.refused)
			if err != nil {
				t.Fatal(err)
			}
			// All rotations of that order, about any axis of the kind.
			refused[r.name] = refused[r.name] || order(r.by.M) == order(proper(op))
		}
		if got := largestAllowed(g, rotations, refused); !strings.Contains(got, c.want) {
			t.Errorf("%s without %s: %s, want %s", c.group, c.refused, got, c.want)
		}
	}
}

// order is the power of a rotation that is the identity.
func order(m [3][3]int) int {
	p := m
	for n := 1; ; n++ {
		if (crystal.Reindexing{M: p, Den: 1}).Identity() {
			return n
		}
		p = product(p, m)
	}
}

func TestPairingCorrelation(t *testing.T) {
	p := &pairing{}
	p.crystal([][][2]float64{{{1, 2}, {3, 4}, {2, 2}}, {{5, 5}}})
	a := p.agreement("x")
	// Both orders: mean 3, sums of squares and of products by hand.
	floatcmp.Check(t, "r", a.R, 14/16., 1e-12, 0)
	if a.N != 3 {
		t.Errorf("%d pairs count, want those of the position with most, 3", a.N)
	}
	if a := (&pairing{}).agreement("none"); !math.IsNaN(a.R) {
		t.Errorf("no pair: %g", a.R)
	}
}

// The number of an orbit is that of all its members, under the group and under the ways to
// index alike.
func TestOrbit(t *testing.T) {
	s := studyOf(t, declaredPlan("P 3", "P 3", simulate.Cell{A: 14, B: 14, C: 11, Gamma: 120}), nil)
	ways := crystal.AlternativeIndexings(s.Series.Group, s.Series.Cell, latticeToleranceDeg)
	if len(ways) != 4 {
		t.Fatalf("%d ways", len(ways))
	}
	numbers := map[uint32]bool{}
	for h := 1; h < 6; h++ {
		for k := 1; k < h; k++ {
			for l := 1; l < 6; l++ {
				hkl := crystal.HKL{H: h, K: k, L: l}
				want := s.orbit(hkl, ways)
				numbers[want] = true
				for _, by := range ways {
					for _, e := range s.Series.Group.Equivalents(by.Apply(hkl)) {
						if got := s.orbit(e, ways); got != want {
							t.Errorf("%v, equal to %v, has the number %d and not %d", e, hkl, got, want)
						}
					}
				}
			}
		}
	}
	if len(numbers) < 40 {
		t.Errorf("%d numbers of 50 orbits", len(numbers))
	}
}
