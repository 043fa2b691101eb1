package electron

import (
	"context"
	"fmt"
	"math"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

func sweepOf(st *Structure, nm ...float64) *Sweep {
	return &Sweep{EnergyKeV: 200, Reciprocal: reciprocal(st.Cell), Orientation: tilted(), TiltDeg: [2]float64{-12, 14}, ThicknessNM: nm}
}

func TestCurrentsAddUp(t *testing.T) {
	for _, symbol := range []string{"P 21 21 21", "P -1"} {
		st := small(t, symbol)
		r := rotate(t, st, sweepOf(st, 20, 300), &BeamSettings{DMin: 1.2, StepDeg: 0.5})
		floatcmp.Check(t, symbol+" unitarity", r.Unitarity, 0, 1e-10, 0)
		if !(r.MeanBeams > 10) || len(r.HKL) < 40 {
			t.Errorf("%s: %g beams, %d reflections", symbol, r.MeanBeams, len(r.HKL))
		}
	}
}

// TestThinLimit: the deviation from kinematic intensities vanishes with the thickness, with its
// square where there is a centre of symmetry.
func TestThinLimit(t *testing.T) {
	for _, symbol := range []string{"P 21 21 21", "P -1"} {
		st := small(t, symbol)
		r := rotate(t, st, sweepOf(st, 0.01, 0.05, 0.25), &BeamSettings{DMin: 1.2, StepDeg: 0.1, Excitation: 0.03})
		mean := 0.0
		for _, f := range r.Kinematic {
			mean += f / float64(len(r.Kinematic))
		}
		var worst [3]float64
		for k := range worst {
			for i, f := range r.Kinematic {
				worst[k] = math.Max(worst[k], math.Abs(r.Dynamical[k][i]-f)/mean)
			}
		}
		floatcmp.Check(t, symbol+" limit", worst[0], 0, 1e-3, 0)
		t.Logf("%s: largest deviation over the mean %.2g, %.2g, %.2g at 0.01, 0.05, 0.25 nm", symbol, worst[0], worst[1], worst[2])
		least := 4.5
		if st.Group.Centrosymmetric() {
			least = 15
		}
		if !(worst[2] > least*worst[1] && worst[1] > least*worst[0]) {
			t.Errorf("%s: deviations %v, each wanted %g times the one before", symbol, worst, least)
		}
	}
}

// TestBlackmanIntegral turns one reflection through the sphere: two beams, integrated.
func TestBlackmanIntegral(t *testing.T) {
	st := invented(t, "P 1", crystal.Cell{A: 3, B: 3, C: 3, Alpha: 90, Beta: 90, Gamma: 90}, 1)
	st.B = 0
	for _, nm := range []float64{20, 60, 120} {
		sw := &Sweep{EnergyKeV: 200, Reciprocal: reciprocal(st.Cell), Orientation: [3][3]float64{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, TiltDeg: [2]float64{-8, 8}, ThicknessNM: []float64{nm}}
		set := (&BeamSettings{DMin: 2.9, Excitation: 0.04, StepDeg: 0.004, Coupling: -1}).filled(sw)
		f, err := newField(context.Background(), st, 200, 1)
		if err != nil {
			t.Fatal(err)
		}
		r := &rotation{sweep: sw, set: &set, field: f, k: 1 / Wavelength(200)}
		r.hkl, r.still, r.along = []crystal.HKL{{K: 1}}, [][3]float64{{0, 1.0 / 3, 0}}, []float64{0}
		shots := make([]shot, 4000)
		for i := range shots {
			if err := r.shoot(&shots[i], -8+(float64(i)+0.5)*0.004); err != nil {
				t.Fatal(err)
			}
		}
		out := r.integrate(shots, 0.004, 1)
		u := f.at(0, 1, 0)
		xi := r.k / math.Hypot(real(u), imag(u))
		a := math.Pi * 10 * nm / xi
		// Outside |w| < far both curves average 1/(2 w^2), so 1/far is missing from both integrals.
		far := set.Excitation * xi
		got := out.Dynamical[0][0]/out.Kinematic[0]*(math.Pi*a-1/far) + 1/far
		floatcmp.Check(t, fmt.Sprintf("A = %.3f", a), got, RockingIntegral(a), 0, 1e-3)
	}
}

// TestSymmetryOfTheCrystal: turning the crystal by its own two-fold axis relabels the
// reflections and changes no intensity.
func TestSymmetryOfTheCrystal(t *testing.T) {
	st := small(t, "P 21 21 21")
	set := &BeamSettings{DMin: 1.3, StepDeg: 1}
	sw := sweepOf(st, 60)
	sw.TiltDeg = [2]float64{-45, 45}
	a := rotate(t, st, sw, set)
	turned := *sw
	turned.Orientation = product(sw.Orientation, [3][3]float64{{-1, 0, 0}, {0, -1, 0}, {0, 0, 1}})
	b := rotate(t, st, &turned, set)
	want := map[crystal.HKL]float64{}
	for i, h := range a.HKL {
		want[crystal.HKL{H: -h.H, K: -h.K, L: h.L}] = a.Dynamical[0][i]
	}
	if len(a.HKL) != len(b.HKL) {
		t.Fatalf("%d and %d reflections", len(a.HKL), len(b.HKL))
	}
	friedel := 0.0
	for i, h := range b.HKL {
		floatcmp.Check(t, fmt.Sprint(h), b.Dynamical[0][i], want[h], 1e-9, 1e-9)
		if v, ok := want[crystal.HKL{H: h.H, K: h.K, L: -h.L}]; ok {
			friedel = math.Max(friedel, math.Abs(v/b.Dynamical[0][i]-1))
		}
	}
	if friedel == 0 {
		t.Error("no reflection to show that other signs differ")
	}
}

// TestForbiddenAreFilled: screw-axis absences are 0 in the kinematic column and grow with thickness.
func TestForbiddenAreFilled(t *testing.T) {
	st := small(t, "P 21 21 21")
	sw := sweepOf(st, 2, 10, 40)
	sw.TiltDeg = [2]float64{-40, 40}
	sw.Orientation = product(tilted(), [3][3]float64{{0, 0, 1}, {1, 0, 0}, {0, 1, 0}})
	r := rotate(t, st, sw, &BeamSettings{DMin: 1.2, StepDeg: 0.15, Slowest: 0.05})
	n := 0
	var filled [3]float64
	for i, h := range r.HKL {
		if !st.Group.Absent(h) {
			continue
		}
		n++
		floatcmp.Check(t, fmt.Sprint(h), r.Kinematic[i], 0, 1e-20, 0)
		for k := range filled {
			filled[k] += r.Dynamical[k][i]
		}
	}
	t.Logf("%d forbidden, sums %v", n, filled)
	if n == 0 || !(filled[0] > 0 && filled[1] > 20*filled[0] && filled[2] > filled[1]) {
		t.Errorf("%d forbidden reflections, sums %v by thickness", n, filled)
	}
}

// TestMoreBeams: a wider choice of beams moves the intensities little, and either limit alone
// widens it.
func TestMoreBeams(t *testing.T) {
	st := invented(t, "P 21 21 21", crystal.Cell{A: 6, B: 7, C: 8.5, Alpha: 90, Beta: 90, Gamma: 90}, 5)
	sw := sweepOf(st, 10, 30)
	base := rotate(t, st, sw, &BeamSettings{DMin: 1.1, StepDeg: 0.1})
	wide := rotate(t, st, sw, &BeamSettings{DMin: 1.1, StepDeg: 0.1, Excitation: 0.024})
	at := map[crystal.HKL]int{}
	for i, h := range wide.HKL {
		at[h] = i
	}
	for k := range base.Dynamical {
		var square, sum, n float64
		for i, h := range base.HKL {
			if j, ok := at[h]; ok {
				d := base.Dynamical[k][i] - wide.Dynamical[k][j]
				square, sum, n = square+d*d, sum+wide.Dynamical[k][j], n+1
			}
		}
		rms := math.Sqrt(square/n) / (sum / n)
		t.Logf("%g nm: rms difference %.4f of the mean over %g reflections, %.1f and %.1f beams", sw.ThicknessNM[k], rms, n, base.MeanBeams, wide.MeanBeams)
		if !(rms < 0.05 && n > 30 && wide.MeanBeams > 1.5*base.MeanBeams) {
			t.Errorf("%g nm: rms difference %g of the mean over %g reflections", sw.ThicknessNM[k], rms, n)
		}
	}
	none := rotate(t, st, sw, &BeamSettings{DMin: 1.1, StepDeg: 1, Coupling: -1})
	strong := rotate(t, st, sw, &BeamSettings{DMin: 1.1, StepDeg: 1, Coupling: 200})
	if !(strong.MeanBeams > none.MeanBeams+1) {
		t.Errorf("%g beams by coupling, %g without", strong.MeanBeams, none.MeanBeams)
	}
}

func BenchmarkRotate(b *testing.B) {
	st := small(b, "P 21 21 21")
	sw := sweepOf(st, 30, 60, 100)
	for _, d := range []float64{1.5, 1} {
		b.Run(fmt.Sprintf("dmin=%g", d), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				rotate(b, st, sw, &BeamSettings{DMin: d, StepDeg: 1})
			}
		})
	}
}

