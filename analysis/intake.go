package analysis

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/difference"
	"thinward/analysis/intensity"
)

// Intake is what came in, before any scaling.
type Intake struct {
	Catalogue *intensity.Catalogue
	// Positions is indexed by crystal and position as in the Series.
	Positions [][]Accepted
}

// Accepted is one position after its rows have been made observations.
type Accepted struct {
	Observations *intensity.Columns
	Audit        *intensity.RowAudit
	// Unique and Raw number each observation in the catalogue.
	Unique, Raw []int32
	// Excluded counts observations that the manifest sets aside, by reason.
	Excluded map[string]int
	// Turn brought its rotation angles to those of the thinnest position of its crystal.
	Turn difference.Turn
}

// Ice rings of hexagonal and cubic ice as d in angstrom (common practice, no
// source), each set aside with a half-width of 0.02 angstrom.
var iceRings = []float64{3.90, 3.67, 3.44, 2.67, 2.25, 2.07, 1.95, 1.92}

const iceHalfWidth = 0.02

// Intake turns rows into observations, applies the exclusions, and numbers all
// reflections of the series.
func (s *Study) Intake(ctx context.Context) (*Intake, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.intakeStep(ctx)
}

func (s *Study) intakeStep(ctx context.Context) (*Intake, error) {
	if s.intake != nil {
		return s.intake, nil
	}
	in := &Intake{Positions: make([][]Accepted, len(s.Series.Crystals))}
	var sets []*intensity.Columns
	var warnings []intensity.Warning
	for i := range s.Series.Crystals {
		c := &s.Series.Crystals[i]
		in.Positions[i] = make([]Accepted, len(c.Positions))
		for j := range c.Positions {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			p := &c.Positions[j]
			a := &in.Positions[i][j]
			columns, audit, err := intensity.Collapse(p.Rows, p.Policy)
			if err != nil {
				return nil, fmt.Errorf("%s: %w", s.place(i, j), err)
			}
			a.Audit = audit
			a.Observations, a.Excluded = s.exclude(columns, &p.Exclude)
			if a.Observations.Len() == 0 {
				return nil, fmt.Errorf("%s: every observation is excluded; relax exclude in the manifest", s.place(i, j))
			}
			for _, w := range audit.Warnings {
				w.Where = s.place(i, j)
				warnings = append(warnings, w)
			}
		}
		if text := oneTurn(in.Positions[i]); text != "" {
			warnings = append(warnings, turned(c.Name, text))
		}
		s.progress("intake", i+1, len(s.Series.Crystals))
	}
	indexing, said, err := s.settle(ctx, in.Positions)
	if err != nil {
		return nil, err
	}
	warnings = append(warnings, said...)
	var turns []TurnResult
	for i := range in.Positions {
		// What the indices say of the angles first: it is sharper, and turn then asks
		// whether anything is left.
		warnings = append(warnings, s.align(i, in.Positions[i])...)
		own, said := s.turn(i, in.Positions[i])
		turns, warnings = append(turns, own...), append(warnings, said...)
	}
	for i := range in.Positions {
		for j := range in.Positions[i] {
			sets = append(sets, in.Positions[i][j].Observations)
		}
	}
	build := intensity.NewCatalogue
	if s.Series.FriedelApart {
		build = intensity.NewCatalogueApart
	}
	if in.Catalogue, err = build(s.Series.Cell, s.Series.Group, sets...); err != nil {
		return nil, err
	}
	for i := range in.Positions {
		for j := range in.Positions[i] {
			a := &in.Positions[i][j]
			if a.Unique, err = in.Catalogue.Assign(a.Observations); err != nil {
				return nil, fmt.Errorf("%s: %w", s.place(i, j), err)
			}
			a.Raw = in.Catalogue.RawIDs(a.Observations)
		}
	}
	s.warnings = append(s.warnings, warnings...)
	s.indexing, s.turns = indexing, turns
	s.intake = in
	return in, nil
}

// exclude returns the columns without what x names, and how many rows went by
// reason. Without exclusions the same columns come back.
func (s *Study) exclude(c *intensity.Columns, x *Exclusion) (*intensity.Columns, map[string]int) {
	out := map[string]int{}
	if len(x.Frames) == 0 && len(x.ShellsA) == 0 && !x.Ice {
		return c, out
	}
	metric := s.Series.Cell.ReciprocalMetric()
	var keep []int
	for r := range c.I {
		d := spacing(metric, c, r)
		reason := ""
		switch {
		case c.Frame != nil && slices.Contains(x.Frames, c.Frame[r]):
			reason = "frame"
		case inShells(d, x.ShellsA):
			reason = "shell"
		case x.Ice && inIce(d):
			reason = "ice"
		}
		if reason == "" {
			keep = append(keep, r)
		} else {
			out[reason]++
		}
	}
	return pick(c, keep), out
}

func spacing(m [6]float64, c *intensity.Columns, r int) float64 {
	h, k, l := float64(c.H[r]), float64(c.K[r]), float64(c.L[r])
	return 1 / math.Sqrt(m[0]*h*h+m[1]*k*k+m[2]*l*l+m[3]*k*l+m[4]*h*l+m[5]*h*k)
}

func inShells(d float64, shells [][2]float64) bool {
	for _, s := range shells {
		if d >= min(s[0], s[1]) && d <= max(s[0], s[1]) {
			return true
		}
	}
	return false
}

func inIce(d float64) bool {
	for _, ring := range iceRings {
		if d > ring-iceHalfWidth && d < ring+iceHalfWidth {
			return true
		}
	}
	return false
}

// pick copies the given rows of c.
func pick(c *intensity.Columns, rows []int) *intensity.Columns {
	return &intensity.Columns{
		H: take(c.H, rows), K: take(c.K, rows), L: take(c.L, rows), I: take(c.I, rows), Sigma: take(c.Sigma, rows),
		Phi: take(c.Phi, rows), Frame: take(c.Frame, rows), Partiality: take(c.Partiality, rows),
	}
}

// take picks entries of a column, nil of a column that is not there.
func take[T any](column []T, rows []int) []T {
	if column == nil {
		return nil
	}
	out := make([]T, len(rows))
	for i, r := range rows {
		out[i] = column[r]
	}
	return out
}
