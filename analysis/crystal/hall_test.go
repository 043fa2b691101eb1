package crystal

import (
	"slices"
	"strings"
	"testing"
)

// Operators as International Tables A lists them (from memory), in any order.
func TestHallOperators(t *testing.T) {
	for _, c := range []struct{ hall, operators string }{
		{"P 1", "x,y,z"},
		{"-P 2ybc", "x,y,z -x,y+1/2,-z+1/2 -x,-y,-z x,-y+1/2,z+1/2"},
		{"P 2ac 2ab", "x,y,z -x+1/2,-y,z+1/2 -x,y+1/2,-z+1/2 x+1/2,-y+1/2,-z"},
		{"P 31 2c (0 0 1)", "x,y,z -y,x-y,z+1/3 -x+y,-x,z+2/3 -y,-x,-z+2/3 -x+y,y,-z+1/3 x,x-y,-z"},
		{"P 32 2\"", "x,y,z -y,x-y,z+2/3 -x+y,-x,z+1/3 y,x,-z x-y,-y,-z+1/3 -x,-x+y,-z+2/3"},
		{"P 4abw 2nw", "x,y,z -x,-y,z+1/2 -y+1/2,x+1/2,z+1/4 y+1/2,-x+1/2,z+3/4 -x+1/2,y+1/2,-z+1/4 x+1/2,-y+1/2,-z+3/4 y,x,-z -y,-x,-z+1/2"},
		{"P 3*", "x,y,z z,x,y y,z,x"},
		{"A 2 -2c", "x,y,z -x,-y,z x,-y,z+1/2 -x,y,z+1/2 x,y+1/2,z+1/2 -x,-y+1/2,z+1/2 x,-y+1/2,z -x,y+1/2,z"},
		{"R 3", "x,y,z -y,x-y,z -x+y,-x,z x+2/3,y+1/3,z+1/3 -y+2/3,x-y+1/3,z+1/3 -x+y+2/3,-x+1/3,z+1/3 x+1/3,y+2/3,z+2/3 -y+1/3,x-y+2/3,z+2/3 -x+y+1/3,-x+2/3,z+2/3"},
		{"P 4x", "x,y,z x,-z,y x,-y,-z x,z,-y"},
		{"P 3y", "x,y,z -x+z,y,-x -z,y,x-z"},
		{"P 2z 2\"", "x,y,z -x,-y,z y,x,-z -y,-x,-z"},
		{"P 2x 2'", "x,y,z x,-y,-z -x,-z,-y -x,z,y"},
		{"P 2y (x,y,z+1/24)", "x,y,z -x,y,-z+1/12"},
		{"P 2 (z,x,y)", "x,y,z x,-y,-z"}, // the axis z becomes the first
	} {
		g, err := FromHall(c.hall)
		if err != nil {
			t.Error(err)
			continue
		}
		var got []string
		for _, o := range g.Operators() {
			got = append(got, o.String())
		}
		want := strings.Fields(c.operators)
		slices.Sort(got)
		slices.Sort(want)
		if !slices.Equal(got, want) {
			t.Errorf("%s: %v, want %v", c.hall, got, want)
		}
	}
}

func TestHallErrors(t *testing.T) {
	for _, c := range []struct{ hall, want string }{
		{"", "empty"},
		{"P", "no rotation after"},
		{"Q 2", "\"Q\" is none of"},
		{"PP 2", "\"pp\" where a lattice letter"},
		{"P 5", "begins with no rotation"},
		{"P -", "begins with no rotation"},
		{"P 2q", "'q' is neither"},
		{"P 2xy", "two axes"},
		{"P 22", "screw digit 2 is not less"},
		{"P 411", "two screw digits"},
		{"P 1x", "order 1 takes neither"},
		{"P 3'", "order 2 only"},
		{"P 2*", "order 3 only"},
		{"P 3 2'1", "axes x, y, z only"},
		{"P 2 4", "no axis is implied"},
		{"P 4 2 3 2 2 2 2", "parts"},
		{"P 2 (0 0 1", "no closing bracket"},
		{"P 2 (0 0)", "2 numbers"},
		{"P 2 (0 0 1/2)", "\"1/2\" is not a whole number of twelfths"},
		{"P 2 (x,y,2*z)", "determinant"},
		{"P 4x 6z", "more operators than any space group"},
	} {
		_, err := FromHall(c.hall)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: error %v, want %q", c.hall, err, c.want)
		}
	}
}

