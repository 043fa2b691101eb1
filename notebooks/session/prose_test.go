package session

import "testing"

func TestProse(t *testing.T) {
	for _, c := range []struct{ in, want string }{
		{"", ""},
		{"farthest in L2: thin - thick: r", "farthest in L2: thin \u2212 thick: r"},
		{"-0.05, z = -2.5 (-0.1 to -3)", "\u22120.05, z = \u22122.5 (\u22120.1 to \u22123)"},
		{"h,k,-l and L1-thin, 1e-05, thin-film, 2019-01", "h,k,-l and L1-thin, 1e-05, thin-film, 2019-01"},
		{"-0.0087 +- 0.00348", "\u22120.0087 \u00b1 0.00348"},
		{"under 1 other choices of", "under 1 other choice of"},
		{"11 choices, 0.1 pairs, 1 of 3 crystals, 21 crystals", "11 choices, 0.1 pairs, 1 of 3 crystals, 21 crystals"},
		{"1 rows for each observation", "1 row for each observation"},
		{"0.03 x J, 2 x 3, index x 4", "0.03 \u00d7 J, 2 \u00d7 3, index x 4"},
		{"tau^2 and I^2", "\u03c4\u00b2 and I\u00b2"},
		{"I/sigma >= 3", "I/\u03c3 \u2265 3"},
		{"2_1 along a, 6_3, m_2", "2\u2081 along a, 6\u2083, m_2"},
		{"largest at 1.95 A, z", "largest at 1.95 \u00c5, z"},
		{"A^2 of B for each e/A^2", "\u00c5\u00b2 of B for each e/\u00c5\u00b2"},
		{"3 A B C", "3 A B C"},
	} {
		if got := prose(c.in); got != c.want {
			t.Errorf("%q is shown as %q, not %q", c.in, got, c.want)
		}
		if got := prose(c.want); got != c.want {
			t.Errorf("%q changes once more, to %q", c.want, got)
		}
	}
}

func TestFarthest(t *testing.T) {
	names := []string{"L1", "L2", "L2: thin - thick", "L2/thin"}
	for _, c := range []struct{ why, place, rest string }{
		{"farthest in L2: thin - thick: differs", "L2: thin - thick", "differs"},
		{"farthest in L2: the nearest, L3", "L2", "the nearest, L3"},
		{"farthest in L2/thin: gain", "L2/thin", "gain"},
		{"farthest in L9: gain", "", "farthest in L9: gain"},
		{"nothing", "", "nothing"},
	} {
		if place, rest := farthest(c.why, names); place != c.place || rest != c.rest {
			t.Errorf("%q is cut to %q and %q", c.why, place, rest)
		}
	}
}
