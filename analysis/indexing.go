package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// latticeToleranceDeg is how far a rotation may miss the lattice and still offer
// another way to index it.
const latticeToleranceDeg = 1.0

// leastMargin and leastCommon are what is asked of a choice between ways to index, as by
// default in crystal.ChooseIndexing.
const (
	leastMargin = 4
	leastCommon = 50
)

// IndexingResult says how one position was brought to the indexing of the
// reference, the thinnest position of the first crystal. Z is the margin of the
// best way over the second best; Proposal is the change of indices that was
// applied, empty for none.
type IndexingResult struct {
	Where     string    `json:"where"`
	Options   []string  `json:"options"`
	Agreement []float64 `json:"correlation"`
	Z         float64   `json:"z"`
	Ambiguous bool      `json:"ambiguous"`
	Proposal  string    `json:"reindex"`
	Text      string    `json:"text"`
}

// Indexing gives the choice of indexing of every position; empty when the
// lattice allows one way only.
func (s *Study) Indexing(ctx context.Context) ([]IndexingResult, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if _, err := s.intakeStep(ctx); err != nil {
		return nil, err
	}
	return append([]IndexingResult(nil), s.indexing...), nil
}

// settle brings every position to one indexing where the lattice leaves a
// choice. What was decided, and what could not be, becomes a warning.
func (s *Study) settle(ctx context.Context, positions [][]Accepted) ([]IndexingResult, []intensity.Warning, error) {
	options := crystal.AlternativeIndexings(s.Series.Group, s.Series.Cell, latticeToleranceDeg)
	if len(options) < 2 {
		return nil, nil, nil
	}
	first := s.Series.Crystals[0].byThickness()[0]
	reference := listOf(positions[0][first].Observations)
	var out []IndexingResult
	var warnings []intensity.Warning
	for i := range positions {
		for j := range positions[i] {
			if i == 0 && j == first {
				continue
			}
			if err := ctx.Err(); err != nil {
				return nil, nil, err
			}
			a := &positions[i][j]
			c, err := crystal.ChooseIndexing(s.Series.Group, s.Series.Cell, options, reference, listOf(a.Observations), nil)
			if err != nil {
				return nil, nil, fmt.Errorf("%s: %w", s.place(i, j), err)
			}
			r := IndexingResult{Where: s.place(i, j), Agreement: c.Correlation, Z: c.Z, Ambiguous: c.Ambiguous}
			for _, o := range options {
				r.Options = append(r.Options, o.String())
			}
			best := options[c.Best]
			// The intensities may have the higher symmetry themselves, so that two ways are the
			// same; another one, that in which the list came, can be wrong all the same.
			worse := c.Ambiguous && c.Margin(0) >= leastMargin && c.N[c.Best] >= leastCommon
			switch {
			case c.Ambiguous && !worse:
				r.Text = fmt.Sprintf("the lattice allows %d ways to index and the intensities do not decide (%s); indices are left as they are, and averages over positions may mix two indexings", len(options), c.Why)
				warnings = append(warnings, intensity.Warning{Code: "indexing-ambiguous", Where: r.Where, Text: r.Text})
			case best.Identity():
				r.Text = fmt.Sprintf("indexed like the reference (margin z = %.1f)", c.Z)
			default:
				if a.Observations, err = reindexed(a.Observations, best); err != nil {
					return nil, nil, fmt.Errorf("%s: %w", s.place(i, j), err)
				}
				r.Proposal = best.String()
				r.Text = fmt.Sprintf("was indexed another way than the reference and has been re-indexed by %s (margin z = %.1f)", best, c.Z)
				if worse {
					r.Text = fmt.Sprintf("was indexed another way than the reference (z = %.1f) and has been re-indexed by %s; of the other ways one fits as well (%s), as where the true symmetry is higher than the group, and then both are the same", c.Margin(0), best, c.Why)
				}
				warnings = append(warnings, intensity.Warning{Code: "reindexed", Where: r.Where, Text: r.Text})
			}
			out = append(out, r)
		}
	}
	return out, warnings, nil
}

func listOf(c *intensity.Columns) crystal.Intensities {
	l := crystal.Intensities{HKL: make([]crystal.HKL, c.Len()), I: c.I}
	for r := range c.I {
		l.HKL[r] = crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])}
	}
	return l
}

// reindexed returns c with new indices; the other columns are shared.
func reindexed(c *intensity.Columns, by crystal.Reindexing) (*intensity.Columns, error) {
	out := *c
	out.H, out.K, out.L = make([]int16, c.Len()), make([]int16, c.Len()), make([]int16, c.Len())
	for r := range c.I {
		h := crystal.HKL{H: int(c.H[r]), K: int(c.K[r]), L: int(c.L[r])}
		n := by.Apply(h)
		if !by.Maps(h) {
			return nil, fmt.Errorf("index %d %d %d has no whole image under %s", h.H, h.K, h.L, by)
		}
		for _, v := range []int{n.H, n.K, n.L} {
			if v < math.MinInt16 || v > math.MaxInt16 {
				return nil, fmt.Errorf("index %d %d %d is too large after %s", h.H, h.K, h.L, by)
			}
		}
		out.H[r], out.K[r], out.L[r] = int16(n.H), int16(n.K), int16(n.L)
	}
	return &out, nil
}

// Warnings lists what the steps so far had to say.
func (s *Study) Warnings() []WarningResult {
	s.mu.Lock()
	defer s.mu.Unlock()
	var out []WarningResult
	for _, w := range s.warnings {
		out = append(out, WarningResult{Code: w.Code, Where: w.Where, Text: w.Text})
	}
	return out
}
