package crystal

import (
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestParseOpSpellings(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"x,y,z", "x,y,z"},
		{"'-x+1/2, y, -z'", "-x+1/2,y,-z"},
		{"\"-x+1/2, y, -z\"", "-x+1/2,y,-z"},
		{"1/2-x,1/2+y,-z", "-x+1/2,y+1/2,-z"},
		{"x+0.5,y,z", "x+1/2,y,z"},
		{"X,Y,Z", "x,y,z"},
		{" -X + 1/2 ,\tY - 1/2 , Z ", "-x+1/2,y+1/2,z"},
		{"+x,+y,+z", "x,y,z"},
		{"-y,x-y,z+2/3", "-y,x-y,z+2/3"},
		{"y-x,-x,z+.6667", "-x+y,-x,z+2/3"},
		{"-Y,X-Y,1/3+Z", "-y,x-y,z+1/3"},
		{"x+0.33,y+0.666,z+0.16667", "x+1/3,y+2/3,z+1/6"},
		{"x+5/4,y-1/4,z+2", "x+1/4,y+3/4,z"},
		{"x+1/24,y+0.125,z+7/8", "x+1/24,y+1/8,z+7/8"},
		{"1*x,y,z", "x,y,z"},
		{"x+2*y,y,z", "x+2*y,y,z"},
		{"x-y+x-x,y,z", "x-y,y,z"},
		{"\u2212x,\u2212y,z", "-x,-y,z"},
		{"x+1/2+1/4,y,z", "x+3/4,y,z"},
	} {
		o, err := ParseOp(c.text)
		if err != nil {
			t.Errorf("%q: %v", c.text, err)
		} else if o.String() != c.want {
			t.Errorf("%q: read as %s, want %s", c.text, o, c.want)
		}
	}
}

func TestParseOpErrors(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"", "1 components"},
		{"x,y", "2 components"},
		{"x,y,z,x", "4 components"},
		{"x,,z", "component 2: empty"},
		{"x,y,w", "component 3: \"w\" where"},
		{"x,y,z+", "ends in a sign"},
		{"x,y,z z", "no sign before \"z\""},
		{"x,y,1/2z", "coefficient \"1/2\" of z"},
		{"x+0.3,y,z", "\"0.3\" is not near enough to a multiple of 1/24"},
		{"x+1/5,y,z", "\"1/5\" is not a multiple of 1/24"},
		{"x+1/0,y,z", "\"1/0\" is not a fraction"},
		{"x+1/2/3,y,z", "is not a fraction"},
		{"x+.,y,z", "\".\" is not a number"},
		{"x+1.2.3,y,z", "\"1.2.3\" is not a number"},
		{"x,x,z", "determinant of the rotation part is 0"},
		{"2*x,y,z", "determinant of the rotation part is 2"},
		{"x+9*y,y,z", "coefficient \"9\""},
		{"x+2*y+2*y,y,z", "coefficient 4 of y"},
		{"x+2*,y,z", "nothing follows *"},
		{"x+1e3,y,z", "no sign before \"e3\""},
	} {
		_, err := ParseOp(c.text)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%q: error %v, want %q", c.text, err, c.want)
		}
	}
}

// Over all operators of all settings: text round trip, group inverse, and the
// action on reflections as the transpose of that on coordinates.
func TestOperatorIdentities(t *testing.T) {
	seen := map[Op]bool{}
	for _, s := range Tabulated() {
		g, err := s.Group()
		if err != nil {
			t.Fatal(err)
		}
		for _, o := range g.Operators() {
			seen[o] = true
		}
	}
	x, h := [3]float64{0.13, 0.41, 0.77}, HKL{2, -3, 5}
	for o := range seen {
		back, err := ParseOp(o.String())
		if err != nil || back != o {
			t.Errorf("%s reads back as %s, %v", o, back, err)
		}
		if o.Compose(o.Inverse()) != Identity() || o.Inverse().Compose(o) != Identity() {
			t.Errorf("%s: inverse %s", o, o.Inverse())
		}
		// h (R x + t) = (h R) x + h t.
		y := o.Apply(x)
		left := float64(h.H)*y[0] + float64(h.K)*y[1] + float64(h.L)*y[2]
		r := o.ApplyHKL(h)
		ht := float64(h.H*int(o.T[0])+h.K*int(o.T[1])+h.L*int(o.T[2])) / 24
		floatcmp.Check(t, o.String(), float64(r.H)*x[0]+float64(r.K)*x[1]+float64(r.L)*x[2]+ht, left, 1e-12, 0)
	}
	if len(seen) < 800 {
		t.Errorf("only %d different operators met", len(seen))
	}
}

func TestInversePanics(t *testing.T) {
	defer func() {
		if r := recover(); r != "crystal: Op.Inverse: determinant is not 1 or -1" {
			t.Errorf("panic %v", r)
		}
	}()
	Op{}.Inverse()
}
