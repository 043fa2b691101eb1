package evidence

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// moments of the density by quadrature in F = sqrt(x), whose element 2F dF takes
// away the pole of the centric law.
func densityMean(j, v, local float64, centric bool) (mean, square float64) {
	top := math.Sqrt(math.Max(j, 0) + 12*math.Sqrt(v))
	weight := func(f float64) float64 {
		x := f * f
		w := math.Exp(-(j-x)*(j-x)/(2*v) + j*j/(2*v)*b2f(j < 0))
		if centric {
			return w * math.Exp(-x/(2*local))
		}
		return w * math.Exp(-x/local) * f
	}
	n := 2000
	norm := quad.Fixed(weight, 0, top, n, quad.Legendre{}, 1)
	mean = quad.Fixed(func(f float64) float64 { return f * f * weight(f) }, 0, top, n, quad.Legendre{}, 1) / norm
	square = quad.Fixed(func(f float64) float64 { return f * f * f * f * weight(f) }, 0, top, n, quad.Legendre{}, 1) / norm
	return mean, square
}

func b2f(b bool) float64 {
	if b {
		return 1
	}
	return 0
}

// French & Wilson's densities: means and second moments of draws against
// quadrature.
func TestShrunk(t *testing.T) {
	for _, c := range []struct{ j, sd, local float64 }{
		{1, 0.3, 1}, {0.1, 0.3, 1}, {-0.5, 0.3, 1}, {-2, 0.3, 0.5}, {8, 0.4, 1}, {0, 5, 1}, {30, 1, 2},
	} {
		for _, centric := range []bool{false, true} {
			s, err := NewShrunk([]float64{c.j}, []float64{c.sd * c.sd}, []float64{c.local}, []bool{centric})
			if err != nil {
				t.Fatal(err)
			}
			mean, square := densityMean(c.j, c.sd*c.sd, c.local, centric)
			floatcmp.Check(t, "mean", s.Mean(0), mean, 0.002*c.sd, 0.01)
			r := resample.NewSeed(3).Stream(0)
			const n = 40000
			m, q := 0.0, 0.0
			for range n {
				x := s.Draw(0, r)
				if x < 0 || math.IsNaN(x) {
					t.Fatalf("drew %g", x)
				}
				m += x / n
				q += x * x / n
			}
			sd := math.Sqrt(square - mean*mean)
			floatcmp.Check(t, "mean of draws", m, mean, 4*sd/math.Sqrt(n)+0.003*sd, 0)
			floatcmp.Check(t, "second moment of draws", q, square, 0, 0.06)
		}
	}
}

// Where nothing is known beyond the law, draws follow it: mean Local, second moment
// 2 (acentric) or 3 (centric) times its square (Wilson 1949).
func TestShrunkFallsBackToTheLaw(t *testing.T) {
	for _, centric := range []bool{false, true} {
		s, err := NewShrunk([]float64{1}, []float64{1e6}, []float64{2}, []bool{centric})
		if err != nil {
			t.Fatal(err)
		}
		r := resample.NewSeed(4).Stream(0)
		const n = 100000
		m, q := 0.0, 0.0
		for range n {
			x := s.Draw(0, r)
			m += x / n
			q += x * x / n
		}
		want := 2.0
		if centric {
			want = 3
		}
		floatcmp.Check(t, "mean", m, 2, 0, 0.02)
		floatcmp.Check(t, "second moment", q/(m*m), want, 0, 0.05)
	}
}

func TestShrunkRefuses(t *testing.T) {
	for name, c := range map[string][3]float64{"intensity": {math.NaN(), 1, 1}, "variance": {1, 0, 1}, "local mean": {1, 1, 0}} {
		if _, err := NewShrunk([]float64{c[0]}, []float64{c[1]}, []float64{c[2]}, nil); err == nil {
			t.Errorf("a bad %s passed", name)
		}
	}
}
