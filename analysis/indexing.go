package analysis

import (
	"context"
	"fmt"
	"math"

	"thinward/analysis/crystal"
	"thinward/analysis/difference"
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
// applied, empty for none. Ambiguous says that neither the intensities decide nor, against
// another position of the crystal, the rotation angles.
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

// settle brings every position to one indexing where the lattice leaves a choice: by the
// intensities, and where these do not decide by the angles at which the indices of
// another position of the crystal were measured. What was decided, and what could not be,
// becomes a warning.
func (s *Study) settle(ctx context.Context, positions [][]Accepted) ([]IndexingResult, []intensity.Warning, error) {
	options := crystal.AlternativeIndexings(s.Series.Group, s.Series.Cell, latticeToleranceDeg)
	if len(options) < 2 {
		return nil, nil, nil
	}
	first := s.Series.Crystals[0].byThickness()[0]
	reference := listOf(positions[0][first].Observations)
	var out []IndexingResult
	for i := range positions {
		x := &settling{study: s, crystal: i, options: options, list: positions[i], choices: make([]*crystal.IndexingChoice, len(positions[i]))}
		for j := range positions[i] {
			if i == 0 && j == first {
				continue
			}
			if err := ctx.Err(); err != nil {
				return nil, nil, err
			}
			var err error
			if x.choices[j], err = crystal.ChooseIndexing(s.Series.Group, s.Series.Cell, options, reference, listOf(positions[i][j].Observations), nil); err != nil {
				return nil, nil, fmt.Errorf("%s: %w", s.place(i, j), err)
			}
		}
		own, err := x.settle()
		if err != nil {
			return nil, nil, err
		}
		out = append(out, own...)
	}
	return out, indexingWarnings(out), nil
}

// settling is the choice of indexing of the positions of one crystal.
type settling struct {
	study   *Study
	crystal int
	options []crystal.Reindexing
	list    []Accepted
	choices []*crystal.IndexingChoice // nil for the reference
}

// base is the position of the crystal by whose angles others are judged: the thinnest of which
// the intensities know the indexing, else the thinnest.
func (x *settling) base() int {
	order := x.study.Series.Crystals[x.crystal].byThickness()
	for _, j := range order {
		if x.choices[j] == nil || !x.choices[j].Ambiguous {
			return j
		}
	}
	return order[0]
}

func (x *settling) settle() ([]IndexingResult, error) {
	base := x.base()
	done := make([]*IndexingResult, len(x.list))
	order := []int{base}
	for j := range x.list {
		if j != base {
			order = append(order, j)
		}
	}
	for _, j := range order {
		if x.choices[j] == nil {
			continue
		}
		r, by := x.decide(j, base)
		if !by.Identity() {
			changed, err := reindexed(x.list[j].Observations, by)
			if err != nil {
				return nil, fmt.Errorf("%s: %w", r.Where, err)
			}
			x.list[j].Observations = changed
			r.Proposal = by.String()
		}
		done[j] = r
	}
	var out []IndexingResult
	for _, r := range done {
		if r != nil {
			out = append(out, *r)
		}
	}
	return out, nil
}

// decide gives what is known of position j and the change that its indices need.
func (x *settling) decide(j, base int) (*IndexingResult, crystal.Reindexing) {
	c := x.choices[j]
	r := &IndexingResult{Where: x.study.place(x.crystal, j), Agreement: c.Correlation, Z: c.Z, Ambiguous: c.Ambiguous}
	for _, o := range x.options {
		r.Options = append(r.Options, o.String())
	}
	best := x.options[c.Best]
	if c.Ambiguous && j != base {
		if option, a := x.byAngle(j, base); a != nil {
			r.Ambiguous, best = false, x.options[option]
			how := "is indexed like"
			if !best.Identity() {
				how = fmt.Sprintf("has been re-indexed by %s to be like", best)
			}
			r.Text = fmt.Sprintf("the intensities do not decide between the %d ways to index, but the angles do: it %s %s, by which %d of %d observations of one index lie at one angle (by chance %.0f, the next best way %d)",
				len(x.options), how, x.study.place(x.crystal, base), a.Within, a.Common, a.Chance, a.RunnerUp)
			return r, best
		}
	}
	// The intensities may have the higher symmetry themselves, so that two ways are the
	// same; another one, that in which the list came, can be wrong all the same.
	worse := c.Ambiguous && c.Margin(0) >= leastMargin && c.N[c.Best] >= leastCommon
	switch {
	case c.Ambiguous && !worse:
		r.Text = fmt.Sprintf("the lattice allows %d ways to index and the intensities do not decide; indices are left as they are, and averages over crystals may mix two indexings", len(x.options))
		return r, x.options[0]
	case best.Identity():
		r.Text = fmt.Sprintf("indexed like the reference (margin z = %.1f)", c.Z)
	case worse:
		r.Text = fmt.Sprintf("was indexed another way than the reference (z = %.1f) and has been re-indexed by %s; of the other ways one fits as well (%s), as where the true symmetry is higher than the group, and then both are the same", c.Margin(0), best, c.Why)
	default:
		r.Text = fmt.Sprintf("was indexed another way than the reference and has been re-indexed by %s (margin z = %.1f)", best, c.Z)
	}
	return r, best
}

// byAngle chooses among the ways to index position j, each with all that the Laue class
// makes of it, by the number of observations that then lie at the angle at which the
// base position has the same index. nil when no way is clear.
func (x *settling) byAngle(j, base int) (option int, a *difference.Alignment) {
	from, o := x.list[base].Observations, x.list[j].Observations
	if from.Phi == nil || o.Phi == nil {
		return 0, nil
	}
	tolerance := max(from.FrameWidth(), o.FrameWidth())
	if !(tolerance > 0) {
		tolerance = 1
	}
	numbers, stride := rawNumbers{}, 1+max(from.Len(), o.Len())/alignSample
	thin := numbers.of(from, x.options[0], stride)
	var ways []difference.Angled
	var of []int
	for k, by := range x.options {
		for _, same := range x.study.rotations() {
			ways = append(ways, numbers.of(o, crystal.Reindexing{M: product(by.M, same.M), Den: by.Den}, stride))
			of = append(of, k)
		}
	}
	way, a := difference.AlignAny(thin, ways, tolerance)
	if !a.Clear {
		return 0, nil
	}
	return of[way], a
}

// indexingWarnings says once what is the same of several positions.
func indexingWarnings(list []IndexingResult) []intensity.Warning {
	var out []intensity.Warning
	at := map[string]int{}
	for _, r := range list {
		code := "reindexed"
		switch {
		case r.Ambiguous && r.Proposal == "":
			code = "indexing-ambiguous"
		case r.Proposal == "":
			continue
		}
		if k, ok := at[r.Text]; ok {
			out[k].Where += ", " + r.Where
			continue
		}
		at[r.Text] = len(out)
		out = append(out, intensity.Warning{Code: code, Where: r.Where, Text: r.Text})
	}
	return out
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