func TestRotateRepeats(t *testing.T) {
	st := small(t, "P -1")
	sw := sweepOf(st, 10, 50)
	before := *sw
	one := rotate(t, st, sw, &BeamSettings{DMin: 1.5, StepDeg: 0.7, Workers: 1})
	many := rotate(t, st, sw, &BeamSettings{DMin: 1.5, StepDeg: 0.7, Workers: 7})
	if d := cmp.Diff(one, many); d != "" {
		t.Errorf("workers change the result: %s", d)
	}
	if d := cmp.Diff(before, *sw); d != "" {
		t.Errorf("the sweep was changed: %s", d)
	}
	if one.Angles != 38 {
		t.Errorf("%d angles, want 26/0.7 rounded up", one.Angles)
	}
}

func TestRotateRefuses(t *testing.T) {
	st := small(t, "P -1")
	for _, c := range []struct {
		change func(*Sweep, *BeamSettings)
		want   string
	}{
		{func(s *Sweep, _ *BeamSettings) { s.EnergyKeV = 0 }, "energy 0 keV"},
		{func(s *Sweep, _ *BeamSettings) { s.TiltDeg = [2]float64{3, 3} }, "does not rise"},
		{func(s *Sweep, _ *BeamSettings) { s.TiltZeroDeg = -75 }, "85 degrees or more"},
		{func(s *Sweep, _ *BeamSettings) { s.ThicknessNM = nil }, "no thickness"},
		{func(s *Sweep, _ *BeamSettings) { s.ThicknessNM = []float64{10, math.NaN()} }, "thickness 1 is NaN"},
		{func(_ *Sweep, o *BeamSettings) { o.DMin = -1 }, "must be positive"},
		{func(_ *Sweep, o *BeamSettings) { o.MostBeams = 2 }, "more than 2"},
	} {
		sw, o := sweepOf(st, 10), &BeamSettings{DMin: 1.5, StepDeg: 0.7}
		c.change(sw, o)
		if _, err := Rotate(context.Background(), st, sw, o); err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("got %v, want %q", err, c.want)
		}
	}
	bad := *st
	bad.Atoms = []Atom{{Element: "Xx"}}
	if _, err := Rotate(context.Background(), &bad, sweepOf(st, 10), nil); err == nil || !strings.Contains(err.Error(), `"Xx"`) {
		t.Errorf("got %v", err)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := Rotate(ctx, st, sweepOf(st, 10), nil); err == nil {
		t.Error("a cancelled context was ignored")
	}
}

