package intensity

import (
	"context"
	"math"
)

// PrecisionSettings are the choices of Precise; nil or zero fields mean the
// default.
type PrecisionSettings struct {
	Shells int     // of equal count of measured reflections; 0 means 10
	Key    uint64  // of the split into halves
	DMin   float64 // angstrom, limit of completeness when finer than that of the measured reflections; 0 means theirs
}

// Precision describes the quality of the observations of one position within
// one shell, or in all. Forbidden reflections are left out. Where a value
// cannot be formed it is NaN.
type Precision struct {
	DLong, DShort float64 // limits, angstrom
	Observations  int
	Unique        int
	Possible      int // allowed reflections within the limits
	Completeness  float64
	Multiplicity  float64 // observations over unique
	IOverSigma    float64 // mean of J / sqrt(Var) of merged reflections
	R             RValues
	CCHalf        float64 // correlation of the halves, split by raw index
	CCHalfN       int
	CCHalfTau     float64 // the form without a split
	CCHalfTauN    int
	CCStar        float64 // from CCHalf
	RSplit        float64
}

// Precise returns the precision of one position by shell, low resolution
// first, and in all. The values of s must be on one scale. Errors: what
// Scaled.Check or Possible refuses, a cancelled ctx. Without observations
// shells is empty and the counts of all are zero.
func Precise(ctx context.Context, s *Scaled, cat *Catalogue, o *PrecisionSettings) (shells []Precision, all *Precision, err error) {
	set := PrecisionSettings{Shells: 10}
	if o != nil {
		set.Key, set.DMin = o.Key, o.DMin
		if o.Shells != 0 {
			set.Shells = o.Shells
		}
	}
	if err := s.Check(cat.Len()); err != nil {
		return nil, nil, err
	}
	m := Merge(cat.Len(), s)
	sh := cat.Shells(set.Shells, m)
	rows := newTally(sh.N)
	if err := rows.possible(sh, cat, set.DMin); err != nil {
		return nil, nil, err
	}
	if err := ctx.Err(); err != nil {
		return nil, nil, err
	}
	rows.observations(s, cat, sh)
	a, b := MergeHalves(cat.Len(), s, set.Key)
	rows.merged(m, a, b, cat, sh)
	return rows.finish(sh)
}

// tally gathers what each shell needs; the last one is for all.
type tally struct {
	row    []Precision
	r      []rSums
	tau    []sigmaTau
	ratio  []float64
	x, y   [][]float64
	shells int
}

func newTally(shells int) *tally {
	n := shells + 1
	return &tally{make([]Precision, n), make([]rSums, n), make([]sigmaTau, n), make([]float64, n), make([][]float64, n), make([][]float64, n), shells}
}

func (t *tally) both(shell int32, f func(k int)) {
	if shell >= 0 {
		f(int(shell))
		f(t.shells)
	}
}

func (t *tally) possible(sh *Shells, cat *Catalogue, dMin float64) error {
	if sh.N == 0 {
		return nil
	}
	limit := sh.Edges[sh.N]
	if dMin > 0 {
		limit = max(limit, 1/(4*dMin*dMin))
	}
	_, s2, err := Possible(cat.Cell, cat.Group, limit*(1+1e-9), cat.Apart)
	if err != nil {
		return err
	}
	for _, x := range s2 {
		t.row[t.shells].Possible++
		// The first shell holds what is missing below the lowest measured
		// reflection, the last one what is missing beyond the highest.
		k := sh.Find(x)
		switch {
		case x < sh.Edges[0]:
			k = 0
		case x > sh.Edges[sh.N]:
			k = sh.N - 1
		}
		t.row[k].Possible++
	}
	return nil
}

func (t *tally) observations(s *Scaled, cat *Catalogue, sh *Shells) {
	eachReflection(s.Unique, s.I, func(u int32, values []float64) {
		if cat.Absent[u] {
			return
		}
		t.both(sh.Of[u], func(k int) {
			t.row[k].Observations += len(values)
			t.r[k].add(values)
			t.tau[k].add(values)
		})
	})
}

func (t *tally) merged(m, a, b *Merged, cat *Catalogue, sh *Shells) {
	for u := range m.J {
		if m.N[u] == 0 || cat.Absent[u] {
			continue
		}
		t.both(sh.Of[u], func(k int) {
			t.row[k].Unique++
			t.ratio[k] += m.J[u] / math.Sqrt(m.Var[u])
			if a.N[u] > 0 && b.N[u] > 0 {
				t.x[k], t.y[k] = append(t.x[k], a.J[u]), append(t.y[k], b.J[u])
			}
		})
	}
}

func (t *tally) finish(sh *Shells) ([]Precision, *Precision, error) {
	for k := range t.row {
		p := &t.row[k]
		switch {
		case sh.N == 0:
			p.DLong, p.DShort = math.NaN(), math.NaN()
		case k < sh.N:
			p.DLong, p.DShort = sh.Spacing(k)
		default:
			p.DLong, _ = sh.Spacing(0)
			_, p.DShort = sh.Spacing(sh.N - 1)
		}
		p.Completeness = float64(p.Unique) / float64(p.Possible)
		p.Multiplicity = float64(p.Observations) / float64(p.Unique)
		p.IOverSigma = t.ratio[k] / float64(p.Unique)
		p.R = t.r[k].values()
		p.CCHalf, p.CCHalfN = Correlate(t.x[k], t.y[k])
		p.CCHalfTau, p.CCHalfTauN = t.tau[k].value(), t.tau[k].n
		p.CCStar = CCStar(p.CCHalf)
		p.RSplit = RSplit(t.x[k], t.y[k])
	}
	return t.row[:t.shells], &t.row[t.shells], nil
}
