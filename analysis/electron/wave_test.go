package electron

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func TestRelativisticElectron(t *testing.T) {
	// CODATA 2018 constants worked with mpmath. Without relativity the
	// wavelength at 200 and 300 kV would be 0.02742 and 0.02239.
	for _, c := range []struct{ keV, lambda, beta, gamma, sigma, rel float64 }{
		{60, 0.04866060503, 0.446224616, 1.117417071, 0.0113569053, 1e-8},
		{80, 0.04175716077, 0.5023988859, 1.156556095, 0.0100870660, 1e-8},
		{100, 0.03701436614, 0.5482208620, 1.195695118, 0.00924395817, 1e-8},
		{120, 0.03349215273, 0.5866710245, 1.234834142, 0.00863811319, 1e-8},
		{160, 0.02851005104, 0.6481066882, 1.313112189, 0.00781928471, 1e-8},
		{200, 0.02507934045, 0.6953144713, 1.391390237, 0.00728840104, 1e-8},
		{300, 0.01968748901, 0.7765254931, 1.587085355, 0.00652616142, 1e-8},
		{400, 0.01643943417, 0.8278689547, 1.782780473, 0.00612141654, 1e-8},
		{1000, 0.008719186929, 0.9410792280, 2.956951184, 0.00538502027, 1e-8},
	} {
		floatcmp.Check(t, "wavelength", Wavelength(c.keV), c.lambda, 0, c.rel)
		floatcmp.Check(t, "beta", Beta(c.keV), c.beta, 0, c.rel)
		floatcmp.Check(t, "gamma", Gamma(c.keV), c.gamma, 0, c.rel)
		floatcmp.Check(t, "interaction", Interaction(c.keV), c.sigma, 0, c.rel)
		// Identity: sigma = 2 pi / (lambda E) (1 + E/mc^2)/(2 + E/mc^2), nm and V.
		x := c.keV / restKeV
		floatcmp.Check(t, "interaction, other form", Interaction(c.keV), 2*math.Pi/(Wavelength(c.keV)/10*c.keV*1e3)*(1+x)/(2+x), 0, 1e-8)
	}
	for _, f := range []func(float64) float64{Wavelength, Beta, Gamma, Interaction} {
		for _, keV := range []float64{0, -1, math.NaN()} {
			floatcmp.Check(t, "no energy", f(keV), math.NaN(), 0, 0)
		}
	}
}

func TestBraggAngle(t *testing.T) {
	// d = 1 angstrom, in mrad, by the same constants.
	floatcmp.Check(t, "200 kV", 1e3*math.Asin(Wavelength(200)/2), 12.5399989, 0, 1e-8)
	floatcmp.Check(t, "300 kV", 1e3*math.Asin(Wavelength(300)/2), 9.8439035, 0, 1e-8)
}
