package analysis

import (
	"context"

	"thinward/analysis/evidence"
	"thinward/analysis/internal/parallel"
)

// Predicted is the predictor of double scattering in one position: what an observation
// gains over its equivalents where pairs of reflections that add up to it stood on the
// same frame, in bins of equal count, and the normal deviate of the regression. It
// is shown without a verdict (see evidence.DoubleScattering). Why says why there is none.
type Predicted struct {
	Crystal, Position string
	Bins              []evidence.GainBin
	Z                 float64
	Why               string
}

// doubleBins is the number of bins that are drawn.
const doubleBins = 10

// DoubleScattering gives the predictor in every position.
func (s *Study) DoubleScattering(ctx context.Context) ([]Predicted, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if _, err := s.scaleStep(ctx); err != nil {
		return nil, err
	}
	var out []Predicted
	var places [][2]int
	for i := range s.Series.Crystals {
		for j := range s.Series.Crystals[i].Positions {
			places = append(places, [2]int{i, j})
			out = append(out, Predicted{Crystal: s.Series.Crystals[i].Name, Position: s.Series.Crystals[i].Positions[j].Name})
		}
	}
	err := parallel.For(ctx, len(places), s.settings.Workers, func(_ context.Context, k int) error {
		c := s.crossings(places[k][0], places[k][1])
		slope, err := evidence.DoubleScattering(c)
		if err == nil {
			out[k].Z = slope.Z
			out[k].Bins, err = evidence.DoubleScatteringBins(c, doubleBins)
		}
		if err != nil {
			out[k].Why = err.Error()
		}
		return nil
	})
	if err != nil {
		return nil, err
	}
	return out, nil
}
