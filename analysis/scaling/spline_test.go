package scaling

import (
	"math/rand/v2"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// coxDeBoor is the general recursion (de Boor 1978, ch. X eq. 5), the oracle for
// the uniform basis; it is itself held to values from two other programs.
func coxDeBoor(knots []float64, i, k int, x float64) float64 {
	if k == 0 {
		if knots[i] <= x && x < knots[i+1] {
			return 1
		}
		return 0
	}
	sum := 0.0
	if d := knots[i+k] - knots[i]; d > 0 {
		sum += (x - knots[i]) / d * coxDeBoor(knots, i, k-1, x)
	}
	if d := knots[i+k+1] - knots[i+1]; d > 0 {
		sum += (knots[i+k+1] - x) / d * coxDeBoor(knots, i+1, k-1, x)
	}
	return sum
}

// Values: scipy and R splines::bs agree on them to 1e-10.
func TestOracleOnClampedKnots(t *testing.T) {
	knots := []float64{0, 0, 0, 0, 1, 2, 3.5, 5, 5, 5, 5}
	for _, c := range []struct {
		x    float64
		want []float64
		tol  float64
	}{
		{.25, []float64{.421875, .49609375, .0797991071429, .00223214285714, 0, 0, 0}, 1e-10},
		{1, []float64{0, .25, .607142857143, .142857142857, 0, 0, 0}, 1e-10},
		{1.7, []float64{0, .00675, .428592857143, .530357142857, .0343, 0, 0}, 1e-10},
		{3.5, []float64{0, 0, 0, .1875, .5625, .25, 0}, 1e-10},
		{4.2, []float64{0, 0, 0, .0284444444444, .284444444444, .585481481481, .101629629630}, 1e-10},
	} {
		for i, w := range c.want {
			floatcmp.Check(t, "clamped basis", coxDeBoor(knots, i, 3, c.x), w, c.tol, 0)
		}
	}
}

func TestUniformBasisClosedForm(t *testing.T) {
	for _, c := range []struct {
		u    float64
		want [4]float64
		tol  float64
	}{
		{0, [4]float64{1. / 6, 2. / 3, 1. / 6, 0}, 1e-15},
		{1, [4]float64{0, 1. / 6, 2. / 3, 1. / 6}, 1e-15},
		{0.5, [4]float64{1. / 48, 23. / 48, 23. / 48, 1. / 48}, 1e-15},
	} {
		b0, b1, b2, b3 := cubicBasis(c.u)
		floatcmp.CheckSlice(t, "uniform basis", []float64{b0, b1, b2, b3}, c.want[:], c.tol, 0)
	}
}

func TestUniformBasisAgainstOracle(t *testing.T) {
	a := newSplineAxis(-61.3, 58.9, 10)
	if a.cells != 12 {
		t.Fatalf("%d intervals of about 10 degrees in 120.2", a.cells)
	}
	knots := make([]float64, a.cells+7)
	for i := range knots {
		knots[i] = a.lo + float64(i-3)*a.step
	}
	rng := rand.New(rand.NewPCG(1, 2))
	for range 200 {
		x := -61.3 + 120.2*rng.Float64()
		cell, u := a.locate(x)
		b0, b1, b2, b3 := cubicBasis(u)
		got := make([]float64, a.functions())
		copy(got[cell:], []float64{b0, b1, b2, b3})
		sum := 0.0
		for i := range got {
			floatcmp.Check(t, "basis", got[i], coxDeBoor(knots, i, 3, x), 1e-12, 0)
			sum += got[i]
		}
		floatcmp.Check(t, "sum", sum, 1, 1e-14, 0)
	}
}

func TestLocateBeyondTheEnds(t *testing.T) {
	a := newSplineAxis(0, 30, 10)
	for _, c := range []struct {
		x    float64
		cell int
		u    float64
	}{{-5, 0, 0}, {0, 0, 0}, {30, 2, 1}, {99, 2, 1}, {15, 1, 0.5}} {
		cell, u := a.locate(c.x)
		if cell != c.cell {
			t.Errorf("locate(%g): interval %d, want %d", c.x, cell, c.cell)
		}
		floatcmp.Check(t, "place", u, c.u, 1e-15, 0)
	}
}
