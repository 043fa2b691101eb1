package simulate

import (
	"thinward/analysis/crystal"
	"thinward/analysis/resample"
)

// polarity draws, for each acentric unique reflection, on which side Friedel's law makes
// way for more: 1 for the raw indices of that side and -1 for their mates. It is
// nil when no position asks for it.
func polarity(p *Plan, group *crystal.Group, list *indices, truth *Truth, seed resample.Seed) []float64 {
	wanted := false
	for i := range p.Crystals {
		for j := range p.Crystals[i].Positions {
			wanted = wanted || p.Crystals[i].Positions[j].Polarity > 0
		}
	}
	if !wanted {
		return nil
	}
	r := seed.At("polarity").Stream(0)
	side := make([]float64, len(truth.J))
	for u := range side {
		side[u] = 1
		if r.Float64() < 0.5 {
			side[u] = -1
		}
		if truth.Centric[u] {
			side[u] = 0
		}
	}
	out := make([]float64, len(list.raw))
	for i, h := range list.raw {
		out[i] = side[list.unique[i]]
		if _, plus := group.CanonicalApart(h); !plus {
			out[i] = -out[i]
		}
	}
	return out
}