func TestStructureFactors(t *testing.T) {
	// Direct sum over x,y,z; 1/2-x,-y,1/2+z; -x,1/2+y,1/2-z; 1/2+x,1/2-y,-z (International Tables A, no. 19).
	st := small(t, "P 21 21 21")
	hkl := []crystal.HKL{{H: 1, K: 2, L: 3}, {H: -1, K: -2, L: -3}, {H: 0, K: 0, L: 3}, {H: 2, K: 0, L: 0}}
	got, err := StructureFactors(context.Background(), st, hkl)
	if err != nil {
		t.Fatal(err)
	}
	for i, h := range hkl {
		s2 := st.Cell.InvD2(h) / 4
		var re, im float64
		for _, a := range st.Atoms {
			f, _ := ScatteringFactor(a.Element, math.Sqrt(s2))
			f *= math.Exp(-(a.B + st.B) * s2)
			for _, x := range [][3]float64{{a.X, a.Y, a.Z}, {0.5 - a.X, -a.Y, 0.5 + a.Z}, {-a.X, 0.5 + a.Y, 0.5 - a.Z}, {0.5 + a.X, 0.5 - a.Y, -a.Z}} {
				s, c := math.Sincos(2 * math.Pi * (float64(h.H)*x[0] + float64(h.K)*x[1] + float64(h.L)*x[2]))
				re, im = re+f*c, im+f*s
			}
		}
		floatcmp.Check(t, fmt.Sprint(h, " re"), real(got[i]), re, 1e-12, 0)
		floatcmp.Check(t, fmt.Sprint(h, " im"), imag(got[i]), im, 1e-12, 0)
	}
	floatcmp.Check(t, "Friedel", imag(got[1]), -imag(got[0]), 1e-13, 0)
	floatcmp.Check(t, "absence", math.Hypot(real(got[2]), imag(got[2])), 0, 1e-13, 0)
	centre, err := StructureFactors(context.Background(), small(t, "P -1"), hkl[:1])
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "centre", imag(centre[0]), 0, 1e-13, 0)
}
