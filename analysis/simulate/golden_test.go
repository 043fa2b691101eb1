package simulate

import (
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// The first rows of the demonstration are frozen: its files are committed, so a change
// of any stream, order or formula must be meant. Tolerance 1e-9 allows for fused multiplication.
func TestTarnIsFrozen(t *testing.T) {
	plan := Tarn()
	plan.Seed = 20260101
	s := invent(t, plan)
	m := s.Specimens[0].Positions[0]
	for i, want := range goldenTarn {
		floatcmp.CheckSlice(t, "row", []float64{float64(m.Rows.H[i]), float64(m.Rows.K[i]), float64(m.Rows.L[i]), m.Rows.I[i], m.Rows.Sigma[i], m.Rows.Phi[i], float64(m.Rows.Frame[i])}, want, 0, 1e-9)
	}
	last := s.Specimens[2].Positions[2]
	n := last.Rows.Len() - 1
	floatcmp.CheckSlice(t, "last row", []float64{float64(n), last.Rows.I[n], last.Rows.Sigma[n], last.Rows.Phi[n]}, goldenTarnLast, 0, 1e-9)
}

func TestRowsCarryTheExchange(t *testing.T) {
	// With the truth as strength axis, C(z, p) = <z y>/(<z><y>) - 1 by shell and
	// m = 1 - C(z, thick)/C(z, thin); the tolerance is about three standard errors.
	for _, c := range []struct {
		name string
		plan *Plan
		want float64
	}{
		{"noise only", Flawed(FlawExchange, 5).withoutDeviations(), 1 - 0.88/0.98},
		{"null", Null(5).withoutDeviations(), 0},
	} {
		s := invent(t, c.plan)
		for x := range s.Specimens {
			thin, thick := shellExcess(s, x, 0), shellExcess(s, x, 2)
			floatcmp.Check(t, c.name, 1-thick/thin, c.want, 0.03, 0)
		}
	}
}

func (p *Plan) withoutDeviations() *Plan {
	out := p.filled()
	for i := range out.Crystals {
		for j := range out.Crystals[i].Positions {
			out.Crystals[i].Positions[j].Deviation = 0
		}
	}
	return &out
}

// shellExcess is the mean over shells of C(z, p), rows brought to the true scale.
func shellExcess(s *Series, specimen, position int) float64 {
	m := s.Specimens[specimen].Positions[position]
	shells := int(s.Truth.Shell[len(s.Truth.Shell)-1]) + 1
	zy, z, y, n := make([]float64, shells), make([]float64, shells), make([]float64, shells), make([]float64, shells)
	for i, u := range m.Unique {
		if s.Truth.Absent[u] {
			continue
		}
		scale := m.Expected[i] / m.Law[u] // includes the fresh error; its mean is 1
		k, v := s.Truth.Shell[u], m.Rows.I[i]/scale
		zy[k] += s.Truth.J[u] * v
		z[k] += s.Truth.J[u]
		y[k] += v
		n[k]++
	}
	sum := 0.0
	for k := range n {
		sum += zy[k]*n[k]/(z[k]*y[k]) - 1
	}
	return sum / float64(shells)
}

var goldenTarn = [][]float64{
	{-9, 4, -2, 90.060251082, 11.1355287257, 53.3723695302, 223},
	{-9, 4, -1, 4.44813225354, 6.48074069841, 53.9828868902, 224},
	{-9, 4, 0, 5.79680078288, 6.44689847911, 54.5855243083, 226},
	{-8, 3, -8, 37.9394619244, 8.32165848855, 51.6478279329, 220},
	{-8, 3, -7, 47.9579688676, 8.99652710772, 52.3962216077, 221},
}

var goldenTarnLast = []float64{5289, 182.547459808, 14.9352770312, 54.1572183117}
