package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/evidence"
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

// IntakeDetails gives IntakeTable and all else that is known before scaling: what the
// positions have in common, what was set aside, lattice centring, angles, indexing and
// warnings.
func (s *Study) IntakeDetails(ctx context.Context) (*IntakeDetails, error) {
	if _, err := s.IntakeTable(ctx); err != nil {
		return nil, err
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	out := &IntakeDetails{
		Positions: s.table, Common: s.sharing, Remarks: s.remarks, Laue: s.laueClass, Centring: s.centring, Turns: s.turns, Indexing: s.indexing,
	}
	for _, w := range s.warnings {
		out.Warnings = append(out.Warnings, WarningResult{Code: w.Code, Where: w.Where, Text: w.Text})
	}
	return out, nil
}

func (s *Study) intakeResults(ctx context.Context) ([]IntakeResult, error) {
	if s.table != nil {
		return s.table, nil
	}
	said := len(s.warnings)
	out, remarks, list, err := s.describePositions(ctx)
	if err != nil {
		s.warnings = s.warnings[:said] // the next call says it again
		return nil, err
	}
	s.sharing, s.centring, s.remarks = s.commonResults(list), s.centringResults(list), remarks
	s.laueClass = s.laue()
	if v := s.laueFinding.Verdict; v == evidence.Caution || v == evidence.Fails {
		s.warn("laue-class", "every position", "%s", s.laueClass.Why)
	}
	for _, c := range s.centring {
		if c.Verdict == evidence.Caution.String() || c.Verdict == evidence.Fails.String() {
			s.warn("centring", "lattice "+c.Centring, "%s", c.Why)
		}
	}
	s.warnOfCommon()
	s.table = out
	return out, nil
}

// describePositions describes every position by itself and against the limit that all
// reach.
func (s *Study) describePositions(ctx context.Context) (out []IntakeResult, remarks []IntakeRemark, list []*standing, err error) {
	list = s.standings()
	limit := math.Inf(1)
	for _, x := range list {
		if x.n == 0 {
			return nil, nil, nil, fmt.Errorf("%s: the space group forbids every reflection of it: check the group and the indices", s.place(x.crystal, x.position))
		}
		limit = math.Min(limit, s.reach(x))
	}
	_, reachable, err := intensity.Possible(s.Series.Cell, s.Series.Group, limit*(1+1e-9), s.Series.FriedelApart)
	if err != nil {
		return nil, nil, nil, err
	}
	for _, x := range list {
		if err := ctx.Err(); err != nil {
			return nil, nil, nil, err
		}
		r, err := s.intakeResult(ctx, x, s.Series.Crystals[x.crystal].byThickness()[0])
		if err != nil {
			return nil, nil, nil, err
		}
		r.InOthers = s.inOthers(x, list)
		r.CommonDMin = 1 / (2 * math.Sqrt(limit))
		r.CompletenessCommon = float64(s.within(x, limit)) / float64(len(reachable))
		out = append(out, *r)
		remarks = append(remarks, s.remarksOn(x.crystal, x.position, r)...)
	}
	return out, remarks, list, nil
}

func (s *Study) intakeResult(ctx context.Context, x *standing, thin int) (*IntakeResult, error) {
	i, j := x.crystal, x.position
	p, a, cat := &s.Series.Crystals[i].Positions[j], &s.intake.Positions[i][j], s.intake.Catalogue
	_, all, err := intensity.Precise(ctx, s.raw(i, j), cat, &intensity.PrecisionSettings{Shells: 1, Key: s.Series.Seed})
	if err != nil {
		return nil, err
	}
	negatives := intensity.CountNegatives(a.Unique, a.Observations.I, a.Observations.Sigma, cat, x.shells)
	sigmas := intensity.CheckSigmas(a.Unique, a.Observations)
	cuts := intensity.FindCuts(a.Observations)
	r := &IntakeResult{
		Crystal: s.Series.Crystals[i].Name, Position: p.Name, ThicknessNM: p.ThicknessNM,
		Rows: a.Audit.Rows, Observations: a.Observations.Len(), RowsAs: a.Audit.Policy.String(), Unique: all.Unique,
		Multiplicity: all.Multiplicity, Completeness: all.Completeness, DMin: all.DShort, DMax: all.DLong,
		AngleLo: math.NaN(), AngleHi: math.NaN(), AngleGap: math.NaN(), MeanISigma: all.IOverSigma,
		Negative: negatives.Observed[:], NegativeExp: negatives.Expected[:],
		RMeas: all.R.Meas, RPim: all.R.Pim, CCHalf: all.CCHalf, Overlap: s.overlap(i, j, thin),
		Cell:   s.Series.cellAgreement(p),
		Sigmas: sigmaResult(sigmas),
	}
	for _, w := range sigmas.Warnings {
		s.warn(w.Code, s.place(i, j), "%s", w.Text)
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

func sigmaResult(c *intensity.Sigmas) SigmaResult {
	r := SigmaResult{Same: c.Same, Proportional: c.Proportional, Ceiling: c.Ceiling, Chi2: c.Chi2, Chi2SE: c.Chi2SE, Pairs: c.Pairs, AnyAngle: c.AnyAngle}
	switch far := math.Abs(c.Chi2-1) > 3*c.Chi2SE; {
	case math.IsNaN(c.Chi2):
		r.Why = fmt.Sprintf("%d pairs of near equivalents are too few to check the size of the sigmas", c.Pairs)
	case far && !(c.Chi2 > 0.64 && c.Chi2 < 1.56):
		// A quarter off in sigma; at any angle the scale is in it.
		r.Why = fmt.Sprintf("near equivalents scatter %.1f times as far as their sigmas say; what scaling leaves of that the noise model fits, and the ledger judges", math.Sqrt(c.Chi2))
	}
	return r
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