// Every setting with its origin moved is found again, and the Hall symbol that is
// given for it expands to the same operators.
func TestOriginShifts(t *testing.T) {
	shift := [3]int{3, 5, 10}
	for i, s := range Tabulated() {
		if i%7 != 0 && s.Number > 15 {
			continue
		}
		g, err := s.Group()
		if err != nil {
			t.Fatal(err)
		}
		ops := g.Operators()
		for j := range ops {
			ops[j] = ops[j].shifted(shift)
		}
		moved, err := FromOperators(ops)
		if err != nil {
			t.Errorf("%s: %v", s.Hall, err)
			continue
		}
		if moved.Number() != s.Number {
			t.Errorf("%s moved: found as number %d", s.Hall, moved.Number())
			continue
		}
		again, err := FromHall(moved.Hall())
		if err != nil {
			t.Errorf("%s moved: %v", s.Hall, err)
		} else if fingerprint(again.ops) != fingerprint(moved.ops) {
			t.Errorf("%s moved: Hall symbol %s gives other operators", s.Hall, moved.Hall())
		}
	}
}

func TestFromOperators(t *testing.T) {
	for _, c := range []struct{ lines, want string }{
		{"x,y,z;-x,-y,z+1/2;x+1/2,-y+1/2,-z", "missing -x+1/2,y+1/2,-z+1/2"},
		{"-x,-y,-z", "missing x,y,z"},
		{"x,y,z;y,z,x;-x,-y,z;-x,-y,-z", "composing them gives 24; missing"},
		{"x,y,z;x+y,y,z", "more operators than any space group"},
		{"x,y,z;x,y,q", "operator 2 of 2"},
		{"x,y,z;-x,y,-z;x+1/2,y+1/2,z", "list of 3 symmetry operators is not complete: composing them gives 4; missing -x+1/2,y+1/2,-z"},
	} {
		_, err := ParseOperators(strings.Split(c.lines, ";"))
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", c.lines, err, c.want)
		}
	}
	if _, err := FromOperators(nil); err == nil || err.Error() != "no symmetry operators" {
		t.Errorf("empty list: %v", err)
	}
	g, err := ParseOperators([]string{"x,y,z", "-x,y+1/2,-z", "x,y,z"})
	if err != nil {
		t.Fatal(err)
	}
	if g.HM() != "P 1 21 1" || g.Order() != 2 || g.LaueSetting() != "1 2/m 1" {
		t.Errorf("repeated operator: %s, %d operators, %s", g.HM(), g.Order(), g.LaueSetting())
	}
	// A body-centred cell doubled along c is a lattice without a letter.
	g, err = ParseOperators([]string{"x,y,z", "x+1/2,y+1/2,z+1/4", "x,y,z+1/2", "x+1/2,y+1/2,z+3/4"})
	if err != nil {
		t.Fatal(err)
	}
	if g.Number() != 0 || g.HM() != "" || g.Hall() != "" || g.Centring() != "0,0,0; 1/2,1/2,1/4; 0,0,1/2; 1/2,1/2,3/4" {
		t.Errorf("untabulated: %d %q %q %q", g.Number(), g.HM(), g.Hall(), g.Centring())
	}
	if !g.Absent(HKL{1, 0, 0}) || !g.Absent(HKL{0, 0, 2}) || g.Absent(HKL{1, 0, 2}) || g.Absent(HKL{0, 0, 4}) {
		t.Error("untabulated: absences of the doubled cell")
	}
}
