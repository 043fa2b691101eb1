package analysis

import (
	"context"

	"thinward/analysis/intensity"
)

// Forbidden measures the reflections that symmetry forbids, position by
// position and symmetry element by symmetry element. No scale and no choice of
// axis can move a forbidden reflection, but a wrong space group fills them too. Those of a
// centring stand apart: scattering cannot fill them (see intensity.Forbidden).
func (s *Study) Forbidden(ctx context.Context) ([]Forbidden, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.forbidden != nil {
		return s.forbidden, nil
	}
	scaled, err := s.scaleStep(ctx)
	if err != nil {
		return nil, err
	}
	cat := s.intake.Catalogue
	for i, sc := range scaled {
		var merged []*intensity.Merged
		for _, p := range sc.Positions {
			merged = append(merged, intensity.Merge(cat.Len(), p))
		}
		sh := cat.Shells(s.shellCount(merged), merged...)
		for j, m := range merged {
			for _, f := range intensity.MeasureForbidden(m, cat, sh) {
				s.forbidden = append(s.forbidden, Forbidden{
					Crystal: s.Series.Crystals[i].Name, Position: s.Series.Crystals[i].Positions[j].Name,
					Element: f.Element, Centring: f.Centring, N: f.N, Ratio: f.Ratio, SU: f.SU, Z: f.Ratio / f.SU, MeanIS: f.MeanZ, Why: f.Why,
				})
			}
		}
	}
	return s.forbidden, nil
}

// shellCount is the number of shells for local means of merged positions.
func (s *Study) shellCount(merged []*intensity.Merged) int {
	n := 0
	for u := range merged[0].N {
		for _, m := range merged {
			if m.N[u] > 0 {
				n++
				break
			}
		}
	}
	return min(s.settings.MaxShells, max(1, n/s.settings.ShellPairs))
}
