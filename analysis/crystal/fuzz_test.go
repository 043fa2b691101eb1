package crystal

import "testing"

// The seeds lie in testdata/fuzz, one file each, with whatever was found since.

// What is read writes itself so that it reads back the same, and is invertible.
func FuzzParseOp(f *testing.F) {
	f.Fuzz(func(t *testing.T, s string) {
		o, err := ParseOp(s)
		if err != nil {
			return
		}
		back, err := ParseOp(o.String())
		if err != nil || back != o {
			t.Fatalf("%q: %s reads back as %s, %v", s, o, back, err)
		}
		for i := range 3 {
			if o.T[i] < 0 || o.T[i] >= Twentyfourths {
				t.Fatalf("%q: translation %v", s, o.T)
			}
		}
		if p := o.Compose(o.Inverse()); p != Identity() {
			t.Fatalf("%q: composed with its inverse %s", s, p)
		}
	})
}

// A Hall symbol that is read gives a group, closed and consistent in itself.
func FuzzFromHall(f *testing.F) {
	f.Fuzz(func(t *testing.T, s string) {
		g, err := FromHall(s)
		if err != nil {
			return
		}
		again, err := FromOperators(g.Operators())
		if err != nil {
			t.Fatalf("%q: %v", s, err)
		}
		if again.Number() != g.Number() || again.PointGroup() != g.PointGroup() || again.Centring() != g.Centring() {
			t.Fatalf("%q: %s and by its operators %s", s, g, again)
		}
		checkGroup(t, g)
	})
}

// A symbol that is found names a group whose own symbol leads back to it.
func FuzzLookup(f *testing.F) {
	f.Fuzz(func(t *testing.T, s string) {
		g, err := Lookup(s)
		if err != nil {
			if err.Error() == "" {
				t.Fatalf("%q: empty error", s)
			}
			return
		}
		if g.HM() != "" && g.OriginShift() == ([3]int{}) {
			back, err := Lookup(g.HM())
			if err != nil || back.Hall() != g.Hall() {
				t.Fatalf("%q: %s does not lead back: %v", s, g.HM(), err)
			}
		}
		checkGroup(t, g)
	})
}

// checkGroup holds a group to what is true of any.
func checkGroup(t *testing.T, g *Group) {
	t.Helper()
	if len(g.coset)*len(g.lattice) != g.Order() {
		t.Fatalf("%s: %d rotation parts times %d lattice points are not %d operators", g, len(g.coset), len(g.lattice), g.Order())
	}
	for _, h := range []HKL{{0, 0, 0}, {1, 0, 0}, {0, 3, 0}, {0, 0, 1}, {2, 1, 0}, {1, 1, 2}, {-4, 2, 7}} {
		rep := g.Canonical(h)
		if g.Canonical(rep) != rep || g.Multiplicity(rep) != g.Multiplicity(h) || g.Absent(rep) != g.Absent(h) {
			t.Fatalf("%s: %v and its representative %v differ", g, h, rep)
		}
		if (len(g.ForbiddenBy(h)) > 0) != g.Absent(h) {
			t.Fatalf("%s: %v forbidden by %v, absent %v", g, h, g.ForbiddenBy(h), g.Absent(h))
		}
	}
}
