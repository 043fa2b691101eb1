package intensity

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

// Own example; sums by hand: means 12, 105, 51; deviations 4, 10, 8; total 450.
func TestMeasureR(t *testing.T) {
	unique := []int32{1, 4, 1, 2, 2, 2, 1, 0, 0, 2}
	i := []float64{10, 30, 12, 50, 48, 52, 14, 100, 110, 54}
	r := MeasureR(unique, i)
	floatcmp.Check(t, "R_merge", r.Merge, 0.0488888889, 1e-10, 0)
	floatcmp.Check(t, "R_meas", r.Meas, 0.0628415987, 1e-10, 0)
	floatcmp.Check(t, "R_pim", r.Pim, 0.0387716206, 1e-10, 0)
	if r.Reflections != 3 || r.Observations != 9 {
		t.Errorf("counts %+v", r)
	}
	for k := range i {
		i[k] *= 7
	}
	scaled := MeasureR(unique, i)
	floatcmp.Check(t, "R_meas of scaled", scaled.Meas, r.Meas, 0, 1e-13)
	none := MeasureR([]int32{1, 2}, []float64{1, 2})
	floatcmp.Check(t, "no pair", none.Meas, math.NaN(), 0, 0)
}

// r = 28271/sqrt(29974 26834), R_split = 16/200/sqrt 2, by hand.
func TestHalfStatistics(t *testing.T) {
	x, y := []float64{10, 102, 49, math.NaN(), 31, 7}, []float64{13, 98, 53, 5, 28, 9}
	r, n := Correlate(x, y)
	floatcmp.Check(t, "CC1/2", r, 0.99684150315, 1e-11, 0)
	if n != 5 {
		t.Errorf("n = %d", n)
	}
	floatcmp.Check(t, "CC*", CCStar(r), 0.99920881381, 1e-11, 0)
	floatcmp.Check(t, "R_split", RSplit(x, y), 0.0565685425, 1e-10, 0)
	back, _ := Correlate(y, x)
	floatcmp.Check(t, "the other way", back, r, 1e-15, 0)
	flat, _ := Correlate([]float64{1, 1}, []float64{1, 2})
	floatcmp.Check(t, "no variation", flat, math.NaN(), 0, 0)
	floatcmp.Check(t, "nothing to divide by", RSplit([]float64{1}, []float64{-1}), math.NaN(), 0, 0)
}

// Formula of Karplus & Diederichs 2012; values to six digits.
func TestCCStar(t *testing.T) {
	for _, c := range [][2]float64{{.1, .426401}, {.143, .500219}, {.2, .577350}, {.3, .679366}, {.5, .816497}, {.7, .907485}, {.9, .973329}, {.99, .997484}} {
		floatcmp.Check(t, "CC*", CCStar(c[0]), c[1], 6e-7, 0)
	}
}

// 5745/5819, in fractions by hand.
func TestSigmaTau(t *testing.T) {
	unique := []int32{0, 0, 0, 0, 1, 1, 1, 1, 2, 2, 2, 2, 3, 3, 3, 3, 9}
	i := []float64{10, 12, 14, 12, 40, 44, 36, 40, 25, 27, 23, 29, 5, 3, 4, 8, 1000}
	cc, n := SigmaTau(unique, i)
	floatcmp.Check(t, "sigma-tau", cc, 5745./5819, 1e-13, 0)
	if n != 4 {
		t.Errorf("n = %d", n)
	}
	for k := range i {
		i[k] += 1e9
	}
	far, _ := SigmaTau(unique, i)
	floatcmp.Check(t, "sigma-tau far from zero", far, cc, 1e-9, 0)
	one, _ := SigmaTau([]int32{1, 1}, []float64{1, 2})
	floatcmp.Check(t, "one reflection", one, math.NaN(), 0, 0)
}

