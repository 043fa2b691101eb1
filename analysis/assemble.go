package analysis

import (
	"maps"
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/intensity"
	"thinward/analysis/size"
)

// assemble gathers what there is so far. The caller holds the lock.
func (s *Study) assemble() *Result {
	r := &Result{
		Schema: Schema, Series: s.Series.Title, Seed: s.Series.Seed,
		Intake: s.table, Common: s.sharing, Remarks: s.remarks, Centring: s.centring, Turns: s.turns, Indexing: s.indexing, Forbidden: s.forbidden, Quality: s.quality, Distributions: s.distributions, FriedelMates: s.mates, Controls: s.controls, Specification: s.spec, Expectation: s.expected,
	}
	for i := range s.Series.Crystals {
		for j := range s.Series.Crystals[i].Positions {
			r.Inputs = append(r.Inputs, s.inputs(i, j)...)
		}
	}
	if s.scaled != nil {
		r.Scaling = s.scalingResults()
	}
	for _, c := range s.list {
		if x := s.compared[c]; x != nil {
			r.Contrasts = append(r.Contrasts, x.Result)
		}
	}
	if s.pooled != nil {
		r.Crystals, r.Thickness = s.pooled.crystals, s.pooled.thickness
		r.Matters = s.matters()
	}
	r.Ledger = s.ledger()
	for _, w := range s.warnings {
		r.Warnings = append(r.Warnings, WarningResult{Code: w.Code, Where: w.Where, Text: w.Text})
	}
	if len(r.Contrasts) == len(s.list) {
		r.Answers = answers(r)
	}
	return r
}

func (s *Study) inputs(i, j int) []InputResult {
	p := &s.Series.Crystals[i].Positions[j]
	var out []InputResult
	for _, f := range p.Sources {
		in := InputResult{Path: f.Path, SHA256: f.SHA256, Crystal: s.Series.Crystals[i].Name, Position: p.Name, Rows: f.Rows}
		if s.intake != nil {
			in.Observations = s.intake.Positions[i][j].Observations.Len()
		}
		if len(f.SetAside) > 0 {
			in.SetAside = map[string]int{}
			for _, a := range f.SetAside {
				in.SetAside[a.Reason] += a.N
			}
		}
		out = append(out, in)
	}
	return out
}

// matters says what the fitted exchange would do to amplitudes.
func (s *Study) matters() []Matters {
	var out []Matters
	centric, n := 0, 0
	for u, absent := range s.intake.Catalogue.Absent {
		if absent {
			continue
		}
		n++
		if s.intake.Catalogue.Centric[u] {
			centric++
		}
	}
	for _, x := range s.primaries() {
		m := x.Result.Exchange.M
		e, err := size.ExpectedEffect(m, &size.EffectSettings{CentricShare: float64(centric) / float64(n)})
		if err != nil {
			continue
		}
		out = append(out, Matters{Crystal: x.Result.Crystal, M: m, AgreementShift: e.Agreement, WeakShift: e.WeakF})
	}
	return out
}

func zOf(level float64) float64 { return distuv.UnitNormal.Quantile((1 + level) / 2) }

// PairRows lists the pairs of every contrast compared so far, one row a pair.
func (s *Study) PairRows() []PairRow {
	s.mu.Lock()
	defer s.mu.Unlock()
	var out []PairRow
	for _, c := range s.list {
		if x := s.compared[c]; x != nil {
			out = append(out, s.rows(x)...)
		}
	}
	return out
}

