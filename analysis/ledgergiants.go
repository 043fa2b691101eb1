package analysis

import (
	"context"
	"math"

	"thinward/analysis/evidence"
	"thinward/analysis/resample"
	"thinward/analysis/size"
)

// giantDraws is the number of draws for the errors of the changes: a standard error of
// 100 draws is known to 7 %.
const giantDraws = 100

// giantsMove asks whether m hangs on the strongest reflections: how far leaving them
// out moves it, with the error of that change from draws of reflections.
func (s *Study) giantsMove(ctx context.Context, x *Compared) (evidence.Finding, error) {
	list := x.Result.Giants
	if len(list) < 2 || math.IsNaN(list[0].M.Value) {
		return evidence.GiantsOf(math.NaN(), nil), nil
	}
	set := s.sizeSettings()
	boot, err := resample.Scalars(ctx, x.Pairs.Len(), func(w []float64) ([]float64, error) {
		variants, err := size.Giants(x.Input, w, set)
		if err != nil {
			return nil, err
		}
		out := make([]float64, len(variants)-1)
		for k := range out {
			out[k] = variants[k+1].Instrument.M - variants[0].Instrument.M
		}
		return out, nil
	}, &resample.Settings{Replicates: giantDraws, NoBCa: true, Workers: 1, Seed: s.seed(x.Result.Crystal, x.Result.Thin+" - "+x.Result.Thick, "giants")})
	if err != nil {
		if ctx.Err() != nil {
			return evidence.Finding{}, ctx.Err()
		}
		return evidence.GiantsOf(math.NaN(), nil), nil
	}
	moves := make([]evidence.Move, 0, len(boot.Estimate))
	for k, d := range boot.Estimate {
		if g := list[k+1]; g.N > 0 {
			moves = append(moves, evidence.Move{Above: g.Above, LeftOut: g.N, Change: d, SE: boot.SE[k]})
		}
	}
	return evidence.GiantsOf(list[0].M.Value, moves), nil
}
