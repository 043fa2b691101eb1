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

// ShareRange returns the least and the greatest that each share can be when the mean free
// paths may be off by a relative uncertainty either way, each by its own: 0 where a path
// is known. Neither result adds up to 1. Errors are those of ShareOf, and an
// uncertainty that is not from 0 to below 1; RelativeSU of free is not looked at.
func ShareRange(thicknessNM float64, free MeanFreePaths, elasticSU, inelasticSU float64) (lo, hi Shares, err error) {
	for _, su := range []float64{elasticSU, inelasticSU} {
		if !(su >= 0 && su < 1) {
			return lo, hi, fmt.Errorf("electron: a relative uncertainty of %g is not from 0 to below 1", su)
		}
	}
	elastic := []float64{free.ElasticNM * (1 - elasticSU), free.ElasticNM * (1 + elasticSU)}
	// Once scattered elastically are most where the thickness is one path; all else rises or
	// falls throughout.
	if elastic[0] < thicknessNM && thicknessNM < elastic[1] {
		elastic = append(elastic, thicknessNM)
	}
	for i, e := range elastic {
		for j, f := range []float64{1 - inelasticSU, 1 + inelasticSU} {
			s, err := ShareOf(thicknessNM, MeanFreePaths{ElasticNM: e, InelasticNM: f * free.InelasticNM})
			if err != nil {
				return lo, hi, err
			}
			if i == 0 && j == 0 {
				lo, hi = s, s
				continue
			}
			lo.Unscattered, hi.Unscattered = math.Min(lo.Unscattered, s.Unscattered), math.Max(hi.Unscattered, s.Unscattered)
			lo.Kinematic, hi.Kinematic = math.Min(lo.Kinematic, s.Kinematic), math.Max(hi.Kinematic, s.Kinematic)
			lo.Multiple, hi.Multiple = math.Min(lo.Multiple, s.Multiple), math.Max(hi.Multiple, s.Multiple)
			lo.Inelastic, hi.Inelastic = math.Min(lo.Inelastic, s.Inelastic), math.Max(hi.Inelastic, s.Inelastic)
		}
	}
	return lo, hi, nil
}
