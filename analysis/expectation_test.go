package analysis

import (
	"context"
	"math"
	"reflect"
	"strings"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
	"thinward/analysis/internal/floatcmp"
)

func expectationSeries(keV float64) Series {
	rows := &intensity.Columns{H: []int16{1, 1, 2}, K: []int16{1, 2, 1}, L: []int16{1, 0, 3}, I: []float64{10, 20, 30}, Sigma: []float64{1, 1, 1}}
	group, err := crystal.Lookup("P 21 21 21")
	if err != nil {
		panic(err)
	}
	position := func(name string, nm float64) Position {
		return Position{Name: name, ThicknessNM: nm, Rows: rows, Policy: intensity.RowsRepeats}
	}
	return Series{
		Title: "Expectation", EnergyKeV: keV, Group: group, Cell: crystal.Cell{A: 9, B: 11, C: 13, Alpha: 90, Beta: 90, Gamma: 90},
		Crystals: []Specimen{
			{Name: "L1", Positions: []Position{position("thick", 300), position("thin", 140)}},
			{Name: "L2", Positions: []Position{position("thin", 150), position("thick", 300)}},
		},
	}
}

func expect(t *testing.T, s Series) *Expectation {
	t.Helper()
	study, err := New(s, nil)
	if err != nil {
		t.Fatal(err)
	}
	e, err := study.Expectation(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	return e
}

func TestExpectation(t *testing.T) {
	e := expect(t, expectationSeries(200))
	// CODATA 2018 constants worked with mpmath.
	floatcmp.Check(t, "wavelength", e.WavelengthA, 0.02507934045, 0, 1e-8)
	floatcmp.Check(t, "interaction", e.InteractionVnm, 0.00728840104, 0, 1e-8)
	floatcmp.Check(t, "uncertainty", e.Uncertainty, 0.3, 0, 0)
	if !strings.HasPrefix(e.Source, "estimated from composition") || e.Why != "" {
		t.Errorf("source %q, why %q", e.Source, e.Why)
	}
	var nm []float64
	for _, b := range e.Budget {
		nm = append(nm, b.ThicknessNM)
		floatcmp.Check(t, "sum", b.Unscattered+b.Kinematic+b.Multiple+b.Inelastic, 1, 1e-12, 0)
		floatcmp.Check(t, "inelastic", b.Inelastic, 1-math.Exp(-b.ThicknessNM/e.InelasticMFPNM), 1e-12, 0)
		for _, x := range [][3]float64{{b.KinematicRange[0], b.Kinematic, b.KinematicRange[1]}, {b.MultipleRange[0], b.Multiple, b.MultipleRange[1]}, {b.InelasticRange[0], b.Inelastic, b.InelasticRange[1]}} {
			if !(x[0] < x[1] && x[1] < x[2]) {
				t.Errorf("%g nm: %v", b.ThicknessNM, x)
			}
		}
		floatcmp.Check(t, "least inelastic", b.InelasticRange[0], -math.Expm1(-b.ThicknessNM/(1.3*e.InelasticMFPNM)), 0, 1e-12)
		floatcmp.Check(t, "kinematic over unscattered", b.Kinematic/b.Unscattered, b.ThicknessNM/e.ElasticMFPNM, 0, 1e-12)
	}
	floatcmp.CheckSlice(t, "thicknesses", nm, []float64{140, 150, 300}, 0, 0)
	last := e.BudgetGrid[len(e.BudgetGrid)-1]
	floatcmp.Check(t, "grid starts", e.BudgetGrid[0].Unscattered, 1, 0, 0)
	floatcmp.Check(t, "grid ends", last.ThicknessNM, 375, 0, 1e-12)
	two := e.TwoBeam
	floatcmp.CheckSlice(t, "curve thicknesses", two.ThicknessNM[:], []float64{140, 300}, 0, 0)
	for i, z := range two.Strength {
		a := math.Pi * 300 * math.Sqrt(z) / two.ExtinctionNM
		if a < 0.4 {
			floatcmp.Check(t, "small A", two.Thick[i], 1-a*a/3+a*a*a*a/20-math.Pow(a, 6)/252, 2e-7, 0)
		}
		if i > 0 && !(two.Thin[i] < two.Thin[i-1] && two.Thin[i] > two.Thick[i]) {
			t.Errorf("strength %g: thin %g after %g, thick %g", z, two.Thin[i], two.Thin[i-1], two.Thick[i])
		}
	}
	// The lowest third of three reflections is the one of 1 1 1.
	floatcmp.Check(t, "d", two.DA, 1/math.Sqrt(1.0/81+1.0/121+1.0/169), 0, 1e-12)
}

func TestExpectationMeanFreePaths(t *testing.T) {
	s := expectationSeries(300)
	estimated := expect(t, s)
	s.ElasticMFPNM, s.InelasticMFPNM = 500, 395
	e := expect(t, s)
	floatcmp.Check(t, "elastic", e.ElasticMFPNM, 500, 0, 0)
	floatcmp.Check(t, "inelastic", e.InelasticMFPNM, 395, 0, 0)
	if e.Source != "given" || e.Uncertainty != 0 || e.Budget[0].KinematicRange != nil {
		t.Errorf("source %q, uncertainty %g", e.Source, e.Uncertainty)
	}
	s.ElasticMFPNM = 0
	e = expect(t, s)
	floatcmp.Check(t, "elastic estimated", e.ElasticMFPNM, estimated.ElasticMFPNM, 0, 0)
	if !strings.HasPrefix(e.Source, "inelastic given, elastic estimated") || e.Uncertainty != 0.3 {
		t.Errorf("source %q, uncertainty %g", e.Source, e.Uncertainty)
	}
	// A large cell is half solvent, so electrons go farther.
	large := expectationSeries(300)
	large.Cell = crystal.Cell{A: 40, B: 50, C: 60, Alpha: 90, Beta: 90, Gamma: 90}
	if e := expect(t, large); !(e.ElasticMFPNM > 1.1*estimated.ElasticMFPNM) || !strings.Contains(e.Source, "half protein") {
		t.Errorf("%s: elastic %g nm against %g", e.Source, e.ElasticMFPNM, estimated.ElasticMFPNM)
	}
	s.InelasticMFPNM = -1
	study, err := New(s, nil)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := study.Expectation(context.Background()); err == nil || !strings.Contains(err.Error(), "mean free paths are 0 and -1 nm") {
		t.Errorf("got %v", err)
	}
}

func TestExpectationWithoutEnergy(t *testing.T) {
	e := expect(t, expectationSeries(0))
	if !strings.Contains(e.Why, "energy_keV") || !math.IsNaN(e.WavelengthA) || len(e.Budget) != 0 {
		t.Errorf("%+v", e)
	}
	study, err := New(expectationSeries(200), nil)
	if err != nil {
		t.Fatal(err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := study.Expectation(ctx); err == nil {
		t.Error("a cancelled context was ignored")
	}
	a, err := study.Expectation(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	if b, _ := study.Expectation(context.Background()); a != b || !reflect.DeepEqual(study.assemble().Expectation, a) {
		t.Error("the step is not kept")
	}
}
