package evidence

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// Percentage points of chi-squared from printed tables (Pearson & Hartley 1966, table 8):
// 0.5543 has 0.01 below it with 5 degrees of freedom, 2.5582 with 10, 8.2604 with 20;
// 37.566 has 0.01 above it with 20.
func TestClassMeanAgainstTables(t *testing.T) {
	for _, c := range []struct {
		name      string
		got, want float64
		tol       float64
	}{
		{"5 centric", ClassMean{Centric: 5}.below(0.5543 / 5), 0.01, 1e-3},
		{"10 centric", ClassMean{Centric: 10}.below(2.5582 / 10), 0.01, 1e-3},
		{"10 acentric", ClassMean{Acentric: 10}.below(8.2604 / 20), 0.01, 1e-3},
		{"least of 20 centric", ClassMean{Centric: 20}.leastMean(1, 0.01), 20 / 37.566, 1e-4},
		{"least of 10 acentric", ClassMean{Acentric: 10}.leastMean(0.5, 0.01), 10 / 37.566, 1e-4},
	} {
		floatcmp.Check(t, c.name, c.got, c.want, 0, c.tol)
	}
}

// For classes of both kinds the chances are bounds: draws of Wilson's law are never
// more often below, and the limit never misses more often, than is said.
func TestClassMeanBoundsMixedClasses(t *testing.T) {
	r := resample.NewSeed(3).At("wilson").Stream(0)
	const draws = 20000
	for _, c := range []ClassMean{{Acentric: 4, Centric: 3}, {Acentric: 1, Centric: 6}, {Acentric: 9, Centric: 1}} {
		const x, chance = 0.4, 0.05
		below, missed := 0, 0
		for range draws {
			sum := 0.0
			for range c.Acentric {
				sum += r.Exponential()
			}
			for range c.Centric {
				z := r.Normal()
				sum += z * z
			}
			mean := sum / float64(c.Acentric+c.Centric)
			if mean <= x {
				below++
			}
			if c.leastMean(mean, chance) > 1 {
				missed++
			}
		}
		said := c.below(x)
		if got := float64(below) / draws; got > said+3*math.Sqrt(said/draws) {
			t.Errorf("%+v: %.4f of draws are below %g, and the bound is %.4f", c, got, x, said)
		}
		if got := float64(missed) / draws; got > chance+3*math.Sqrt(chance/draws) {
			t.Errorf("%+v: the lower limit is above the truth in %.4f", c, got)
		}
	}
}

func TestSymmetryOf(t *testing.T) {
	at := func(n int, su float64, ratio ...float64) (out []ClassMean) {
		for _, r := range ratio {
			out = append(out, ClassMean{Centric: n, Ratio: r, SU: su})
		}
		return out
	}
	many := func(n int, su float64, ratio ...float64) (out []ClassMean) {
		for _, r := range ratio {
			out = append(out, ClassMean{Acentric: n, Ratio: r, SU: su})
		}
		return out
	}
	for _, c := range []struct {
		name    string
		classes []SymmetryClass
		want    Verdict
		says    string
	}{
		{"nothing measured", []SymmetryClass{{Name: "2_1 along a", Forbidden: true}}, NotKnown, "no reflection"},
		{"as it should be", []SymmetryClass{{Name: "2_1 along a", Forbidden: true, Positions: at(6, 0.01, 0.01, 0.05, 0.12)}, {Name: "I centring", Positions: many(700, 0.01, 0.98)}}, Fine, "no class that the group allows is empty (1 looked at), and what its one"},
		{"weak by chance", []SymmetryClass{{Name: "2_1 along a", Positions: at(5, 0.01, 0.2, 0.25)}}, Fine, ""},
		{"half as strong, many", []SymmetryClass{{Name: "n glide perpendicular to c", Positions: at(52, 0.01, 0.46, 0.47)}}, Fine, ""},
		{"empty though allowed", []SymmetryClass{{Name: "2_1 along c", Positions: at(6, 0.005, 0.01, 0.04, 0.1)}}, Caution, "6 reflections that the group allows and 2_1 along c would forbid"},
		{"empty zone empties its axis", []SymmetryClass{{Name: "b glide perpendicular to a", Positions: at(60, 0.001, 0.01)}, {Name: "2_1 along b", Positions: at(7, 0.001, 0.005), Within: []int{0}}}, Caution, "60 reflections that the group allows and b glide perpendicular to a"},
		{"allowed though forbidden, many", []SymmetryClass{{Name: "C centring", Forbidden: true, Positions: many(700, 0.01, 1.02, 0.97)}}, Fails, "as strong as allowed ones at every thickness"},
		{"allowed though forbidden, few", []SymmetryClass{{Name: "2_1 along c", Forbidden: true, Positions: at(6, 0.02, 0.9, 0.8)}}, Caution, "or scattering more than once"},
		{"filled in the thick position only", []SymmetryClass{{Name: "2_1 along c", Forbidden: true, Positions: at(6, 0.005, 0.02, 0.9)}}, Fine, ""},
		{"filled though there is no lattice point", []SymmetryClass{{Name: "C centring", Forbidden: true, Centring: true, Positions: at(6, 0.02, 0.9, 0.8)}}, Caution, "scattering cannot, as no lattice point is there"},
		{"two of three measured", []SymmetryClass{{Name: "2_1 along a", Forbidden: true, Positions: at(6, 0.01, 0.01)}, {Name: "2_1 along b", Forbidden: true, Positions: at(6, 0.01, 0.01)}, {Name: "2_1 along c", Forbidden: true}}, Fine, "what 2 of its 3 symmetry elements forbid is weaker than allowed reflections can be, or too weak or too few to tell; of the others nothing was measured"},
		{"one of three measured", []SymmetryClass{{Name: "2_1 along a", Forbidden: true, Positions: at(6, 0.01, 0.01)}, {Name: "2_1 along b", Forbidden: true}, {Name: "2_1 along c", Forbidden: true}}, Fine, "what one of its 3 symmetry elements forbids"},
		{"too noisy to be anything", []SymmetryClass{{Name: "2_1 along c", Forbidden: true, Positions: at(6, 0.4, 0.5, 0.7)}}, Fine, "too weak or too few"},
	} {
		f := SymmetryOf(c.classes)
		if f.Verdict != c.want || !strings.Contains(f.Why, c.says) {
			t.Errorf("%s: %s: %s", c.name, f.Verdict, f.Why)
		}
		if c.name == "empty zone empties its axis" && strings.Contains(f.Why, "2_1") {
			t.Errorf("%s: %s", c.name, f.Why)
		}
	}
}
