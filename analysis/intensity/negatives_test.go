package intensity

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

func sigmas(s *Scaled) []float64 {
	out := make([]float64, len(s.Var))
	for i, v := range s.Var {
		out[i] = math.Sqrt(v)
	}
	return out
}

func TestCountNegatives(t *testing.T) {
	cat, s := invented(t, 11, 0.1, 40, 0.5)
	n := CountNegatives(s.Unique, s.I, sigmas(s), cat, cat.Shells(15))
	if n.N != len(s.I) || n.Missing || len(n.Warnings) != 0 {
		t.Errorf("%+v", n)
	}
	for k := range n.Observed {
		floatcmp.Check(t, "below -k sigma", float64(n.Observed[k]), n.Expected[k], 4*math.Sqrt(n.Expected[k])+1, 0.03)
	}
}

func TestRemovedNegativesAreNoticed(t *testing.T) {
	cat, s := invented(t, 11, 0.1, 40, 0.5)
	var unique []int32
	var i, sigma []float64
	for o, x := range s.I {
		if x >= 0 {
			unique, i, sigma = append(unique, s.Unique[o]), append(i, x), append(sigma, math.Sqrt(s.Var[o]))
		}
	}
	n := CountNegatives(unique, i, sigma, cat, cat.Shells(15))
	if n.Observed[0] != 0 || !n.Missing || len(n.Warnings) != 1 || n.Warnings[0].Code != "negatives-missing" {
		t.Errorf("%+v", n)
	}
}

// Weak reflections that are filled leave few below zero, but fall off as noise does: nothing
// is removed. Near[0] is at least Near[1]^2/Near[2]/e for any intensities: a flat
// density gives .3156, .6844, .9252 (integrals of the normal distribution), one intensity of
// two sigma .1359, .3413, .3413 over one another.
func TestFilledWeakReflectionsAreNotRemovedOnes(t *testing.T) {
	cat, s := invented(t, 11, 0.1, 4, 0.5)
	sh := cat.Shells(15)
	filled := slices.Clone(s.I)
	mean, count := make([]float64, sh.N), make([]float64, sh.N)
	for o, u := range s.Unique {
		if k := sh.Of[u]; k >= 0 {
			mean[k] += s.I[o]
			count[k]++
		}
	}
	for o, u := range s.Unique {
		if k := sh.Of[u]; k >= 0 {
			filled[o] += 0.3 * mean[k] / count[k] * float64(cat.Epsilon[u])
		}
	}
	n := CountNegatives(s.Unique, filled, sigmas(s), cat, sh)
	if !n.Few || n.Missing || len(n.Warnings) != 0 {
		t.Errorf("%+v", n)
	}
	for _, c := range []struct {
		name string
		near [3]int
		want float64
		gone bool
	}{
		{"flat", [3]int{3156, 6844, 9252}, 6844 * 6844 / 9252.0 / math.E, false},
		{"flat, removed", [3]int{0, 6844, 9252}, 6844 * 6844 / 9252.0 / math.E, true},
		{"one intensity of two sigma", [3]int{214, 1359, 3413}, 1359 * 1359 / 3413.0 / math.E, false},
		{"nothing near zero", [3]int{0, 2, 12}, 4 / 12.0 / math.E, false},
	} {
		v := &Negatives{Near: c.near}
		if got := v.broken(); got != c.gone {
			t.Errorf("%s: removed %v", c.name, got)
		}
		floatcmp.Check(t, c.name, v.Least, c.want, 1e-12, 1e-12)
	}
}

func TestTailTable(t *testing.T) {
	for _, centric := range []bool{false, true} {
		table := newTailTable(centric)
		for _, ratio := range []float64{1e-7, 0.013, 0.77, 9, 1e6, math.Inf(1)} {
			r := math.Min(math.Max(ratio, math.Exp(tailFirst)), math.Exp(-tailFirst))
			for k, got := range table.at(ratio) {
				floatcmp.Check(t, "tail", got, WilsonNoisyBelow(-float64(k)*r, r, centric), 1e-4, 1e-3)
			}
		}
	}
}

