package electron

import (
	"fmt"
	"math"
)

// Poisson returns the probability of n collisions where mean are expected,
// mean^n exp(-mean)/n!. n < 0 gives 0, mean < 0 NaN.
func Poisson(n int, mean float64) float64 {
	switch {
	case !(mean >= 0):
		return math.NaN()
	case n < 0:
		return 0
	case mean == 0 && n == 0:
		return 1
	}
	lg, _ := math.Lgamma(float64(n) + 1)
	return math.Exp(float64(n)*math.Log(mean) - mean - lg)
}

// ZeroLossThickness returns the thickness free ln(total/unscattered) behind a
// zero-loss share, in the unit of the inelastic mean free path given. It is NaN unless
// 0 < unscattered <= total.
func ZeroLossThickness(free, total, unscattered float64) float64 {
	if !(unscattered > 0 && unscattered <= total) {
		return math.NaN()
	}
	return free * math.Log(total/unscattered)
}

// Shares are the fates of electrons by collisions alone; they add up to 1.
// Kinematic electrons were scattered elastically once and lost no energy, Multiple ones
// elastically more than once, Inelastic ones lost energy, whatever else happened.
// Multiple scattering spreads over all resolution and phases: its share is not a
// prediction of how much intensity changes in any reflection.
type Shares struct {
	ThicknessNM, Unscattered, Kinematic, Multiple, Inelastic float64
}

// ShareOf returns the shares at a thickness in nm for elastic and inelastic mean
// free paths in nm, collisions of both kinds independent (Poisson). It returns an
// error for a thickness that is negative or not finite, or a path that is not positive;
// an infinite path means no such collisions.
func ShareOf(thicknessNM float64, free MeanFreePaths) (Shares, error) {
	if !(thicknessNM >= 0) || math.IsInf(thicknessNM, 0) {
		return Shares{}, fmt.Errorf("electron: thickness %g nm is negative or not finite", thicknessNM)
	}
	if !(free.ElasticNM > 0) || !(free.InelasticNM > 0) {
		return Shares{}, fmt.Errorf("electron: mean free paths %g and %g nm are not both positive", free.ElasticNM, free.InelasticNM)
	}
	e, i := thicknessNM/free.ElasticNM, thicknessNM/free.InelasticNM
	kept := math.Exp(-i)
	s := Shares{ThicknessNM: thicknessNM, Unscattered: math.Exp(-e - i), Kinematic: e * math.Exp(-e-i), Inelastic: -math.Expm1(-i)}
	s.Multiple = kept * (-math.Expm1(-e) - e*math.Exp(-e))
	if e < 1e-3 {
		s.Multiple = kept * e * e * (0.5 - e/3 + e*e/8) // the difference above loses digits
	}
	return s, nil
}
