package difference

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/intensity"
)

var tarnCell = crystal.Cell{A: 24.1, B: 29.3, C: 34.7, Alpha: 90, Beta: 90, Gamma: 90}

// invention says what an invented position is like.
type invention struct {
	seed       uint64
	crystal    int     // which specimen: other angles, other deviations
	exchange   float64 // m
	scatter    float64 // of deviations, relative
	shared     float64 // correlation of the deviations with those of the crystal
	gain       float64 // counts per unit of intensity
	background float64
	noAngles   bool
}

// truth is what all positions of a test share.
type truth struct {
	cat   *intensity.Catalogue
	raw   []crystal.HKL // as measured
	j     []float64     // by unique reflection
	local []float64
}

func newTruth(t testing.TB, limit float64) *truth {
	t.Helper()
	g, err := crystal.Lookup("P 21 21 21")
	if err != nil {
		t.Fatal(err)
	}
	hkl, _, err := intensity.Possible(tarnCell, g, limit, false)
	if err != nil {
		t.Fatal(err)
	}
	r := rand.New(rand.NewPCG(99, uint64(1e6*limit)))
	w := &truth{}
	rows := &intensity.Columns{}
	for _, h := range hkl {
		for _, e := range g.Equivalents(h) {
			if r.Float64() < 0.5 {
				w.raw = append(w.raw, e)
				rows.H, rows.K, rows.L = append(rows.H, int16(e.H)), append(rows.K, int16(e.K)), append(rows.L, int16(e.L))
				rows.I, rows.Sigma = append(rows.I, 0), append(rows.Sigma, 1)
			}
		}
	}
	if w.cat, err = intensity.NewCatalogue(tarnCell, g, rows); err != nil {
		t.Fatal(err)
	}
	for u, s2 := range w.cat.S2 {
		e := r.ExpFloat64()
		if w.cat.Centric[u] {
			x := r.NormFloat64()
			e = x * x
		}
		w.local = append(w.local, float64(w.cat.Epsilon[u])*math.Exp(-12*s2))
		w.j = append(w.j, e*w.local[u])
	}
	return w
}

// position draws one: exchange by the law, deviations, normal counting noise
// whose variances are those at the expected intensity.
func (w *truth) position(v invention) *intensity.Scaled {
	r := rand.New(rand.NewPCG(v.seed, 5))
	common := rand.New(rand.NewPCG(uint64(v.crystal), 6))
	angle := rand.New(rand.NewPCG(uint64(v.crystal), 7))
	s := &intensity.Scaled{}
	rows := &intensity.Columns{}
	for _, h := range w.raw {
		rows.H, rows.K, rows.L = append(rows.H, int16(h.H)), append(rows.K, int16(h.K)), append(rows.L, int16(h.L))
		rows.I, rows.Sigma = append(rows.I, 0), append(rows.Sigma, 1)
	}
	unique, _ := w.cat.Assign(rows)
	ids := w.cat.RawIDs(rows)
	for o, u := range unique {
		x := v.scatter * (v.shared*common.NormFloat64() + math.Sqrt(1-v.shared*v.shared)*r.NormFloat64())
		phi := -60 + 120*angle.Float64() + 0.1*r.NormFloat64()
		j := ((1-v.exchange)*w.j[u] + v.exchange*w.local[u]) * math.Exp(x-0.5*v.scatter*v.scatter)
		variance := (j + v.background) / v.gain
		s.Unique, s.Raw = append(s.Unique, u), append(s.Raw, ids[o])
		s.I, s.Var = append(s.I, j+math.Sqrt(variance)*r.NormFloat64()), append(s.Var, variance)
		if !v.noAngles {
			s.Phi = append(s.Phi, phi)
		}
	}
	return s
}

func mustPair(t testing.TB, thin, thick *intensity.Scaled, cat *intensity.Catalogue, o *Settings) *Pairs {
	t.Helper()
	p, err := Pair(context.Background(), thin, thick, cat, o)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// exchangeBy is the instrument estimate of m: one minus the ratio of the
// covariances of z with thick and with thin, both over their own shell means.
func exchangeBy(p *Pairs, z, thin, thick []float64) float64 {
	sums := make([][4]float64, p.Shells)
	for i, k := range p.Shell {
		if !math.IsNaN(z[i]) {
			sums[k][0]++
			sums[k][1] += math.Min(z[i], 6)
			sums[k][2] += thin[i] / p.Epsilon[i]
			sums[k][3] += thick[i] / p.Epsilon[i]
		}
	}
	var c1, c2 float64
	for i, k := range p.Shell {
		if !math.IsNaN(z[i]) {
			n := sums[k][0]
			c := math.Min(z[i], 6) - sums[k][1]/n
			c1 += c * thin[i] / p.Epsilon[i] / (sums[k][2] / n)
			c2 += c * thick[i] / p.Epsilon[i] / (sums[k][3] / n)
		}
	}
	return 1 - c2/c1
}

func newNormal(seed uint64) func() float64 {
	r := rand.New(rand.NewPCG(seed, 8))
	return r.NormFloat64
}
