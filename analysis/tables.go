package analysis

import (
	"context"
	"math"
	"sort"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

// ScaledTable holds the scaled observations of one position.
type ScaledTable struct {
	Crystal, Position string
	// ThicknessNM and its independent uncertainty in nm, 0 when not given.
	ThicknessNM, ThicknessSU float64
	Rows                     []ScaledRow
}

// ScaledRow is one observation. HKL is the index as measured, Unique the
// representative of its equivalents. I and SU are as read, Scale is g of
// g = K exp(-2 B s^2), J = I/g and SUJ the uncertainty of J under the noise model
// at the expected intensity. Residual is (J - joint J of the crystal)/SUJ.
// Weight is the relative weight in the scale fit; Listed says that it fell so
// low that the observation is on the list of outliers, which still count.
// Phi is NaN without angles.
type ScaledRow struct {
	HKL, Unique      crystal.HKL
	D, Phi           float64
	I, SU, Scale     float64
	J, SUJ, Residual float64
	Weight           float64
	Listed           bool
}

// MergedTable holds the merged intensities of one position.
type MergedTable struct {
	Crystal, Position        string
	ThicknessNM, ThicknessSU float64
	Rows                     []MergedRow
}

// MergedRow is one unique reflection measured N times in this position, the
// inverse-variance mean J with its uncertainty. Forbidden reflections are among
// the rows.
type MergedRow struct {
	HKL                   crystal.HKL
	D, J, SU              float64
	N                     int
	Epsilon, Multiplicity int
	Centric, Forbidden    bool
}

// ChangedRow is one of the most changed reflections of a contrast: Rank counts
// from 1, Of is the number of pairs. ByNoise is the |z| that the reflection of
// this rank has in the median if nothing changed and z is normal,
//
//	Phi^-1(1 - p/2), p = (rank - 0.3)/(of + 0.4)
//
// with the median rank of Benard & Bos-Levenbach (1953).
type ChangedRow struct {
	PairRow
	Rank, Of int
	ByNoise  float64
}

// ScaledTables gives the scaled observations of every position, in the order of
// the series and of the observations.
func (s *Study) ScaledTables(ctx context.Context) ([]ScaledTable, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	scaled, err := s.scaleStep(ctx)
	if err != nil {
		return nil, err
	}
	var out []ScaledTable
	for i, sc := range scaled {
		listed := map[int]bool{}
		for _, o := range sc.Fit.Outliers {
			listed[o.Row] = true
		}
		for j := range s.Series.Crystals[i].Positions {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			out = append(out, s.scaledTable(i, j, listed))
		}
	}
	return out, nil
}

func (s *Study) scaledTable(i, j int, listed map[int]bool) ScaledTable {
	sc, cat, p := s.scaled[i], s.intake.Catalogue, &s.Series.Crystals[i].Positions[j]
	t := ScaledTable{Crystal: s.Series.Crystals[i].Name, Position: p.Name, ThicknessNM: p.ThicknessNM, ThicknessSU: p.ThicknessSU}
	pos, first := sc.Positions[j], sc.first[sc.slot[j]]
	t.Rows = make([]ScaledRow, len(pos.I))
	for r := range t.Rows {
		o, u := first+r, pos.Unique[r]
		su := math.Sqrt(pos.Var[r])
		t.Rows[r] = ScaledRow{
			HKL: cat.RawHKL(pos.Raw[r]), Unique: cat.HKL[u], D: dOf(cat.S2[u]), Phi: math.NaN(),
			I: sc.Input.I[o], SU: math.Sqrt(sc.Input.Var[o]), Scale: sc.Fit.Scale[o],
			J: pos.I[r], SUJ: su, Residual: (pos.I[r] - sc.Fit.J[u]) / su, Weight: sc.Fit.Weight[o], Listed: listed[o],
		}
		if pos.Phi != nil {
			t.Rows[r].Phi = pos.Phi[r]
		}
	}
	return t
}

func dOf(s2 float64) float64 { return 1 / (2 * math.Sqrt(s2)) }

// MergedTables gives the merged intensities of every position, in the order of
// the series and of the indices.
func (s *Study) MergedTables(ctx context.Context) ([]MergedTable, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	scaled, err := s.scaleStep(ctx)
	if err != nil {
		return nil, err
	}
	cat := s.intake.Catalogue
	var out []MergedTable
	for i, sc := range scaled {
		for j := range s.Series.Crystals[i].Positions {
			if err := ctx.Err(); err != nil {
				return nil, err
			}
			p := &s.Series.Crystals[i].Positions[j]
			t := MergedTable{Crystal: s.Series.Crystals[i].Name, Position: p.Name, ThicknessNM: p.ThicknessNM, ThicknessSU: p.ThicknessSU}
			m := intensity.Merge(cat.Len(), sc.Positions[j])
			for u, n := range m.N {
				if n == 0 {
					continue
				}
				t.Rows = append(t.Rows, MergedRow{
					HKL: cat.HKL[u], D: dOf(cat.S2[u]), J: m.J[u], SU: math.Sqrt(m.Var[u]), N: int(n), Epsilon: int(cat.Epsilon[u]),
					Multiplicity: cat.Group.Multiplicity(cat.HKL[u]), Centric: cat.Centric[u], Forbidden: cat.Absent[u],
				})
			}
			out = append(out, t)
		}
	}
	return out, nil
}

// MostChanged lists, for each primary contrast and each between crystals, the n
// pairs of largest |z|, largest first; pairs without z are left out. n of 0 or
// less gives all.
func (s *Study) MostChanged(ctx context.Context, n int) ([]ChangedRow, error) {
	s.mu.Lock()
	defer s.mu.Unlock()
	var out []ChangedRow
	for _, c := range s.list {
		if !c.Primary && !c.Across() {
			continue
		}
		x, err := s.compareStep(ctx, c)
		if err != nil {
			return nil, err
		}
		out = append(out, mostChanged(s.rows(x), n)...)
	}
	return out, nil
}

func mostChanged(rows []PairRow, n int) []ChangedRow {
	var list []ChangedRow
	for i := range rows {
		if !math.IsNaN(rows[i].Z) {
			list = append(list, ChangedRow{PairRow: rows[i]})
		}
	}
	sort.SliceStable(list, func(a, b int) bool { return math.Abs(list[a].Z) > math.Abs(list[b].Z) })
	of := len(list)
	if n > 0 && n < of {
		list = list[:n]
	}
	for i := range list {
		list[i].Rank, list[i].Of, list[i].ByNoise = i+1, of, byNoise(i+1, of)
	}
	return list
}

func byNoise(rank, of int) float64 {
	p := (float64(rank) - 0.3) / (float64(of) + 0.4)
	return distuv.UnitNormal.Quantile(1 - p/2)
}