func (s *Study) rows(x *Compared) []PairRow {
	cat := s.intake.Catalogue
	phi := [2]map[int32]float64{oneAngle(x.thin.Unique, x.thin.Phi), oneAngle(x.thick.Unique, x.thick.Phi)}
	tilt := [2]map[int32]float64{s.meanTilts(x.Contrast.Crystal, x.Contrast.Thin, x.thin), s.meanTilts(x.Contrast.ThickCrystal, x.Contrast.Thick, x.thick)}
	eps, ivw := x.Pairs.Eps(), x.Pairs.InverseVariance(0).Z
	out := make([]PairRow, x.Pairs.Len())
	for i, u := range x.Pairs.Unique {
		p := x.Pairs
		su := math.Sqrt(p.VarD[i])
		r := &out[i]
		*r = PairRow{
			Crystal: x.Result.Crystal, Thin: x.Result.Thin, Thick: x.Result.Thick, HKL: cat.HKL[u], D: 1 / (2 * math.Sqrt(p.S2[i])),
			PhiThin: angleOf(phi[0], u), PhiThick: angleOf(phi[1], u), TiltThin: angleOf(tilt[0], u), TiltThick: angleOf(tilt[1], u), NThin: int(p.NThin[i]), NThick: int(p.NThick[i]),
			JThin: p.Thin[i], SUThin: math.Sqrt(p.VarThin[i]), JThick: p.Thick[i], SUThick: math.Sqrt(p.VarThick[i]),
			Strength: x.Strengths.Z[i], Axis: x.Strengths.Axis.String(), InverseVariance: ivw[i],
			DI: p.Thin[i] - p.Thick[i], SUDI: su, Eps: eps[i], Z: (p.Thin[i] - p.Thick[i]) / su, Class: classOf(x.Strengths.Z[i]),
		}
		if x.Result.ThickCrystal != "" {
			r.Thick = x.Result.ThickCrystal + "/" + r.Thick
		}
		if p.Centric[i] {
			r.Flags = "centric"
		}
		if math.IsNaN(r.Strength) {
			if r.Flags != "" {
				r.Flags += "+"
			}
			r.Flags += "no-strength"
		}
	}
	return out
}

// oneCrossing is the widest range of angles, in degrees, of observations that have one angle.
const oneCrossing = 5

// oneAngle is the mean rotation angle of each unique reflection whose observations lie within
// oneCrossing; equivalents met far apart have no angle in common.
func oneAngle(unique []int32, phi []float64) map[int32]float64 {
	type span struct{ sum, n, lo, hi float64 }
	of := map[int32]*span{}
	for o, v := range phi {
		a := of[unique[o]]
		if a == nil {
			a = &span{lo: v, hi: v}
			of[unique[o]] = a
		}
		a.sum, a.n, a.lo, a.hi = a.sum+v, a.n+1, min(a.lo, v), max(a.hi, v)
	}
	out := map[int32]float64{}
	for u, a := range of {
		if a.hi-a.lo <= oneCrossing {
			out[u] = a.sum / a.n
		}
	}
	return out
}

// meanTilts is the mean angle between beam and slab normal of the observations of each unique
// reflection; nil where the angle at which the slab faces the beam is not given.
func (s *Study) meanTilts(crystal, position int, x *intensity.Scaled) map[int32]float64 {
	p := &s.Series.Crystals[crystal].Positions[position]
	if x.Phi == nil || !p.HasTiltZero {
		return nil
	}
	zero := s.intake.Positions[crystal][position].Turn.Of(p.TiltZeroDeg)
	out, n := map[int32]float64{}, map[int32]float64{}
	for o, u := range x.Unique {
		n[u]++
		out[u] += (tiltOf(x.Phi[o], zero) - out[u]) / n[u]
	}
	return out
}

func angleOf(m map[int32]float64, u int32) float64 {
	if a, ok := m[u]; ok {
		return a
	}
	return math.NaN()
}

func classOf(z float64) string {
	switch {
	case z < 0.2:
		return "floor"
	case z >= 0.5 && z < 1.5:
		return "middle"
	case z >= 3:
		return "top"
	}
	return ""
}

// naiveNames lists the naive axes of a contrast in a fixed order.
func naiveNames(c *ContrastResult) []string { return slices.Sorted(maps.Keys(c.Naive)) }
