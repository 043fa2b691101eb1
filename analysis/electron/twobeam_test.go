package electron

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"thinward/analysis/internal/floatcmp"
)

func TestTwoBeam(t *testing.T) {
	// Closed form and matrix exponential of the two equations agree.
	for _, c := range []struct{ t, xi, s, want, kinematic, abs float64 }{
		{50, 100, 0, 1, 2.46740110027, 1e-10},
		{100, 100, 0, 0, 9.8696044, 1e-10},
		{25, 100, 0, 0.5, 0.616850275, 1e-10},
		{50, 100, 0.01, 0.31656383551, 1.0, 1e-10},
		{30, 100, 0.005, 0.604503259464, 0.824429495415, 1e-10},
		{120, 80, 0.02, 0.0726371702131, 0.353323631714, 1e-10},
	} {
		floatcmp.Check(t, "two beams", TwoBeam(c.t, c.xi, c.s), c.want, c.abs, 0)
		floatcmp.Check(t, "kinematic", TwoBeamKinematic(c.t, c.xi, c.s), c.kinematic, c.abs, 1e-8)
		floatcmp.Check(t, "symmetry in s", TwoBeam(c.t, c.xi, -c.s), TwoBeam(c.t, c.xi, c.s), 1e-15, 0)
		floatcmp.Check(t, "weak beam", TwoBeam(c.t, c.xi*1e4, c.s)/TwoBeamKinematic(c.t, c.xi*1e4, c.s), 1, 0, 1e-6)
	}
}

func TestTwoBeamMean(t *testing.T) {
	floatcmp.Check(t, "wedge", TwoBeamMean(150, 80), 0.530010543872, 1e-12, 0)
	sum := quad.Fixed(func(x float64) float64 { return TwoBeam(x, 80, 0) }, 0, 150, 60, nil, 0) / 150
	floatcmp.Check(t, "quadrature", TwoBeamMean(150, 80), sum, 1e-12, 0)
	floatcmp.Check(t, "no thickness", TwoBeamMean(0, 80), 0, 0, 0)
}

func TestIntegralOfJ0(t *testing.T) {
	// Abramowitz & Stegun 1964, Table 11.1, from memory; two computations agree.
	for _, c := range []struct{ x, want, abs float64 }{
		{0.5, 0.489680506646, 1e-11}, {1, 0.919730410090, 1e-11}, {2, 1.42577029320, 1e-11}, {3, 1.38756725201, 1e-11},
		{4, 1.02473415946, 1e-11}, {5, 0.715311917785, 1e-11}, {6, 0.706221223550, 1e-11}, {8, 1.21074683483, 1e-11}, {10, 1.06701130396, 1e-11},
	} {
		floatcmp.Check(t, "integral of J0", IntegralJ0(c.x), c.want, c.abs, 0)
	}
	// An independent route: Gauss-Legendre quadrature of math.J0.
	for _, x := range []float64{1e-300, 1e-6, 0.9999e-4, 1.0001e-4, 0.01, 0.7, 12.3, 57, 400, 3000} {
		sum, panels := 0.0, int(x/3)+1
		for i := range panels {
			a, b := x*float64(i)/float64(panels), x*float64(i+1)/float64(panels)
			sum += quad.Fixed(math.J0, a, b, 20, nil, 0)
		}
		floatcmp.Check(t, "quadrature of J0", IntegralJ0(x), sum, 0, 1e-11)
	}
	floatcmp.Check(t, "across the limit", IntegralJ0(20000), IntegralJ0(math.Nextafter(20000, 1e9)), 1e-10, 0)
	for _, c := range []struct{ x, want float64 }{{0, 0}, {math.Inf(1), 1}, {-1, math.NaN()}, {math.NaN(), math.NaN()}} {
		floatcmp.Check(t, "edges", IntegralJ0(c.x), c.want, 0, 0)
	}
}

