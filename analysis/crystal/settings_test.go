package crystal

import (
	"os"
	"strconv"
	"strings"
	"testing"
)

// settingFact is one row of testdata/settings_facts.tsv: operator count,
// centring, point group and Laue class of a tabulated setting, from a second
// implementation, whose point group does not tell orientations apart; the operator
// counts are also the order of the point group times that of the centring.
type settingFact struct {
	number                      int
	choice, hall                string
	operators                   int
	centring, pointGroup, class string
}

func settingFacts(t testing.TB) []settingFact {
	t.Helper()
	data, err := os.ReadFile("testdata/settings_facts.tsv")
	if err != nil {
		t.Fatal(err)
	}
	var facts []settingFact
	for line := range strings.Lines(string(data)) {
		f := strings.Split(strings.TrimSuffix(line, "\n"), "\t")
		number, err1 := strconv.Atoi(f[0])
		n, err2 := strconv.Atoi(f[3])
		if err1 != nil || err2 != nil || len(f) != 7 {
			t.Fatalf("settings_facts.tsv: %q", line)
		}
		facts = append(facts, settingFact{number, f[1], f[2], n, f[4], f[5], f[6]})
	}
	if len(facts) != 530 {
		t.Fatalf("settings_facts.tsv: %d settings, want 530", len(facts))
	}
	return facts
}

func TestEverySetting(t *testing.T) {
	facts := settingFacts(t)
	for i, s := range Tabulated() {
		f := facts[i]
		g, err := s.Group()
		if err != nil {
			t.Errorf("%d %s: %v", s.Number, s.Choice, err)
			continue
		}
		if s.Number != f.number || s.Choice != f.choice || s.Hall != f.hall {
			t.Errorf("row %d: %+v against %+v", i, s, f)
		}
		if g.Order() != f.operators || g.Centring() != f.centring || g.PointGroup() != f.pointGroup || g.LaueClass() != f.class {
			t.Errorf("%d %q: %d operators, centring %s, point group %s, Laue class %s; want %+v",
				s.Number, s.Hall, g.Order(), g.Centring(), g.PointGroup(), g.LaueClass(), f)
		}
		again, err := FromOperators(g.Operators())
		if err != nil {
			t.Errorf("%d %q: operators as a list: %v", s.Number, s.Hall, err)
			continue
		}
		if again.Number() != s.Number || again.OriginShift() != ([3]int{}) {
			t.Errorf("%d %q: operators as a list found as %d %s", s.Number, s.Hall, again.Number(), again.Hall())
		}
		found, err := Lookup(s.Symbol())
		if err != nil {
			t.Errorf("%d %s: Lookup(%q): %v", s.Number, s.Choice, s.Symbol(), err)
		} else if found.HM() != s.Symbol() || found.Number() != s.Number || found.Choice() != s.Choice {
			t.Errorf("%d %s: Lookup(%q) is %d %s", s.Number, s.Choice, s.Symbol(), found.Number(), found.Choice())
		}
	}
}