// The equivalents of what Possible lists, and the forbidden ones, fill the sphere.
func TestPossibleFillsTheSphere(t *testing.T) {
	for _, c := range []struct {
		symbol string
		cell   crystal.Cell
	}{
		{"P 1", crystal.Cell{A: 6, B: 7, C: 8, Alpha: 80, Beta: 95, Gamma: 103}},
		{"P 21 21 21", tarnCell},
		{"C 2/c", crystal.Cell{A: 14, B: 9, C: 11, Alpha: 90, Beta: 104, Gamma: 90}},
		{"P 61", crystal.Cell{A: 12, B: 12, C: 21, Alpha: 90, Beta: 90, Gamma: 120}},
	} {
		g := lookup(t, c.symbol)
		const limit = 0.05
		hkl, s2, err := Possible(c.cell, g, limit, false)
		if err != nil {
			t.Fatal(err)
		}
		got := 0
		for i, h := range hkl {
			got += g.Multiplicity(h)
			if g.Absent(h) || s2[i] > limit {
				t.Fatalf("%s lists %v", c.symbol, h)
			}
		}
		all, absent := sphere(c.cell, g, limit)
		if got != all-absent || got == 0 {
			t.Errorf("%s: equivalents of the possible ones are %d of %d allowed", c.symbol, got, all-absent)
		}
		apart, _, err := Possible(c.cell, g, limit, true)
		if err != nil || len(apart) < len(hkl) {
			t.Errorf("%s: %d with mates apart, %d together, %v", c.symbol, len(apart), len(hkl), err)
		}
	}
	if _, _, err := Possible(tarnCell, lookup(t, "P 1"), 1e6, false); err == nil {
		t.Error("an endless sphere is accepted")
	}
	if _, _, err := Possible(tarnCell, lookup(t, "P 1"), math.NaN(), false); err == nil {
		t.Error("a limit that is no number is accepted")
	}
}

func sphere(cell crystal.Cell, g *crystal.Group, limit float64) (all, absent int) {
	const reach = 40
	for h := -reach; h <= reach; h++ {
		for k := -reach; k <= reach; k++ {
			for l := -reach; l <= reach; l++ {
				x := crystal.HKL{H: h, K: k, L: l}
				if s := cell.InvD2(x) / 4; s > 0 && s <= limit {
					all++
					if g.Absent(x) {
						absent++
					}
				}
			}
		}
	}
	return all, absent
}

