package evidence

import (
	"math"
	"strings"
	"testing"
)

func TestCentringNull(t *testing.T) {
	for _, c := range []struct {
		name                     string
		thin, thinSU, thick, dSU float64
		verdict                  Verdict
		says                     string
	}{
		{"flat", 0.001, 0.003, 0.002, 0.004, Fine, "no background does"},
		{"rises clear of its error", 0.023, 0.003, 0.111, 0.004, Caution, "no lattice point to be filled"},
		{"rises within its error", 0, 0.05, 0.1, 0.05, Fine, ""},
		{"rises by nothing much", 0, 0.0001, 0.004, 0.0001, Fine, ""},
		{"falls", 0.1, 0.001, 0, 0.001, Fine, ""},
		{"measured in one position", 0.1, 0.001, math.NaN(), math.NaN(), NotKnown, "both positions"},
	} {
		f := CentringNull(c.thin, c.thinSU, c.thick, c.dSU)
		if f.Verdict != c.verdict || !strings.Contains(f.Why, c.says) {
			t.Errorf("%s: %v: %s", c.name, f.Verdict, f.Why)
		}
	}
}
