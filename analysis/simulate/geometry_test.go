package simulate

import (
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/electron"
	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

func TestReciprocalBasisGivesD(t *testing.T) {
	// Low albite: d of 20-1, 130, 2-13.
	cell := crystal.Cell{A: 8.144, B: 12.787, C: 7.160, Alpha: 94.26, Beta: 116.6, Gamma: 87.67}
	m := reciprocalBasis(cell)
	for _, c := range []struct {
		h   [3]float64
		d   float64
		rel float64
	}{{[3]float64{2, 0, -1}, 4.0304441, 1e-7}, {[3]float64{1, 3, 0}, 3.6841418, 1e-7}, {[3]float64{2, -1, 3}, 1.5562642, 1e-7}} {
		v := times(m, c.h)
		floatcmp.Check(t, "d", 1/math.Sqrt(v[0]*v[0]+v[1]*v[1]+v[2]*v[2]), c.d, 0, c.rel)
	}
}

func TestRotationsKeepLengthAndHand(t *testing.T) {
	r := resample.NewSeed(3).Stream(0)
	for _, m := range [][3][3]float64{
		eulerRotation([]float64{10, 77, -130}),
		quaternionRotation(r.Normal(), r.Normal(), r.Normal(), r.Normal()),
		smallRotation([3]float64{0.3, -0.2, 1.1}),
		smallRotation([3]float64{}),
	} {
		for i := range 3 {
			for j := range 3 {
				dot, want := 0.0, 0.0
				for k := range 3 {
					dot += m[i][k] * m[j][k]
				}
				if i == j {
					want = 1
				}
				floatcmp.Check(t, "rows", dot, want, 1e-14, 0)
			}
		}
		det := 0.0
		for i := range 3 {
			j, k := (i+1)%3, (i+2)%3
			det += m[0][i] * (m[1][j]*m[2][k] - m[1][k]*m[2][j])
		}
		floatcmp.Check(t, "determinant", det, 1, 1e-14, 0)
	}
	// A quarter turn about the first axis by Euler angles takes y to z.
	floatcmp.CheckSlice(t, "quarter turn", sliceOf(times(eulerRotation([]float64{0, 90, 0}), [3]float64{0, 1, 0})), []float64{0, 0, 1}, 1e-15, 0)
	// A rotation vector along z of 90 degrees takes x to y.
	floatcmp.CheckSlice(t, "rotation vector", sliceOf(times(smallRotation([3]float64{0, 0, 90}), [3]float64{1, 0, 0})), []float64{0, 1, 0}, 1e-15, 0)
}

func sliceOf(v [3]float64) []float64 { return v[:] }

func TestCrossingsLieOnTheSphere(t *testing.T) {
	cell := crystal.Cell{A: 8.144, B: 12.787, C: 7.160, Alpha: 94.26, Beta: 116.6, Gamma: 87.67}
	g := Geometry{Wavelength: electron.Wavelength(200), Reciprocal: reciprocalBasis(cell), Orientation: eulerRotation([]float64{20, 35, 80})}
	k := 1 / g.Wavelength
	found := 0
	for h := -6; h <= 6; h++ {
		for l := -6; l <= 6; l++ {
			hkl := crystal.HKL{H: h, K: 2, L: l}
			phi, n := g.Crossings(hkl)
			if n == 0 {
				continue
			}
			if !(phi[0] <= phi[1] && phi[0] >= -180 && phi[1] <= 180) {
				t.Errorf("%v crosses at %v", hkl, phi)
			}
			for _, p := range phi[:n] {
				found++
				v := g.At(hkl, p)
				floatcmp.Check(t, "|k+g|", math.Sqrt(v[0]*v[0]+v[1]*v[1]+(k+v[2])*(k+v[2])), k, 1e-9, 0)
				// The Lorentz factor against a numerical derivative.
				const step = 1e-4
				up, down := g.At(hkl, p+step), g.At(hkl, p-step)
				speed := math.Abs(up[2]-down[2]) / (2 * step * math.Pi / 180)
				length := math.Sqrt(cell.InvD2(hkl))
				floatcmp.Check(t, "Lorentz", g.Lorentz(hkl, p), length/speed, 0, 1e-6)
			}
		}
	}
	if found < 200 {
		t.Errorf("only %d crossings", found)
	}
	if _, n := g.Crossings(crystal.HKL{}); n != 0 {
		t.Error("0 0 0 crosses")
	}
}

func TestIndexAlongTheAxisNeverCrosses(t *testing.T) {
	cell := crystal.Cell{A: 10, B: 10, C: 10, Alpha: 90, Beta: 90, Gamma: 90}
	g := Geometry{Wavelength: electron.Wavelength(200), Reciprocal: reciprocalBasis(cell), Orientation: eulerRotation([]float64{0, 0, 0})}
	if _, n := g.Crossings(crystal.HKL{H: 3}); n != 0 {
		t.Error("an index on the rotation axis crosses")
	}
	if _, n := g.Crossings(crystal.HKL{L: 3}); n != 2 {
		t.Error("an index across the axis does not cross twice")
	}
}
