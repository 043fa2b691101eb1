package simulate

import "math"

// expect fills the means that Wilson's law gives each reflection, in units of unit.
func (t *Truth) expect(b, unit float64) {
	t.expected = make([]float64, len(t.J))
	for i := range t.expected {
		if !t.Absent[i] {
			t.expected[i] = float64(t.Epsilon[i]) * math.Exp(-2*b*t.S2[i]) / unit
		}
	}
}

// curbedMeans gives the mean of J exp(-q J/u) under Wilson's law of mean S for the
// forms that lawOf applies, u the unit of the form: S/(1 + q S/u)^2 acentric, J being
// exponential, and S/(1 + 2 q S/u)^(3/2) centric, J/S being chi-squared with one
// degree of freedom.
func (t *Truth) curbedMeans(p *Position) []float64 {
	out := make([]float64, len(t.expected))
	for i, s := range t.expected {
		x := 0.0
		switch {
		case p.CurbForm == CurbIntensity:
			x = p.Curb * s
		case p.CurbForm == CurbStrength && t.Local[i] > 0:
			x = p.Curb * s / t.Local[i]
		}
		if t.Centric[i] {
			out[i] = s / math.Pow(1+2*x, 1.5)
		} else {
			out[i] = s / ((1 + x) * (1 + x))
		}
	}
	return out
}
