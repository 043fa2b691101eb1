package analysis

import (
	"context"
	"math"
	"slices"

	"thinward/analysis/intensity"
)

// IntakeTable describes every position before scaling. It needs no scale and so
// works on data that cannot be scaled.
func (s *Study) IntakeTable(ctx context.Context) ([]IntakeResult, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if _, err := s.intakeStep(ctx); err != nil {
		return nil, err
	}
	return s.intakeResults(ctx)
}

func (s *Study) intakeResults(ctx context.Context) ([]IntakeResult, error) {
	if s.table != nil {
		return s.table, nil
	}
	var out []IntakeResult
	for i := range s.Series.Crystals {
		c := &s.Series.Crystals[i]
		thin := c.byThickness()[0]
		for j := range c.Positions {
			r, err := s.intakeResult(ctx, i, j, thin)
			if err != nil {
				return nil, err
			}
			out = append(out, *r)
		}
	}
	s.table = out
	return out, nil
}

func (s *Study) intakeResult(ctx context.Context, i, j, thin int) (*IntakeResult, error) {
	p, a, cat := &s.Series.Crystals[i].Positions[j], &s.intake.Positions[i][j], s.intake.Catalogue
	raw := &intensity.Scaled{Unique: a.Unique, Raw: a.Raw, I: a.Observations.I, Var: make([]float64, len(a.Unique)), Phi: a.Observations.Phi}
	for r, sigma := range a.Observations.Sigma {
		raw.Var[r] = sigma * sigma
	}
	_, all, err := intensity.Precise(ctx, raw, cat, &intensity.PrecisionSettings{Shells: 1, Key: s.Series.Seed})
	if err != nil {
		return nil, err
	}
	merged := intensity.Merge(cat.Len(), raw)
	sh := cat.Shells(s.shellCount([]*intensity.Merged{merged}), merged)
	negatives := intensity.CountNegatives(a.Unique, a.Observations.I, a.Observations.Sigma, cat, sh)
	cuts := intensity.FindCuts(a.Observations)
	r := &IntakeResult{
		Crystal: s.Series.Crystals[i].Name, Position: p.Name, ThicknessNM: p.ThicknessNM,
		Rows: a.Audit.Rows, Observations: a.Observations.Len(), RowsAs: a.Audit.Policy.String(), Unique: all.Unique,
		Multiplicity: all.Multiplicity, Completeness: all.Completeness, DMin: all.DShort, DMax: all.DLong,
		AngleLo: math.NaN(), AngleHi: math.NaN(), AngleGap: math.NaN(), MeanISigma: all.IOverSigma,
		Negative: negatives.Observed[:], NegativeExp: negatives.Expected[:],
		RMeas: all.R.Meas, RPim: all.R.Pim, CCHalf: all.CCHalf, Overlap: s.overlap(i, j, thin),
	}
	for _, n := range a.Excluded {
		r.Excluded += n
	}
	r.NearZero[0], r.NearZero[1] = aroundZero(a.Observations)
	lists := [][]intensity.Warning{cuts.Warnings}
	if negativesGone(r.NearZero) {
		lists = append(lists, negatives.Warnings)
	}
	for _, list := range lists {
		for _, w := range list {
			if r.Truncated != "" {
				r.Truncated += "; "
			}
			r.Truncated += w.Text
			s.warn(w.Code, s.place(i, j), "%s", w.Text)
		}
	}
	if phi := a.Observations.Phi; phi != nil {
		r.AngleLo, r.AngleHi, r.AngleGap = coverage(phi)
	} else {
		r.Why = "no rotation angles: observations cannot be matched, the scale is one constant and B"
	}
	return r, nil
}

// aroundZero counts observations up to half a sigma below and above zero. Noise
// makes the density of I/sigma smooth there whatever the intensities are, so
// that a step says that negatives were removed or set to zero.
func aroundZero(c *intensity.Columns) (below, above int) {
	for r := range c.I {
		switch z := c.I[r] / c.Sigma[r]; {
		case z >= -0.5 && z < 0:
			below++
		case z >= 0 && z < 0.5:
			above++
		}
	}
	return below, above
}

// negativesGone reports a step at zero: at least 20 observations just above it
// and fewer than three tenths as many just below.
func negativesGone(near [2]int) bool { return near[1] >= 20 && 10*near[0] < 3*near[1] }

// coverage returns the range of the angles and the widest gap within it.
func coverage(phi []float64) (lo, hi, gap float64) {
	sorted := slices.Clone(phi)
	slices.Sort(sorted)
	for k := 1; k < len(sorted); k++ {
		gap = math.Max(gap, sorted[k]-sorted[k-1])
	}
	return sorted[0], sorted[len(sorted)-1], gap
}

// overlap is the share of the unique reflections of position j that the
// thinnest position of the crystal has too.
func (s *Study) overlap(i, j, thin int) float64 {
	has := make([]bool, s.intake.Catalogue.Len())
	for _, u := range s.intake.Positions[i][thin].Unique {
		has[u] = true
	}
	seen := make([]bool, len(has))
	n, both := 0, 0
	for _, u := range s.intake.Positions[i][j].Unique {
		if seen[u] {
			continue
		}
		seen[u] = true
		n++
		if has[u] {
			both++
		}
	}
	return float64(both) / float64(n)
}
