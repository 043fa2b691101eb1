package session

import (
	"math"

	"thinward/analysis/electron"
)

// Expectation shows what scattering physics leads one to expect.
func (s *Session) Expectation() *View {
	g := newGrid("What scattering physics leads one to expect", "what", "value", "remark").words(2)
	e := s.upTo(stepExpectation).Expectation
	if e == nil {
		g.add("nothing", "\u2013", "no expectation was worked out")
		return g.view("Expectation")
	}
	if e.Why != "" {
		g.add("nothing", "\u2013", e.Why)
		return g.view("Expectation")
	}
	g.add("energy (keV)", number(e.EnergyKeV, 0), "")
	g.add("wavelength (\u00c5)", number(e.WavelengthA, 5), "relativistic")
	g.add("interaction constant (rad/(V nm))", number(e.InteractionVnm, 5), "")
	g.add("elastic mean free path (nm)", number(e.ElasticMFPNM, 0), e.Source)
	g.add("inelastic mean free path (nm)", number(e.InelasticMFPNM, 0), e.Source)
	if e.Uncertainty > 0 {
		g.add("uncertainty of what is estimated", percent(e.Uncertainty, 0), "")
	}
	g.add("extinction distance at strength 1 (nm)", number(e.TwoBeam.ExtinctionNM, 0), "random light atoms, d = "+number(e.TwoBeam.DA, 2)+" \u00c5; strength 1 is the mean there")
	for _, strength := range []float64{1, 4} {
		g.add("two-beam over kinematic intensity at strength "+number(strength, 0)+", thinnest and thickest", twoBeamAt(e.TwoBeam.ThicknessNM[0], e.TwoBeam.ExtinctionNM, strength)+", "+twoBeamAt(e.TwoBeam.ThicknessNM[1], e.TwoBeam.ExtinctionNM, strength),
			"Blackman's integrated curve, no B factor: the most that two beams could take from strong reflections; not a prediction of q")
	}
	return g.view("Expectation")
}

// twoBeamAt writes Blackman's ratio for a reflection of the given strength, whose
// extinction distance is that of strength 1 over the root of it.
func twoBeamAt(thicknessNM, extinctionNM, strength float64) string {
	return number(electron.BlackmanRatio(math.Pi*thicknessNM*math.Sqrt(strength)/extinctionNM), 3)
}
