package electron

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestPoisson(t *testing.T) {
	// Worked in R and mpmath.
	for _, c := range []struct {
		mean float64
		want []float64
	}{
		{0.1, []float64{.904837418036, .0904837418036, .00452418709018, .000150806236339}},
		{0.5, []float64{.606530659713, .303265329856, .0758163324641, .0126360554107}},
		{1, []float64{.367879441171, .367879441171, .183939720586, .0613132401952}},
		{2, []float64{.135335283237, .270670566473, .270670566473, .180447044315}},
		{4, []float64{.0183156388887, .0732625555549, .146525111109, .195366814813, .195366814813}},
		{0, []float64{1, 0}},
	} {
		for n, want := range c.want {
			floatcmp.Check(t, "Poisson", Poisson(n, c.mean), want, 1e-15, 1e-11)
		}
		sum := 0.0
		for n := range 60 {
			sum += Poisson(n, c.mean)
		}
		floatcmp.Check(t, "sum", sum, 1, 1e-13, 0)
	}
	floatcmp.Check(t, "negative mean", Poisson(1, -1), math.NaN(), 0, 0)
	floatcmp.Check(t, "negative count", Poisson(-1, 1), 0, 0, 0)
	floatcmp.Check(t, "zero loss", ZeroLossThickness(200, 1, math.Exp(-0.7)), 140, 0, 1e-12)
	floatcmp.Check(t, "zero loss above all", ZeroLossThickness(200, 1, 1.1), math.NaN(), 0, 0)
}

func TestShares(t *testing.T) {
	free := MeanFreePaths{ElasticNM: 400, InelasticNM: 250}
	for _, nm := range []float64{0, 1e-3, 0.2, 0.39999, 0.4, 0.40001, 50, 200, 1000} {
		s, err := ShareOf(nm, free)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, "sum", s.Unscattered+s.Kinematic+s.Multiple+s.Inelastic, 1, 1e-14, 0)
		kept, many := Poisson(0, nm/250), 0.0
		for n := 2; n < 60; n++ {
			many += Poisson(n, nm/400)
		}
		floatcmp.Check(t, "unscattered", s.Unscattered, Poisson(0, nm/400)*kept, 0, 1e-12)
		floatcmp.Check(t, "kinematic", s.Kinematic, Poisson(1, nm/400)*kept, 0, 1e-12)
		floatcmp.Check(t, "multiple", s.Multiple, many*kept, 1e-30, 1e-8)
	}
	s, err := ShareOf(100, MeanFreePaths{ElasticNM: math.Inf(1), InelasticNM: math.Inf(1)})
	if err != nil || s.Unscattered != 1 {
		t.Errorf("without collisions %+v, %v", s, err)
	}
	for _, c := range []struct {
		nm   float64
		free MeanFreePaths
		want string
	}{
		{-1, free, "thickness -1 nm"}, {math.NaN(), free, "thickness NaN nm"}, {math.Inf(1), free, "thickness +Inf nm"},
		{1, MeanFreePaths{ElasticNM: 0, InelasticNM: 1}, "mean free paths 0 and 1 nm"},
		{1, MeanFreePaths{ElasticNM: 1, InelasticNM: math.NaN()}, "mean free paths 1 and NaN nm"},
	} {
		if _, err := ShareOf(c.nm, c.free); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, want %q", err, c.want)
		}
	}
}

// The range against a fine grid of both paths.
func TestShareRange(t *testing.T) {
	for _, c := range []struct{ nm, elastic, inelastic, su, other float64 }{{200, 350, 270, 0.3, 0.3}, {400, 350, 270, 0.3, 0.2}, {900, 350, 270, 0.3, 0.3}, {200, 350, 270, 0, 0}, {200, 350, 270, 0, 0.3}, {0, 350, 270, 0.3, 0.3}} {
		lo, hi, err := ShareRange(c.nm, MeanFreePaths{ElasticNM: c.elastic, InelasticNM: c.inelastic}, c.su, c.other)
		if err != nil {
			t.Fatal(err)
		}
		least, most := [4]float64{1, 1, 1, 1}, [4]float64{}
		for i := range 201 {
			for j := range 201 {
				s, err := ShareOf(c.nm, MeanFreePaths{ElasticNM: c.elastic * (1 + c.su*(float64(i)/100-1)), InelasticNM: c.inelastic * (1 + c.other*(float64(j)/100-1))})
				if err != nil {
					t.Fatal(err)
				}
				for k, v := range []float64{s.Unscattered, s.Kinematic, s.Multiple, s.Inelastic} {
					least[k], most[k] = math.Min(least[k], v), math.Max(most[k], v)
				}
			}
		}
		floatcmp.CheckSlice(t, "least", []float64{lo.Unscattered, lo.Kinematic, lo.Multiple, lo.Inelastic}, least[:], 1e-5, 1e-5)
		floatcmp.CheckSlice(t, "most", []float64{hi.Unscattered, hi.Kinematic, hi.Multiple, hi.Inelastic}, most[:], 1e-5, 1e-5)
		floatcmp.Check(t, "thickness", lo.ThicknessNM+hi.ThicknessNM, 2*c.nm, 0, 0)
	}
	for _, su := range []float64{-0.1, 1, math.NaN()} {
		if _, _, err := ShareRange(100, MeanFreePaths{ElasticNM: 350, InelasticNM: 270}, su, 0.3); err == nil || !strings.Contains(err.Error(), "relative uncertainty") {
			t.Errorf("%g: got %v", su, err)
		}
	}
	if _, _, err := ShareRange(-1, MeanFreePaths{ElasticNM: 350, InelasticNM: 270}, 0.3, 0.3); err == nil {
		t.Error("a negative thickness passed")
	}
}