// invented returns a position with Wilson intensities of both kinds, falling
// off with s^2, noise of the given sd, and up to four raw indices a reflection
// of which a share is measured.
func invented(t testing.TB, seed uint64, limit, noise, share float64) (*Catalogue, *Scaled) {
	t.Helper()
	g := lookup(t, "P 21 21 21")
	r := rand.New(rand.NewPCG(seed, 77))
	hkl, _, err := Possible(tarnCell, g, limit, false)
	if err != nil {
		t.Fatal(err)
	}
	rows := &Columns{}
	for _, h := range hkl {
		j := r.ExpFloat64()
		if g.Centric(h) {
			x := r.NormFloat64()
			j = x * x
		}
		j *= 100 * float64(g.Epsilon(h)) * math.Exp(-20*tarnCell.InvD2(h)/4)
		for k, e := range g.Equivalents(h) {
			if k < 4 && r.Float64() < share {
				rows.H, rows.K, rows.L = append(rows.H, int16(e.H)), append(rows.K, int16(e.K)), append(rows.L, int16(e.L))
				rows.I, rows.Sigma = append(rows.I, j+noise*r.NormFloat64()), append(rows.Sigma, noise)
			}
		}
	}
	cat, err := NewCatalogue(tarnCell, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	u, err := cat.Assign(rows)
	if err != nil {
		t.Fatal(err)
	}
	s := &Scaled{Unique: u, Raw: cat.RawIDs(rows), I: rows.I, Var: make([]float64, len(u))}
	for o := range s.Var {
		s.Var[o] = noise * noise
	}
	return cat, s
}

func TestPrecise(t *testing.T) {
	cat, s := invented(t, 1, 0.06, 20, 0.6)
	shells, all, err := Precise(context.Background(), s, cat, &PrecisionSettings{Shells: 5, Key: 3})
	if err != nil {
		t.Fatal(err)
	}
	possible, _, _ := Possible(tarnCell, cat.Group, 0.06, false)
	sum := Precision{}
	for _, p := range shells {
		sum.Observations += p.Observations
		sum.Unique += p.Unique
		sum.Possible += p.Possible
	}
	if sum.Observations != len(s.I) || all.Observations != len(s.I) || sum.Unique != cat.Len() || all.Unique != cat.Len() || sum.Possible != all.Possible {
		t.Errorf("shells sum to %+v, all %+v", sum, *all)
	}
	if d := len(possible) - all.Possible; d < 0 || d > 3 {
		t.Errorf("%d possible within the measured range, %d to the limit", all.Possible, len(possible))
	}
	floatcmp.Check(t, "completeness", all.Completeness, float64(cat.Len())/float64(all.Possible), 0, 1e-14)
	floatcmp.Check(t, "multiplicity", all.Multiplicity, float64(len(s.I))/float64(cat.Len()), 0, 1e-14)
	floatcmp.Check(t, "R_meas", all.R.Meas, MeasureR(s.Unique, s.I).Meas, 0, 1e-12)
	// The two forms differ: the split leaves out single indices and is one draw of many.
	floatcmp.Check(t, "both forms of CC1/2", all.CCHalf, all.CCHalfTau, 0.05, 0)
	if !(shells[0].CCHalf > shells[4].CCHalf && shells[0].IOverSigma > shells[4].IOverSigma && shells[0].DLong > shells[4].DLong) {
		t.Error("precision does not fall with resolution though the intensities do")
	}
	fine, _, err := Precise(context.Background(), s, cat, &PrecisionSettings{Shells: 5, Key: 3, DMin: 1.9})
	if err != nil || !(fine[4].Completeness < shells[4].Completeness) {
		t.Errorf("a finer limit leaves the completeness of the last shell at %g, %v", fine[4].Completeness, err)
	}
}

// With n observations of variance v over a law of variance V the expected CC1/2
// of halves of n/2 is V/(V + 2v/n), by hand.
func TestPreciseAgainstExpectation(t *testing.T) {
	g := lookup(t, "P 1")
	r := rand.New(rand.NewPCG(4, 4))
	rows := &Columns{}
	for h := 1; h <= 4000; h++ {
		j := r.ExpFloat64()
		for range 8 {
			rows.H, rows.K, rows.L = append(rows.H, int16(h%63+1)), append(rows.K, int16(h/63)), append(rows.L, 1)
			rows.I, rows.Sigma = append(rows.I, j+r.NormFloat64()), append(rows.Sigma, 1)
		}
	}
	cat, err := NewCatalogue(crystal.Cell{A: 30, B: 31, C: 32, Alpha: 90, Beta: 90, Gamma: 90}, g, rows)
	if err != nil {
		t.Fatal(err)
	}
	u, _ := cat.Assign(rows)
	cc, _ := SigmaTau(u, rows.I)
	floatcmp.Check(t, "sigma-tau against 1/(1 + 1/4)", cc, 0.8, 0.02, 0)
}

func TestPreciseEmpty(t *testing.T) {
	cat, err := NewCatalogue(tarnCell, lookup(t, "P 1"))
	if err != nil {
		t.Fatal(err)
	}
	shells, all, err := Precise(context.Background(), &Scaled{}, cat, nil)
	if err != nil || len(shells) != 0 || all.Observations != 0 {
		t.Errorf("%v, %+v, %v", shells, all, err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, _, err = Precise(ctx, &Scaled{}, cat, nil); err == nil {
		t.Error("a cancelled context is ignored")
	}
}