func TestFindCuts(t *testing.T) {
	r := rand.New(rand.NewPCG(6, 6))
	c := &Columns{}
	for k := range 20000 {
		c.H, c.K, c.L = append(c.H, int16(k%200)), append(c.K, int16(k/200)), append(c.L, 1)
		c.I, c.Sigma = append(c.I, 30*r.ExpFloat64()+5*r.NormFloat64()), append(c.Sigma, 5)
	}
	if f := FindCuts(c); f.LowCut || f.Ceiling || len(f.Warnings) != 0 || f.AtHighest != 1 {
		t.Errorf("an honest list: %+v", f)
	}
	cut := keepRows(c, func(r int) bool { return c.I[r] >= 2*c.Sigma[r] })
	if f := FindCuts(cut); !f.LowCut || f.Warnings[0].Code != "cut-low" {
		t.Errorf("weak ones removed: %+v", f)
	} else {
		floatcmp.Check(t, "place of the cut", f.Lowest, 2, 0.01, 0)
	}
	zeroed := keepRows(c, func(int) bool { return true })
	for k, x := range zeroed.I {
		zeroed.I[k] = max(x, 0)
	}
	if f := FindCuts(zeroed); !f.LowCut {
		t.Errorf("negatives set to zero: %+v", f)
	}
	clipped := keepRows(c, func(int) bool { return true })
	for k, x := range clipped.I {
		clipped.I[k] = min(x, 150)
	}
	if f := FindCuts(clipped); !f.Ceiling || f.LowCut || f.Warnings[0].Code != "ceiling" {
		t.Errorf("strong ones clipped: %+v", f)
	}
	if f := FindCuts(&Columns{}); f.LowCut || f.Ceiling || !math.IsNaN(f.Lowest) {
		t.Errorf("no rows: %+v", f)
	}
}

func keepRows(c *Columns, keep func(int) bool) *Columns {
	out := &Columns{}
	for r := range c.I {
		if keep(r) {
			out.H, out.K, out.L = append(out.H, c.H[r]), append(out.K, c.K[r]), append(out.L, c.L[r])
			out.I, out.Sigma = append(out.I, c.I[r]), append(out.Sigma, c.Sigma[r])
		}
	}
	return out
}

func TestForbidden(t *testing.T) {
	g := lookup(t, "P 21 21 21")
	hkl, _, err := Possible(tarnCell, lookup(t, "P 2 2 2"), 0.06, false)
	if err != nil {
		t.Fatal(err)
	}
	r := rand.New(rand.NewPCG(7, 7))
	rows := &Columns{}
	for _, h := range hkl {
		j := 100.0
		if g.Absent(h) {
			j = 8
			if h.L != 0 {
				j = 3
			}
			j += 4 * r.NormFloat64()
		} else {
			j *= float64(g.Epsilon(h))
		}
		rows.H, rows.K, rows.L = append(rows.H, int16(h.H)), append(rows.K, int16(h.K)), append(rows.L, int16(h.L))
		rows.I, rows.Sigma = append(rows.I, j+r.NormFloat64()), append(rows.Sigma, 1)
	}
	cat, err := NewCatalogue(tarnCell, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	u, _ := cat.Assign(rows)
	s := &Scaled{Unique: u, Raw: cat.RawIDs(rows), I: rows.I, Var: slices.Repeat([]float64{1}, len(u))}
	m := Merge(cat.Len(), s)
	f := MeasureForbidden(m, cat, cat.Shells(4, m))
	if len(f) != 4 || f[0].Element != "all" || f[0].N != f[1].N+f[2].N+f[3].N {
		t.Fatalf("%+v", f)
	}
	for _, x := range f[1:] {
		want := 0.08
		if x.Element == "2_1 along c" {
			want = 0.03
		}
		floatcmp.Check(t, x.Element, x.Ratio, want, 4*x.SU+0.001, 0)
		floatcmp.Check(t, "z of "+x.Element, x.MeanZ, 100*want, 4*4.1/math.Sqrt(float64(x.N)), 0)
		floatcmp.Check(t, "su of "+x.Element, x.SU, 0.041/math.Sqrt(float64(x.N)), 0, 0.6)
	}
	none := MeasureForbidden(Merge(cat.Len(), &Scaled{}), cat, cat.Shells(4, m))
	if none[0].Why != "not recorded" || none[0].N != 0 || !math.IsNaN(none[0].Ratio) {
		t.Errorf("nothing measured: %+v", none[0])
	}
	plain, err := NewCatalogue(tarnCell, lookup(t, "P 1"), rows)
	if err != nil {
		t.Fatal(err)
	}
	free := MeasureForbidden(Merge(plain.Len(), &Scaled{}), plain, plain.Shells(4))
	if len(free) != 1 || free[0].Why != "the group forbids none" {
		t.Errorf("a group without: %+v", free)
	}
}
