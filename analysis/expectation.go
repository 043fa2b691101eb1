package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/electron"
)

const (
	expectationGrid = 26
	// macromolecularA3 is the cell volume in cubic angstrom above which a crystal is
	// taken to be half solvent (common practice, no source).
	macromolecularA3 = 20000
)

// Expectation says what scattering physics leads one to expect at the thicknesses of
// the series: how many electrons were scattered how often, and how much two-beam
// diffraction would take from strong reflections. Mean free paths that the series
// does not give are estimated from the composition of a light-atom crystal. It is an aid
// to interpretation: multiple scattering spreads over all resolution and phases,
// so no share is a prediction of m. Without an energy only Why is filled. An error is
// returned for what Intake refuses, or mean free paths below 0.
func (s *Study) Expectation(ctx context.Context) (*Expectation, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.expected != nil {
		return s.expected, nil
	}
	if !(s.Series.EnergyKeV > 0) {
		s.expected = unexpected("no energy_keV in the manifest, so nothing is known of the electrons")
		return s.expected, nil
	}
	if _, err := s.intakeStep(ctx); err != nil {
		return nil, err
	}
	keV := s.Series.EnergyKeV
	atoms, named := electron.Organic(), "one heavy atom in 18 cubic angstrom"
	if s.Series.Cell.Volume() > macromolecularA3 {
		atoms, named = electron.Macromolecular(), "half protein, half ice"
	}
	free, from, err := s.freePaths(atoms, named)
	if err != nil {
		return nil, err
	}
	e := &Expectation{
		EnergyKeV: keV, WavelengthA: electron.Wavelength(keV), InteractionVnm: electron.Interaction(keV),
		ElasticMFPNM: free.ElasticNM, InelasticMFPNM: free.InelasticNM, Uncertainty: free.RelativeSU, Source: from,
	}
	list := s.thicknesses()
	thickest := list[len(list)-1]
	if e.Budget, err = s.budgets(list, free); err != nil {
		return nil, err
	}
	var grid []float64
	for i := range expectationGrid {
		grid = append(grid, 1.25*thickest*float64(i)/(expectationGrid-1))
	}
	if e.BudgetGrid, err = s.budgets(grid, free); err != nil {
		return nil, err
	}
	if e.TwoBeam, err = s.twoBeam(atoms, list[0], thickest); err != nil {
		return nil, err
	}
	s.expected = e
	return e, nil
}

func unexpected(why string) *Expectation {
	nan := math.NaN()
	return &Expectation{
		EnergyKeV: nan, WavelengthA: nan, InteractionVnm: nan, ElasticMFPNM: nan, InelasticMFPNM: nan, Uncertainty: nan,
		TwoBeam: TwoBeamCurve{ExtinctionNM: nan, DA: nan, ThicknessNM: [2]float64{nan, nan}, Why: why}, Why: why,
	}
}

// freePaths returns what the series gives, and estimates for the rest.
func (s *Study) freePaths(atoms []electron.Density, named string) (electron.MeanFreePaths, string, error) {
	elastic, inelastic := s.Series.ElasticMFPNM, s.Series.InelasticMFPNM
	for _, v := range []float64{elastic, inelastic} {
		if !(v >= 0) || math.IsInf(v, 0) {
			return electron.MeanFreePaths{}, "", fmt.Errorf("mean free paths are %g and %g nm: they must be positive, or 0 when not known", elastic, inelastic)
		}
	}
	free, err := electron.EstimateFreePaths(s.Series.EnergyKeV, atoms)
	if err != nil {
		return free, "", err
	}
	from := "estimated from composition (" + named + ")"
	switch {
	case elastic > 0 && inelastic > 0:
		free.RelativeSU, from = 0, "given"
	case elastic > 0:
		from = "elastic given, inelastic " + from
	case inelastic > 0:
		from = "inelastic given, elastic " + from
	}
	if elastic > 0 {
		free.ElasticNM = elastic
	}
	if inelastic > 0 {
		free.InelasticNM = inelastic
	}
	return free, from, nil
}

// thicknesses lists those of the series, rising, each once.
func (s *Study) thicknesses() []float64 {
	var list []float64
	for i := range s.Series.Crystals {
		for j := range s.Series.Crystals[i].Positions {
			list = append(list, s.Series.Crystals[i].Positions[j].ThicknessNM)
		}
	}
	slices.Sort(list)
	return slices.Compact(list)
}

// budgets gives the shares at each thickness, with ranges where a path was estimated.
func (s *Study) budgets(thickness []float64, free electron.MeanFreePaths) ([]Budget, error) {
	elasticSU, inelasticSU := free.RelativeSU, free.RelativeSU
	if s.Series.ElasticMFPNM > 0 {
		elasticSU = 0
	}
	if s.Series.InelasticMFPNM > 0 {
		inelasticSU = 0
	}
	var out []Budget
	for _, t := range thickness {
		x, err := electron.ShareOf(t, free)
		if err != nil {
			return nil, err
		}
		b := Budget{ThicknessNM: t, Unscattered: x.Unscattered, Kinematic: x.Kinematic, Multiple: x.Multiple, Inelastic: x.Inelastic}
		if free.RelativeSU > 0 {
			lo, hi, err := electron.ShareRange(t, free, elasticSU, inelasticSU)
			if err != nil {
				return nil, err
			}
			b.KinematicRange, b.MultipleRange, b.InelasticRange = []float64{lo.Kinematic, hi.Kinematic}, []float64{lo.Multiple, hi.Multiple}, []float64{lo.Inelastic, hi.Inelastic}
		}
		out = append(out, b)
	}
	return out, nil
}

// twoBeam draws Blackman's curve for a crystal of random atoms, <|F|^2> = V sum n f^2
// (Wilson 1942), at the mean s^2 of the lowest third of the catalogue, where strength
// on the common scale has its unit. No B factor is taken off, so the curve is the
// strongest that the composition allows.
func (s *Study) twoBeam(atoms []electron.Density, thin, thick float64) (TwoBeamCurve, error) {
	cat := s.intake.Catalogue
	s2 := slices.Clone(cat.S2)
	slices.Sort(s2)
	third := max(1, len(s2)/3)
	mean := 0.0
	for _, v := range s2[:third] {
		mean += v / float64(third)
	}
	perA3 := 0.0
	for _, a := range atoms {
		f, err := electron.ScatteringFactor(a.Element, math.Sqrt(mean))
		if err != nil {
			return TwoBeamCurve{}, err
		}
		perA3 += a.PerNM3 / 1000 * f * f
	}
	volume := s.Series.Cell.Volume()
	c := TwoBeamCurve{DA: 1 / (2 * math.Sqrt(mean)), ThicknessNM: [2]float64{thin, thick}}
	c.ExtinctionNM = electron.ExtinctionDistance(s.Series.EnergyKeV, volume, math.Sqrt(volume*perA3), c.DA) / 10
	for i := range 41 {
		e := 0.1 * math.Pow(200, float64(i)/40)
		c.Strength = append(c.Strength, e)
		c.Thin = append(c.Thin, electron.BlackmanRatio(math.Pi*thin*math.Sqrt(e)/c.ExtinctionNM))
		c.Thick = append(c.Thick, electron.BlackmanRatio(math.Pi*thick*math.Sqrt(e)/c.ExtinctionNM))
	}
	return c, nil
}
