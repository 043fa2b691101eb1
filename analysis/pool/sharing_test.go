package pool

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/internal/floatcmp"
)

// shared is the covariance of estimates with standard errors se that have one of common in
// common.
func shared(se []float64, common float64) *mat.SymDense {
	c := mat.NewSymDense(len(se), nil)
	for i, s := range se {
		for j := range i {
			c.SetSym(i, j, common*common)
		}
		c.SetSym(i, i, s*s)
	}
	return c
}

// Where errors are alike the mean is the best linear one under the whole covariance matrix
// (Aitken 1935, Proc. R. Soc. Edinb. 55:42; gonum's solver), and Q and tau^2 are those of the errors
// less what they share.
func TestJoinCovariantOfEqualErrors(t *testing.T) {
	y, se := []float64{0.081, 0.093, 0.086, 0.14}, []float64{0.015, 0.015, 0.015, 0.015}
	const common = 0.009
	c := shared(se, common)
	one, w := mat.NewVecDense(4, []float64{1, 1, 1, 1}), mat.VecDense{}
	var ch mat.Cholesky
	if !ch.Factorize(c) {
		t.Fatal("not positive definite")
	}
	if err := ch.SolveVecTo(&w, one); err != nil {
		t.Fatal(err)
	}
	information := mat.Dot(one, &w)
	e, err := JoinCovariant(y, c, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "mean", e.Fixed, mat.Dot(&w, mat.NewVecDense(4, y))/information, 1e-12, 0)
	floatcmp.Check(t, "error", e.FixedSE*e.FixedSE, 1/information, 0, 1e-9)
	floatcmp.Check(t, "shared part", e.SharedSE*e.SharedSE, 0.75*common*common, 0, 1e-9)
	const own = 0.012 // 0.015^2 - 0.009^2
	alone, err := Join(y, []float64{own, own, own, own}, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "p of Q", e.QP, alone.QP, 1e-12, 0)
	floatcmp.Check(t, "tau^2", e.Tau2, alone.Tau2, 1e-12, 0)
	floatcmp.Check(t, "I^2", e.I2, alone.I2, 1e-12, 0)
	floatcmp.Check(t, "error of Hartung and Knapp", e.RandomSE*e.RandomSE, alone.RandomSE*alone.RandomSE+common*common, 0, 1e-9)
	floatcmp.Check(t, "plain error", e.NormalSE*e.NormalSE, alone.NormalSE*alone.NormalSE+common*common, 0, 1e-9)
}

// With nothing shared it is Join, and one estimate keeps its error.
func TestJoinCovariantWithoutCovariance(t *testing.T) {
	y, se := []float64{0.081, 0.093, 0.086, 0.11}, []float64{0.0145, 0.0152, 0.0146, 0.03}
	e, err := JoinCovariant(y, shared(se, 0), 0)
	if err != nil {
		t.Fatal(err)
	}
	plain, err := Join(y, se, 0)
	if err != nil {
		t.Fatal(err)
	}
	if *e != *plain || e.SharedSE != 0 {
		t.Errorf("%+v, %+v", e, plain)
	}
	one, err := JoinCovariant(y[:1], shared(se[:1], 0.01), 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "one estimate", one.FixedSE, se[0], 1e-15, 0)
	for name, bad := range map[string]*mat.SymDense{"size": shared(se[:3], 0), "all shared": shared([]float64{1, 1, 1, 1}, 1)} {
		if _, err := JoinCovariant(y, bad, 0); err == nil {
			t.Errorf("%s passes", name)
		}
	}
}

// Three estimates with unequal errors of which most is common: their intervals hold the truth in
// 95 % of draws, those that take them as independent do not. Three standard errors of 4000
// draws are 0.010.
func TestJoinCovariantCovers(t *testing.T) {
	se := []float64{0.01, 0.012, 0.02}
	const common = 0.008
	c := shared(se, common)
	g := rand.New(rand.NewPCG(5, 6))
	var fixed, like, independent float64
	const n = 4000
	for range n {
		y := make([]float64, 3)
		all := common * g.NormFloat64()
		for i, s := range se {
			y[i] = all + g.NormFloat64()*math.Sqrt(s*s-common*common)
		}
		e, err := JoinCovariant(y, c, 0)
		if err != nil {
			t.Fatal(err)
		}
		plain, err := Join(y, se, 0)
		if err != nil {
			t.Fatal(err)
		}
		count := func(n *float64, lo, hi float64) {
			if lo <= 0 && hi >= 0 {
				*n++
			}
		}
		count(&fixed, e.FixedLo, e.FixedHi)
		count(&like, e.LikeLo, e.LikeHi)
		count(&independent, plain.FixedLo, plain.FixedHi)
	}
	floatcmp.Check(t, "in these", fixed/n, 0.95, 0.010, 0)
	if like/n < 0.94 || independent/n > 0.87 {
		t.Errorf("in others like these %.3f, taken as independent %.3f", like/n, independent/n)
	}
}
