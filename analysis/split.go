package analysis

import (
	"context"
	"math"

	"thinward/analysis/size"
)

// SplitResult is one primary contrast read from two parts of its pairs.
type SplitResult struct {
	Crystal, Thin, Thick string
	Kept, Left           int // pairs with a strength on either side
	MKept, MLeft         Interval
	// Difference is MKept - MLeft. Its error takes both parts as independent: they
	// have the local means in common and nothing else.
	Difference Interval
}

// Split reads every primary contrast from the pairs that keep takes and from
// those that it leaves, with the leading model; the local means are those of all
// pairs, so that m means the same in both parts. It is for a confounder of one's
// own: what touches only one part should make the parts differ. keep is called
// once a pair, in order, with a row it may look at; it must not be nil. A part
// that is too small has no m and says why. On a bracket the strengths of both parts are
// from halves of the thin position, whose own deviations bias both alike.
func (s *Study) Split(ctx context.Context, keep func(*PairRow) bool) ([]SplitResult, error) {
	s.mu.Lock()
	list, err := s.primariesStep(ctx)
	var rows [][]PairRow
	if err == nil {
		for _, x := range list {
			rows = append(rows, s.rows(x))
		}
	}
	s.mu.Unlock() // keep may call the study
	if err != nil {
		return nil, err
	}
	var out []SplitResult
	for k, x := range list {
		r := SplitResult{Crystal: x.Result.Crystal, Thin: x.Result.Thin, Thick: x.Result.Thick, MKept: none(), MLeft: none(), Difference: none()}
		taken := make([]bool, len(rows[k]))
		for i := range rows[k] {
			row := rows[k][i]
			taken[i] = keep(&row)
			if math.IsNaN(row.Strength) {
				continue
			}
			if taken[i] {
				r.Kept++
			} else {
				r.Left++
			}
		}
		var se [2]float64
		r.MKept, se[0] = s.part(x, taken, true)
		r.MLeft, se[1] = s.part(x, taken, false)
		if d := r.MKept.Value - r.MLeft.Value; !math.IsNaN(d) {
			half := zOf(s.settings.Level) * math.Hypot(se[0], se[1])
			r.Difference = interval(d, d-half, d+half, "")
		} else {
			r.Difference = noneBecause("one part has no m")
		}
		out = append(out, r)
	}
	return out, nil
}

// part fits the leading model to one part of the pairs.
func (s *Study) part(x *Compared, taken []bool, which bool) (Interval, float64) {
	var legs []*size.Input
	for _, leg := range s.legs(x) {
		own := *leg
		own.Z = append([]float64(nil), leg.Z...)
		for i := range own.Z {
			if taken[i] != which {
				own.Z[i] = math.NaN()
			}
		}
		legs = append(legs, &own)
	}
	if legs == nil {
		return noneBecause("no strength is independent of the difference"), math.NaN()
	}
	fit, err := size.MomentsCross(legs, nil, x.Model, s.sizeSettings())
	switch {
	case err != nil:
		return noneBecause(err.Error()), math.NaN()
	case !fit.Estimable:
		return noneBecause(fit.Why), math.NaN()
	}
	return interval(fit.M.Value, fit.M.Lo, fit.M.Hi, fit.Why), fit.M.SE
}
