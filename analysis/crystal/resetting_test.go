package crystal

import (
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// The settings of one space group are told apart by the order of axes in
// International Tables A, table 1.5.4.4: P n m a (abc) is P b n m as cab and P m c n as bca; P
// 21/c is P 21/a with a and c exchanged and b turned over.
func TestResetting(t *testing.T) {
	cell := Cell{9, 11, 13, 90, 90, 90}
	for _, c := range []struct {
		symbol, change, want string
		cell                 Cell
	}{
		{"P n m a", "l,h,k", "P b n m", Cell{13, 9, 11, 90, 90, 90}},
		{"P n m a", "k,l,h", "P m c n", Cell{11, 13, 9, 90, 90, 90}},
		{"P n m a", "k,h,-l", "P m n b", Cell{11, 9, 13, 90, 90, 90}},
		{"P 1 21/c 1", "l,-k,h", "P 1 21/a 1", Cell{13, 11, 9, 90, 90, 90}},
		{"C 2 2 21", "l,h,k", "A 21 2 2", Cell{13, 9, 11, 90, 90, 90}},
		{"P 21 21 21", "h,k,l", "P 21 21 21", cell},
		{"I 41", "k,h,-l", "I 41", Cell{11, 9, 13, 90, 90, 90}},
	} {
		by, err := ParseReindexing(c.change)
		if err != nil {
			t.Fatal(err)
		}
		if by.String() != c.change {
			t.Errorf("%q is read as %s", c.change, by)
		}
		g := mustLookup(t, c.symbol)
		got, err := by.Group(g)
		if err != nil {
			t.Errorf("%s by %s: %v", c.symbol, c.change, err)
			continue
		}
		want := mustLookup(t, c.want)
		if got.Number() != want.Number() || got.HM() != want.HM() {
			t.Errorf("%s by %s: %d %s, want %s", c.symbol, c.change, got.Number(), got.HM(), c.want)
		}
		// Whatever the change, absences, epsilon and spacings go with the index.
		box(4, func(h HKL) {
			if h == (HKL{}) {
				return
			}
			n := by.Apply(h)
			if g.Absent(h) != got.Absent(n) || g.Epsilon(h) != got.Epsilon(n) || g.Centric(h) != got.Centric(n) {
				t.Fatalf("%s by %s: %v and its image %v differ", c.symbol, c.change, h, n)
			}
			floatcmp.Check(t, c.change, by.Cell(cell).D(n), cell.D(h), 0, 1e-12)
		})
		d := CompareCells(by.Cell(cell), c.cell)
		floatcmp.Check(t, c.change+": cell", d.Length, 0, 1e-12, 0)
		floatcmp.Check(t, c.change+": angles", d.Angle, 0, 1e-9, 0)
	}
	for _, c := range []struct{ text, want string }{
		{"h,h,l", "determinant of the rotation part is 0"}, {"2h,k,l", "determinant of the rotation part is 2"}, {"h+1/2,k,l", "holds a constant"}, {"x,y,z", "write it with h, k, l"}, {"h,k", "is no change of indices"},
	} {
		if _, err := ParseReindexing(c.text); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: %v, want %q", c.text, err, c.want)
		}
	}
	if _, err := (Reindexing{M: [3][3]int{{2, 0, 0}, {0, 1, 0}, {0, 0, 1}}, Den: 1}).Group(mustLookup(t, "P 1")); err == nil {
		t.Error("a change of the cell volume gave a group")
	}
}
