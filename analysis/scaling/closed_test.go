package scaling

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// plainLeastSquares makes Estimate the weighted least squares of Hamilton,
// Rollett & Sparks (1965) and Fox & Holmes (1966): reported variances, normal law.
func plainLeastSquares(m Model) *Settings {
	return &Settings{Model: m, Weighting: WeightReported, Covariance: CovModel, TailDF: math.Inf(1), Tolerance: 1e-11, MaxIter: 500}
}

// sets lays complete sets out as an Input; sigma nil means 1 throughout.
func sets(values, sigma [][]float64) Input {
	in := Input{Positions: len(values)}
	for p, v := range values {
		for h, y := range v {
			s := 1.0
			if sigma != nil {
				s = sigma[p][h]
			}
			in.add(p, h, 0.01*float64(h+1), y, s*s)
		}
	}
	return in
}

func (in *Input) add(p, h int, s2, y, v float64) {
	in.S2 = append(in.S2, s2)
	in.I = append(in.I, y)
	in.Var = append(in.Var, v)
	in.Unique = append(in.Unique, int32(h))
	in.Raw = append(in.Raw, int32(h))
	in.Position = append(in.Position, int32(p))
}

func estimate(t *testing.T, in Input, set *Settings) *Fit {
	t.Helper()
	f, err := Estimate(context.Background(), in, set)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

var (
	setA = []float64{100, 50, 20, 10, 5}
	setB = []float64{210, 95, 43, 19, 11}
	setC = []float64{48, 26, 9.5, 5.4, 2.2}
)

// Own data; G and F from singular value decomposition and from the closed form
// of Deming's line through the origin, which agree to 1e-10.
func TestScaleFactorsClosedForm(t *testing.T) {
	saa, sbb, sab := 13025.0, 55456.0, 26855.0
	g2 := ((sbb - saa) + math.Sqrt((sbb-saa)*(sbb-saa)+4*sab*sab)) / (2 * sab)
	for _, c := range []struct {
		name     string
		in       Input
		g, f     []float64
		residual float64
		tol      float64
	}{
		{"two sets", sets([][]float64{setA, setB}, nil), []float64{1, 2.0644048364735},
			[]float64{101.396542704, 46.7748655695, 20.6716491191, 9.35497311389, 5.26599742434}, 16.40811650366, 1e-10},
		{"two sets, formula", sets([][]float64{setA, setB}, nil), []float64{1, g2}, nil, math.NaN(), 1e-12},
		{"three sets", sets([][]float64{setA, setB, setC}, nil), []float64{1, 2.0641732299857, 0.4874285249935},
			[]float64{101.279132368, 47.0627286476, 20.6223751468, 9.43027556838, 5.23393357582}, 29.2696323993, 1e-10},
	} {
		f := estimate(t, c.in, plainLeastSquares(Constant))
		if !f.Converged {
			t.Errorf("%s: not converged after %d rounds, shift %g", c.name, f.Iterations, f.LargestShift)
		}
		for p, g := range c.g {
			floatcmp.Check(t, c.name+": G", math.Exp(f.LnKMean[p]), g, 0, c.tol)
		}
		if c.f != nil {
			floatcmp.CheckSlice(t, c.name+": F", f.J, c.f, 0, 1e-9)
			rss := 0.0
			for i, y := range c.in.I {
				r := y - f.Scale[i]*f.J[c.in.Unique[i]]
				rss += r * r
			}
			floatcmp.Check(t, c.name+": residual", rss, c.residual, 0, 1e-9)
		}
	}
}

// Weighted; values from joint least squares and from the profile of
// (b - G a)^2/(sb^2 + G^2 sa^2), which agree; SE from the full covariance.
func TestScaleFactorWeighted(t *testing.T) {
	in := sets([][]float64{setA, setB}, [][]float64{{2, 1.5, 1, .8, .6}, {3, 2, 1.5, 1, .9}})
	f := estimate(t, in, plainLeastSquares(Constant))
	g := math.Exp(f.LnKMean[1])
	floatcmp.Check(t, "G", g, 2.0462314126, 1e-7, 0)
	floatcmp.Check(t, "SE of G", g*f.LnKMeanSE[1], 0.0385638135, 1e-7, 0)
	floatcmp.CheckSlice(t, "F", f.J, []float64{101.709210745, 47.4917745369, 20.6597249186, 9.47957208087, 5.24440192193}, 1e-7, 0)
	chi := 0.0
	for i, y := range in.I {
		r := y - f.Scale[i]*f.J[in.Unique[i]]
		chi += r * r / in.Var[i]
	}
	floatcmp.Check(t, "chi-square", chi, 6.6114166159, 1e-7, 0)
}

func TestIncompleteExactData(t *testing.T) {
	g := []float64{1, 2.5, .4}
	fs := []float64{100, 50, 20, 10, 5, 80}
	in := Input{Positions: 3}
	for _, o := range [][2]int{{0, 0}, {0, 1}, {0, 2}, {1, 1}, {1, 2}, {1, 3}, {1, 4}, {2, 0}, {2, 3}, {2, 4}, {2, 5}} {
		in.add(o[0], o[1], 0.01*float64(o[1]+1), g[o[0]]*fs[o[1]], 1)
	}
	for name, set := range map[string]*Settings{"plain": plainLeastSquares(Constant), "defaults": {Model: Constant, Tolerance: 1e-9, MaxIter: 200}} {
		f := estimate(t, in, set)
		for p := range g {
			floatcmp.Check(t, name+": G", math.Exp(f.LnKMean[p]), g[p], 0, 1e-9)
		}
		floatcmp.CheckSlice(t, name+": F", f.J, fs, 0, 1e-9)
	}
}

// I2 = k exp(-2 B s^2) I1 with k = 1.7, B = 3.2: closed form.
func TestScaleAndB(t *testing.T) {
	s2 := []float64{.01, .04, .09, .16, .25}
	i1 := []float64{1000, 800, 500, 300, 150}
	i2 := []float64{1594.60849920, 1052.83307756, 477.821078417, 183.169274977, 51.4836086121}
	in := Input{Positions: 2}
	for h := range s2 {
		exact := 1.7 * math.Exp(-2*3.2*s2[h]) * i1[h]
		floatcmp.Check(t, "printed I2", i2[h], exact, 0, 1e-7) // the last printed value is off by 7e-8
		in.add(0, h, s2[h], i1[h], 1)
		in.add(1, h, s2[h], exact, 1)
	}
	for _, m := range []Model{BOnly, Full} {
		f := estimate(t, in, plainLeastSquares(m))
		floatcmp.Check(t, "k", math.Exp(f.LnKMean[1]), 1.7, 0, 1e-10)
		floatcmp.Check(t, "B", f.B[1], 3.2, 0, 1e-10)
		floatcmp.Check(t, "B of the first", f.B[0], 0, 0, 0)
	}
}
