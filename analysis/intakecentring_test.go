package analysis

import (
	"strings"
	"testing"

	"thinward/analysis/crystal"
)

// Each bound of the judgement, from both sides.
func TestJudgeCentring(t *testing.T) {
	for _, c := range []struct {
		r         CentringResult
		explained bool
		verdict   string
		want      string
	}{
		{CentringResult{Stated: true, N: 19, Ratio: 1, SU: 0.1}, false, "not known", "19 reflections"},
		{CentringResult{Stated: true, N: 20, Ratio: 0.41, SU: 0.1}, false, "fails", "0.41 +- 0.10"},
		{CentringResult{Stated: true, N: 20, Ratio: 0.39, SU: 0.1}, false, "caution", "not quite absent (0.390 +- 0.100"},
		{CentringResult{Stated: true, N: 20, Ratio: 0.29, SU: 0.1}, false, "fine", "absent, as it must be"},
		// 69 standard uncertainties are not absent, however little they are.
		{CentringResult{Stated: true, N: 900, Ratio: 0.0607, SU: 0.0009}, false, "caution", "not quite absent (0.061 +- 0.001"},
		{CentringResult{N: 900, Expected: 1000, Ratio: 0.0607, SU: 0.0009}, false, "caution", "hardly there (0.061 +- 0.001"},
		{CentringResult{N: 900, Expected: 1000, Ratio: 0.0607, SU: 0.0009}, true, "fine", "the centring above"},
		{CentringResult{N: 9, Expected: 100}, false, "caution", "hardly any"},
		{CentringResult{N: 11, Expected: 100, Ratio: 1, SU: 0.1}, false, "not known", "too few"},
		{CentringResult{N: 0, Expected: 19}, false, "not known", "too few"},
		{CentringResult{N: 90, Expected: 100, Ratio: 0.008, SU: 0.007}, false, "caution", "write the group of the centred lattice"},
		{CentringResult{N: 90, Expected: 100, Ratio: 0.008, SU: 0.007}, true, "fine", "the centring above"},
		{CentringResult{N: 90, Expected: 100, Ratio: 0.012, SU: 0.007}, false, "caution", "hardly there"},
		{CentringResult{N: 90, Expected: 100, Ratio: 0.101, SU: 0.007}, false, "fine", "though nearly"},
		{CentringResult{N: 90, Expected: 100, Ratio: 0.49, SU: 0.01}, false, "fine", "though nearly"},
		{CentringResult{N: 90, Expected: 100, Ratio: 0.51, SU: 0.01}, false, "fine", "is there: the lattice is not so centred"},
	} {
		r := c.r
		judgeCentring(&r, c.explained)
		if r.Verdict != c.verdict || !strings.Contains(r.Why, c.want) {
			t.Errorf("%+v: %s, %s", c.r, r.Verdict, r.Why)
		}
	}
}

// The conditions are those of the groups with the lattice: in a group without any other
// absence a reflection in general position is allowed exactly when the condition holds.
func TestCentringConditions(t *testing.T) {
	for _, c := range []struct{ name, group string }{
		{"F", "F 2 2 2"}, {"I", "I 2 2 2"}, {"C", "C 2 2 2"}, {"A", "A 1 2 1"}, {"B", "B 1 1 2"}, {"R", "R 3 :H"},
	} {
		g, err := crystal.Lookup(c.group)
		if err != nil {
			t.Fatal(err)
		}
		found := false
		for _, x := range centrings {
			if x.name != c.name {
				continue
			}
			found = true
			if g.Centring() != x.name {
				t.Errorf("%s has the lattice %s", c.group, g.Centring())
			}
			general(func(h crystal.HKL) {
				if g.Absent(h) == x.allows(h.H, h.K, h.L) {
					t.Fatalf("%s: %v", c.group, h)
				}
			})
		}
		if !found {
			t.Errorf("%s is not asked for", c.name)
		}
	}
}
