package intensity

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// French & Wilson 1978 posteriors for sigma 1 and mean 10, by numerical
// integration in many digits, redone by a second quadrature.
func TestPosterior(t *testing.T) {
	for _, c := range []struct{ i, acentric, acentricSD, centric, centricSD float64 }{
		{-2, .36207795, .32944781, .19415582, .25354307},
		{-1, .50579717, .43335013, .28338659, .34947979},
		{0, .76261747, .58493833, .46468162, .51072195},
		{1, 1.2261089, .77469671, .86423391, .75770836},
		{2, 1.9675558, .93117143, 1.6544435, .99447551},
		{5, 4.9000024, .99999402, 4.8413727, 1.0128698},
	} {
		j, sd := Posterior(c.i, 1, 10, false)
		floatcmp.Check(t, "acentric", j, c.acentric, 1e-6, 0)
		floatcmp.Check(t, "acentric sd", sd, c.acentricSD, 1e-6, 0)
		j, sd = Posterior(c.i, 1, 10, true)
		floatcmp.Check(t, "centric", j, c.centric, 1e-6, 0)
		floatcmp.Check(t, "centric sd", sd, c.centricSD, 1e-6, 0)
		scaled, scaledSD := Posterior(300*c.i, 300, 3000, true)
		floatcmp.Check(t, "in other units", scaled, 300*j, 0, 1e-9)
		floatcmp.Check(t, "sd in other units", scaledSD, 300*sd, 0, 1e-9)
	}
}

func TestPosteriorLimits(t *testing.T) {
	for _, centric := range []bool{false, true} {
		j, sd := Posterior(5000, 1, 1000, centric)
		floatcmp.Check(t, "strong", j, 5000, 0.01, 0)
		floatcmp.Check(t, "strong sd", sd, 1, 1e-3, 0)
		j, sd = Posterior(0, 1e5, 1, centric)
		floatcmp.Check(t, "nothing known", j, 1, 1e-3, 0)
		floatcmp.Check(t, "its sd", sd, math.Sqrt(WilsonMoment(2, centric)-1), 1e-2, 0)
		if j, _ = Posterior(-30, 1, 10, centric); !(j > 0 && j < 0.04) {
			t.Errorf("far below zero: %g", j)
		}
		j, sd = Posterior(1, 0, 10, centric)
		floatcmp.Check(t, "no sigma", j+sd, math.NaN(), 0, 0)
		j, sd = Posterior(math.NaN(), 1, 10, centric)
		floatcmp.Check(t, "NaN", j+sd, math.NaN(), 0, 0)
	}
}
