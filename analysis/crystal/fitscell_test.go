package crystal

import (
	"math/rand/v2"
	"strings"
	"testing"
)

// A metric averaged over a group is left as it is by its rotations, a general one is not
// unless the group is triclinic: for every tabulated setting.
func TestFitsCellInEverySetting(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for _, s := range Tabulated() {
		g, err := s.Group()
		if err != nil {
			t.Fatal(err)
		}
		for range 5 {
			general := Cell{10 + 10*r.Float64(), 30 + 10*r.Float64(), 50 + 10*r.Float64(), 70 + 10*r.Float64(), 95 + 10*r.Float64(), 106 + 8*r.Float64()}
			fit := cellOfMetric(g.meanMetric(general))
			if err := g.FitsCell(fit, 1e-9, 1e-6); err != nil {
				t.Errorf("%s: %v", g, err)
			}
			near := fit
			near.A *= 1.004
			near.Beta += 0.2
			if err := g.FitsCell(near, 0.02, 1); err != nil {
				t.Errorf("%s: within the tolerance: %v", g, err)
			}
			if err := g.FitsCell(general, 0.02, 1); (err == nil) != (g.System() == "triclinic") {
				t.Errorf("%s: cell %s: %v", g, general, err)
			}
		}
	}
}

// International Tables A, table 2.1.2.1: what the lattice of each system asks for.
func TestFitsCellSaysWhatTheGroupAsksFor(t *testing.T) {
	for _, c := range []struct {
		symbol string
		cell   Cell
		want   string
	}{
		{"P 4 2 2", Cell{11.1, 14.7, 9.3, 90, 98, 90}, "which asks for a = b and beta = 90:"},
		{"P 21 21 21", Cell{11.1, 14.7, 9.3, 90, 98, 90}, "which asks for beta = 90:"},
		{"P 1 1 21", Cell{11.1, 14.7, 9.3, 90, 98, 90}, "which asks for beta = 90:"},
		{"P 2 3", Cell{11.1, 14.7, 9.3, 90, 90, 90}, "which asks for a = b and b = c and a = c:"},
		{"P 6", Cell{11, 11, 9.3, 90, 90, 90}, "which asks for gamma = 120:"},
		{"R 3 :R", Cell{11, 11, 11, 80, 90, 80}, "which asks for alpha = beta and beta = gamma:"},
	} {
		if err := mustLookup(t, c.symbol).FitsCell(c.cell, 0.02, 1); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("%s: error %v, want %q", c.symbol, err, c.want)
		}
	}
}