func TestBlackman(t *testing.T) {
	for _, c := range []struct{ a, want, abs float64 }{
		// Worked with mpmath; quadrature and scipy agree.
		{0.01, 0.999966667167, 1e-11}, {0.1, 0.9966716627, 1e-9}, {0.25, 0.979361013292, 1e-11}, {0.5, 0.919730410090, 1e-11},
		{1, 0.712885146599, 1e-11}, {1.5, 0.462522417337, 1e-11}, {2, 0.256183539865, 1e-11}, {3, 0.117703537258, 1e-11},
		{5, 0.106701130396, 1e-11}, {10, 0.0529189410711, 1e-11}, {20, 0.028144403759, 1e-11}, {0, 1, 0},
	} {
		floatcmp.Check(t, "ratio", BlackmanRatio(c.a), c.want, c.abs, 0)
	}
	for _, c := range []struct{ a, want float64 }{{0.5, 1.4447091}, {1, 2.2395947}, {2, 1.6096487}, {1.2024127788, 2.3095419074}, {math.Inf(1), math.Pi / 2}} {
		floatcmp.Check(t, "rocking integral", RockingIntegral(c.a), c.want, 1e-7, 0)
	}
	// Small a: 1 - a^2/3 + a^4/20.
	floatcmp.Check(t, "series", BlackmanRatio(0.03), 1-0.0009/3+0.03*0.03*0.03*0.03/20, 1e-11, 0)
	floatcmp.Check(t, "across the limit", BlackmanRatio(1e-4), BlackmanRatio(math.Nextafter(1e-4, 0)), 1e-13, 0)
	// The integral of the rocking curve itself; beyond |w| = 400 its mean 1/(2 w^2) is added.
	a, sum := 1.5, 0.0
	for i := range 4000 {
		sum += quad.Fixed(func(w float64) float64 { return TwoBeam(a/math.Pi, 1, w) }, 0.1*float64(i), 0.1*float64(i+1), 8, nil, 0)
	}
	floatcmp.Check(t, "rocking curve", 2*sum+1.0/400, RockingIntegral(a), 2e-5, 0)
	if !math.IsNaN(BlackmanRatio(-1)) || !math.IsNaN(RockingIntegral(-1)) {
		t.Error("a negative argument gave a number")
	}
}

func TestExtinctionDistances(t *testing.T) {
	// Doyle & Turner 1968 factors and the published distances (Hirsch et al. 1965, Appendix)
	// from memory; a sanity check to 3 %. Cells: Al 4.0495, Si 5.4310, in angstrom.
	al := [2][]float64{{2.276, 2.428, 0.858, 0.317}, {72.322, 19.773, 3.080, 0.408}}
	si := [2][]float64{{2.1293, 2.5333, 0.8349, 0.3216}, {57.7748, 16.4756, 2.8796, 0.3860}}
	for _, c := range []struct {
		name            string
		factor          [2][]float64
		cell, hh, atoms float64
		published, ours float64
	}{
		{"Al 111", al, 4.0495, 3, 4, 556, 555.2},
		{"Al 200", al, 4.0495, 4, 4, 673, 663.9},
		{"Al 220", al, 4.0495, 8, 4, 1057, 1062.5},
		{"Si 220", si, 5.4310, 8, 8, 757, 759.5},
		{"Si 111", si, 5.4310, 3, 8 / math.Sqrt2, 602, 618.4},
		{"Si 400", si, 5.4310, 16, 8, 1268, 1244.2},
	} {
		d := c.cell / math.Sqrt(c.hh)
		f := 0.0
		for i, a := range c.factor[0] {
			f += a * math.Exp(-c.factor[1][i]/(4*d*d))
		}
		xi := ExtinctionDistance(100, c.cell*c.cell*c.cell, c.atoms*f, d)
		floatcmp.Check(t, c.name, xi, c.published, 0, 0.03)
		floatcmp.Check(t, c.name+", computed", xi, c.ours, 0, 1e-3)
		// xi = pi cos(theta)/(sigma V_g), sigma in rad/(V angstrom).
		cos := math.Cos(math.Asin(Wavelength(100) / (2 * d)))
		floatcmp.Check(t, c.name+", by the potential", math.Pi*cos/(Interaction(100)/10*Potential(c.atoms*f, c.cell*c.cell*c.cell)), xi, 0, 1e-12)
	}
	floatcmp.Check(t, "potential unit", Potential(1, 1), 47.8776473, 0, 1e-8)
	floatcmp.Check(t, "no scatterer", ExtinctionDistance(100, 64, 0, 2), math.Inf(1), 0, 0)
}
