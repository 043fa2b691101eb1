package pool

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/floatcmp"
)

// The ends of the intervals on the BCG trials (Colditz et al. 1994), by metafor 3.8: t = -3.952 of
// Knapp and Hartung has p = 0.00192076677 with 12 degrees of freedom, so that the
// interval at the level 1 - p ends at 0; z of the fixed effect is -10.624652501.
func TestJoinBCGIntervals(t *testing.T) {
	const p = 0.00192076677
	e, err := Join(bcgY, roots(bcgV), 1-p)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "upper end at the level of its p", e.RandomHi, 0, 1e-8, 0)
	floatcmp.Check(t, "lower end at the level of its p", e.RandomLo, 2*e.Random, 1e-8, 0)
	e, err = Join(bcgY, roots(bcgV), 0)
	if err != nil {
		t.Fatal(err)
	}
	const z = 1.95996398454 // R qnorm(0.975)
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"z of the fixed effect", e.Fixed / e.FixedSE, -10.624652501, 1e-7},
		{"fixed effect from", e.FixedLo, -0.430285163654 - z*0.0404987517109, 1e-8},
		{"fixed effect to", e.FixedHi, -0.430285163654 + z*0.0404987517109, 1e-8},
		{"DerSimonian-Laird from", e.Random - z*e.NormalSE, -1.06444528008, 1e-8},
		{"DerSimonian-Laird to", e.Random + z*e.NormalSE, -0.363789164062, 1e-8},
		{"H^2", e.Q / 12, 12.6860840069, 1e-8},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
	// The random mean at the tau^2 that metafor prints for Paule and Mandel.
	floatcmp.Check(t, "Paule-Mandel mean", weightedMean(bcgY, roots(bcgV), 0.318093711863), -0.714970405632, 1e-8, 0)
}

// Three estimates with equal errors: the mean's Hartung-Knapp interval is Student's of a
// plain mean, with 2 degrees of freedom (t.975 = 4.30265272991, R qt).
func TestJoinOfThreeIsStudents(t *testing.T) {
	e, err := Join([]float64{0.1, 0.2, 0.6}, []float64{0.05, 0.05, 0.05}, 0)
	if err != nil {
		t.Fatal(err)
	}
	half := 4.30265272991 * math.Sqrt((0.04+0.01+0.09)/2/3) // s/sqrt(n)
	floatcmp.Check(t, "from", e.RandomLo, 0.3-half, 1e-9, 0)
	floatcmp.Check(t, "to", e.RandomHi, 0.3+half, 1e-9, 0)
	floatcmp.Check(t, "p of Q", e.QP, distuv.ChiSquared{K: 2}.Survival(0.14/0.0025), 0, 1e-12)
}

// Three that agree closer than their errors allow: Student's interval of three would be
// 4.303 0.001/sqrt(3) wide to a side; the errors that they claim give 4.303 0.05/sqrt(3).
// Where they disagree both are the same. The quantile is that of printed tables, 4.30265.
func TestJoinOfThreeThatAgree(t *testing.T) {
	for _, c := range []struct {
		name       string
		y          []float64
		plain, use float64
	}{
		{"agree", []float64{0.299, 0.3, 0.301}, 0.001, 0.05},
		{"disagree", []float64{0.2, 0.3, 0.4}, 0.1, 0.1},
	} {
		e, err := Join(c.y, []float64{0.05, 0.05, 0.05}, 0)
		if err != nil {
			t.Fatal(err)
		}
		const q = 4.30265272991
		floatcmp.Check(t, c.name+": Hartung and Knapp", e.RandomHi-0.3, q*c.plain/math.Sqrt(3), 1e-9, 0)
		floatcmp.Check(t, c.name+": from", e.LikeLo, 0.3-q*c.use/math.Sqrt(3), 1e-9, 0)
		floatcmp.Check(t, c.name+": to", e.LikeHi, 0.3+q*c.use/math.Sqrt(3), 1e-9, 0)
	}
}
