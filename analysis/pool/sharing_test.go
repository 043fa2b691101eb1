package pool

import (
	"testing"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/internal/floatcmp"
)

// What estimates have in common: the best linear mean under the whole covariance matrix
// (Aitken 1935, Proc. R. Soc. Edinb. 55:42; gonum's solver), and Q from differences, which do not
// know of it.
func TestJoinSharing(t *testing.T) {
	y, se := []float64{0.081, 0.093, 0.086, 0.11}, []float64{0.0145, 0.0152, 0.0146, 0.03}
	const shared = 0.009
	n := len(y)
	v := mat.NewSymDense(n, nil)
	for i := range n {
		for j := range i + 1 {
			v.SetSym(i, j, shared*shared)
		}
		v.SetSym(i, i, se[i]*se[i])
	}
	one := mat.NewVecDense(n, []float64{1, 1, 1, 1})
	var ch mat.Cholesky
	if !ch.Factorize(v) {
		t.Fatal("not positive definite")
	}
	var w, vy mat.VecDense
	if err := ch.SolveVecTo(&w, one); err != nil {
		t.Fatal(err)
	}
	information := mat.Dot(one, &w)
	mean := mat.Dot(&w, mat.NewVecDense(n, y)) / information
	r := make([]float64, n)
	for i := range r {
		r[i] = y[i] - mean
	}
	if err := ch.SolveVecTo(&vy, mat.NewVecDense(n, r)); err != nil {
		t.Fatal(err)
	}
	e, err := JoinSharing(y, se, shared, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "mean", e.Fixed, mean, 1e-12, 0)
	floatcmp.Check(t, "error", e.FixedSE*e.FixedSE, 1/information, 0, 1e-9)
	floatcmp.Check(t, "Q", e.Q, mat.Dot(mat.NewVecDense(n, r), &vy), 1e-9, 0)
	none, err := JoinSharing(y, se, 0, 0)
	if err != nil {
		t.Fatal(err)
	}
	plain, err := Join(y, se, 0)
	if err != nil {
		t.Fatal(err)
	}
	if *none != *plain || !(none.FixedSE < e.FixedSE) || !(none.LikeHi-none.LikeLo < e.LikeHi-e.LikeLo) {
		t.Errorf("%+v, %+v, %+v", none, plain, e)
	}
	one1, err := JoinSharing(y[:1], se[:1], shared, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "one estimate", one1.FixedSE, se[0], 1e-15, 0)
	for _, bad := range []float64{-0.001, 0.0145} {
		if _, err := JoinSharing(y, se, bad, 0); err == nil {
			t.Errorf("a shared error of %g passes", bad)
		}
	}
}
