package pool

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/mat"

	"thinward/analysis/internal/floatcmp"
)

// Pearson's data with York's weights (Pearson 1901; York 1966; York et al. 2004,
// Am. J. Phys. 72, 367, Table II). Line and errors recomputed by the 2004
// iteration, by direct minimisation and by a root search to 40 digits.
func TestYorkPearson(t *testing.T) {
	x := []float64{0.0, 0.9, 1.8, 2.6, 3.3, 4.4, 5.2, 6.1, 6.5, 7.4}
	y := []float64{5.9, 5.4, 4.4, 4.6, 3.5, 3.7, 2.8, 2.8, 2.4, 1.5}
	wx := []float64{1000, 1000, 500, 800, 200, 80, 60, 20, 1.8, 1.0}
	wy := []float64{1, 1.8, 4, 8, 20, 20, 70, 70, 100, 500}
	sx, sy := make([]float64, 10), make([]float64, 10)
	for i := range wx {
		sx[i], sy[i] = 1/math.Sqrt(wx[i]), 1/math.Sqrt(wy[i])
	}
	l, err := York(x, y, sx, sy, 0)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		what           string
		got, want, tol float64
	}{
		{"intercept", l.Intercept, 5.479910224032865, 1e-10},
		{"slope", l.Slope, -0.480533407446202, 1e-10},
		{"chi^2", l.Chi2, 11.866353194061445, 1e-9},
		{"SE of the slope", l.SlopeSE, 0.05798500900, 1e-9},
		{"SE of the intercept", l.InterceptSE, 0.29497073549, 1e-9},
		{"covariance", l.Cov, -0.016472544658, 1e-9},
	} {
		floatcmp.Check(t, c.what, c.got, c.want, c.tol, 0)
	}
	zero := make([]float64, 10)
	l, err = York(x, y, zero, sy, 0)
	if err != nil {
		t.Fatal(err)
	}
	// Weighted least squares by the normal equations in numpy 1.24.
	floatcmp.Check(t, "intercept, x exact", l.Intercept, 6.10010932, 1e-8, 0)
	floatcmp.Check(t, "slope, x exact", l.Slope, -0.61081295658, 1e-9, 0)
	floatcmp.Check(t, "SE of intercept, x exact", l.InterceptSE, 0.20466268581, 1e-9, 0)
	floatcmp.Check(t, "SE of slope, x exact", l.SlopeSE, 0.03008744884, 1e-9, 0)
}

// With a diagonal covariance the slope is sum(xy/v)/sum(x^2/v) (Gauss), with a
// full one the two-point case is solved by hand.
func TestThroughOrigin(t *testing.T) {
	x, y := []float64{1, 2, 3}, []float64{1.1, 1.9, 3.2}
	v := []float64{0.01, 0.04, 0.09}
	l, err := ThroughOrigin(x, y, mat.NewDiagDense(3, v), nil, nil, 0)
	if err != nil {
		t.Fatal(err)
	}
	var a, b float64
	for i := range x {
		a += x[i] * y[i] / v[i]
		b += x[i] * x[i] / v[i]
	}
	floatcmp.Check(t, "slope", l.Slope, a/b, 0, 1e-13)
	floatcmp.Check(t, "SE", l.SlopeSE, 1/math.Sqrt(b), 0, 1e-13)
	full := mat.NewSymDense(2, []float64{1, 0.5, 0.5, 2})
	l, err = ThroughOrigin([]float64{1, 2}, []float64{1, 3}, full, nil, nil, 0)
	if err != nil {
		t.Fatal(err)
	}
	// C^-1 = [[2,-.5],[-.5,1]]/1.75: x'C^-1 y = (2-1.5-1+6)/1.75, x'C^-1 x = (2-1-1+4)/1.75.
	floatcmp.Check(t, "slope with covariance", l.Slope, 5.5/4, 0, 1e-13)
	floatcmp.Check(t, "SE with covariance", l.SlopeSE, math.Sqrt(1.75/4), 0, 1e-13)
	// An uncertainty of scale shared by all x adds slope^2 (s/x)^2 to the relative
	// variance: with exact points on a line the slope stays and its SE grows.
	l, err = ThroughOrigin([]float64{1, 2}, []float64{2, 4}, mat.NewDiagDense(2, []float64{1e-6, 1e-6}), nil, []float64{0.1, 0.2}, 0)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "slope with shared scale", l.Slope, 2, 0, 1e-9)
	floatcmp.Check(t, "SE with shared scale", l.SlopeSE, 0.2, 0, 1e-4)
}

func TestLinesRefuse(t *testing.T) {
	if _, err := ThroughOrigin([]float64{0}, []float64{1}, mat.NewDiagDense(1, []float64{1}), nil, nil, 0); err == nil {
		t.Error("a point at 0 alone gives no slope")
	}
	if _, err := ThroughOrigin([]float64{1}, []float64{math.NaN()}, mat.NewDiagDense(1, []float64{1}), nil, nil, 0); err == nil {
		t.Error("NaN must be refused")
	}
	if _, err := York([]float64{1, 1}, []float64{1, 2}, []float64{0, 0}, []float64{1, 1}, 0); err == nil {
		t.Error("one x gives no line")
	}
	if _, err := York([]float64{1, 2}, []float64{1, 2}, []float64{0, 0}, []float64{0, 1}, 0); err == nil {
		t.Error("a point without any error must be refused")
	}
}