func TestCrossSections(t *testing.T) {
	// The formula worked elsewhere; it is from memory, so this checks arithmetic.
	keV := []float64{100, 120, 200, 300}
	for _, c := range []struct {
		element            string
		elastic, inelastic [4]float64
		rel                float64
	}{
		{"C", [4]float64{6.703911e-5, 5.862103e-5, 4.186212e-5, 3.362234e-5}, [4]float64{1.200283e-4, 1.066018e-4, 7.938076e-5, 6.579336e-5}, 1e-6},
		{"N", [4]float64{8.418029e-5, 7.362724e-5, 5.260592e-5, 4.226390e-5}, [4]float64{1.296454e-4, 1.151431e-4, 8.574102e-5, 7.106496e-5}, 1e-6},
		{"O", [4]float64{1.024837e-4, 8.965750e-5, 6.409327e-5, 5.150818e-5}, [4]float64{1.385968e-4, 1.230931e-4, 9.166100e-5, 7.597163e-5}, 1e-6},
	} {
		for i := range keV {
			elastic, inelastic, err := CrossSections(keV[i], c.element)
			if err != nil {
				t.Fatal(err)
			}
			floatcmp.Check(t, c.element+" elastic", elastic, c.elastic[i], 0, c.rel)
			floatcmp.Check(t, c.element+" inelastic", inelastic, c.inelastic[i], 0, c.rel)
		}
	}
	// Outside: Z^(4/3) lambda^2 gamma^2/pi (Wentzel 1926; Lenz 1954), in nm^2, within 1.5 %.
	for _, e := range []float64{100, 300} {
		elastic, _, err := CrossSections(e, "C")
		if err != nil {
			t.Fatal(err)
		}
		x := Wavelength(e) / 10 * Gamma(e)
		floatcmp.Check(t, "carbon against the closed form", elastic, math.Pow(6, 4.0/3)*x*x/math.Pi, 0, 0.015)
	}
	// Outside: measured ratio of carbon at 100 and 300 kV, 2.01 (Peet, Henderson & Russo 2019).
	a, _, _ := CrossSections(100, "C")
	b, _, _ := CrossSections(300, "C")
	floatcmp.Check(t, "carbon, 100 over 300 kV", a/b, 2.01, 0, 0.01)
}

func TestFreePathsOfKnownSolids(t *testing.T) {
	ice := []Density{{"O", 31}, {"H", 62}}
	for _, c := range []struct {
		name      string
		keV       float64
		atoms     []Density
		inelastic float64
		rel       float64
	}{
		// Vitreous ice: Rice et al. 2018, J. Struct. Biol. 204, 38 (300 kV); 203 +- 33 nm at
		// 120 kV. Protein crystals, calculated: Martynowycz et al. 2021, PNAS 118,
		// e2108884118. All numbers from memory; 0.3 is the uncertainty we state.
		{"ice", 300, ice, 395, estimateSU}, {"ice", 120, ice, 203, estimateSU},
		{"protein crystal", 120, Macromolecular(), 214, estimateSU}, {"protein crystal", 200, Macromolecular(), 272, estimateSU}, {"protein crystal", 300, Macromolecular(), 317, estimateSU},
	} {
		free, err := EstimateFreePaths(c.keV, c.atoms)
		if err != nil {
			t.Fatal(err)
		}
		floatcmp.Check(t, c.name, free.InelasticNM, c.inelastic, 0, c.rel)
		floatcmp.Check(t, "stated uncertainty", free.RelativeSU, 0.3, 0, 0)
		t.Logf("%s at %g kV: inelastic %.0f nm, elastic %.0f nm", c.name, c.keV, free.InelasticNM, free.ElasticNM)
	}
	// Common practice, no source: 200 nm of protein crystal at 200 kV leave about 12 % of the
	// electrons as kinematic signal, and about a quarter of that again in the spots without being so.
	free, err := EstimateFreePaths(200, Macromolecular())
	if err != nil {
		t.Fatal(err)
	}
	s, err := ShareOf(200, free)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "kinematic share", s.Kinematic, 0.12, 0.03, 0)
	floatcmp.Check(t, "multiple over kinematic", s.Multiple/s.Kinematic, 0.25, 0.06, 0)
	for _, c := range []struct {
		keV   float64
		atoms []Density
		want  string
	}{
		{0, ice, "energy 0 keV"}, {200, nil, "no atoms"}, {200, []Density{{"H", 5}}, "no atoms"},
		{200, []Density{{"Xx", 5}}, `"Xx"`}, {200, []Density{{"C", -5}}, "density -5 of C"},
	} {
		if _, err := EstimateFreePaths(c.keV, c.atoms); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, want %q", err, c.want)
		}
	}
}
