package evidence

import (
	"math"
	"strings"
	"testing"
)

func TestLaueOf(t *testing.T) {
	good, none := LaueAgreement{"-x,-y,z", 400, 0.94}, LaueAgreement{"y,x,-z", 400, 0.02}
	for _, c := range []struct {
		name      string
		reference float64
		operators []LaueAgreement
		beyond    []string
		verdict   Verdict
		text      string
	}{
		{"all agree", 0.95, []LaueAgreement{good}, nil, Fine, "about as well"},
		{"a higher class too", 0.95, []LaueAgreement{good}, []string{"k,h,-l"}, Fine, "the true class may be higher"},
		{"one does not", 0.95, []LaueAgreement{good, none}, nil, Fails, "y,x,-z (0.02)"},
		{"nearly kept", 0.95, []LaueAgreement{good, {"y,x,-z", 900, 0.6}}, nil, Caution, "twin in unequal parts"},
		// 3.5/sqrt(57) is 0.46: at 0.3 the upper limit, tanh(0.31+0.46), is 0.65.
		{"few pairs", 0.95, []LaueAgreement{good, {"y,x,-z", 60, 0.3}}, nil, Caution, "twin in unequal parts"},
		{"too few pairs", 0.95, []LaueAgreement{{"y,x,-z", 49, 0}}, nil, NotKnown, "too few pairs"},
		{"noise", 0.2, []LaueAgreement{{"y,x,-z", 400, 0}}, nil, NotKnown, "not even reflections that must be equal"},
		{"no reference", math.NaN(), []LaueAgreement{none}, nil, NotKnown, "not even"},
		{"triclinic", math.NaN(), nil, nil, Fine, "Friedel's law alone"},
	} {
		f := LaueOf("4/mmm", c.reference, c.operators, "P 4 (Laue class 4/m)", c.beyond)
		if f.Verdict != c.verdict || !strings.Contains(f.Why, c.text) {
			t.Errorf("%s: %s: %s", c.name, f.Verdict, f.Why)
		}
		if strings.Contains(f.Why, "P 4 (Laue class 4/m)") != (c.verdict == Fails) {
			t.Errorf("%s: the subgroup is not named where it should be: %s", c.name, f.Why)
		}
	}
}

func TestAgrees(t *testing.T) {
	for _, c := range []struct {
		a         LaueAgreement
		reference float64
		want      bool
	}{
		{LaueAgreement{"", 400, 0.9}, 0.95, true}, {LaueAgreement{"", 400, 0.8}, 0.95, false}, {LaueAgreement{"", 40, 0.95}, 0.95, false},
		{LaueAgreement{"", 400, 0.28}, 0.28, false}, {LaueAgreement{"", 400, math.NaN()}, 0.9, false}, {LaueAgreement{"", 400, 0.9}, math.NaN(), false},
	} {
		if got := c.a.Agrees(c.reference); got != c.want {
			t.Errorf("%+v against %g: %t", c.a, c.reference, got)
		}
	}
}
