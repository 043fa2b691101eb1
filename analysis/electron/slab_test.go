package electron

import (
	"context"
	"fmt"
	"math"
	"testing"

	"thinward/analysis/crystal"
	"thinward/analysis/internal/floatcmp"
)

func dot(a, b [3]float64) float64 { return a[0]*b[0] + a[1]*b[1] + a[2]*b[2] }

func sum(a, b [3]float64) [3]float64 { return [3]float64{a[0] + b[0], a[1] + b[1], a[2] + b[2]} }

func minus(a, b [3]float64) [3]float64 { return [3]float64{a[0] - b[0], a[1] - b[1], a[2] - b[2]} }

// beamsOf are the beams of incident wave vector k by their vectors alone.
func beamsOf(k, normal [3]float64, hkl []crystal.HKL, g [][3]float64) []beam {
	var out []beam
	for i, h := range hkl {
		q := sum(k, g[i])
		out = append(out, beam{hkl: h, offSphere: dot(k, k) - dot(q, q), along: dot(g[i], normal)})
	}
	return out
}

func currents(t *testing.T, f *field, beams []beam, normal, thickness float64) []float64 {
	t.Helper()
	p, err := excite(f, beams, normal)
	if err != nil {
		t.Fatal(err)
	}
	w := make([]complex128, len(beams))
	p.wave(w, math.Pi*thickness/normal)
	out := make([]float64, len(w))
	for i, x := range w {
		out[i] = real(x)*real(x) + imag(x)*imag(x)
	}
	return out
}

func TestTwoBeamsAreTheClosedForm(t *testing.T) {
	st := small(t, "P 21 21 21")
	f, err := newField(context.Background(), st, 200, 2)
	if err != nil {
		t.Fatal(err)
	}
	k := 1 / Wavelength(200)
	for _, h := range []crystal.HKL{{H: 1, K: 1, L: 0}, {H: 0, K: 2, L: 1}, {H: -1, K: 2, L: 3}} {
		u := f.at(h.H, h.K, h.L)
		for _, along := range []float64{0, 0.4, -0.4} {
			for _, s := range []float64{0, 0.001, -0.004, 0.02} {
				q := 1 + along/(0.8*k)
				beams := []beam{{}, {hkl: h, offSphere: 2 * k * s, along: along}}
				for _, nm := range []float64{1, 30, 400} {
					got := currents(t, f, beams, 0.8*k, 10*nm)
					// xi and s along the normal: K.n sqrt(q)/|U| and K s/(K.n q).
					xi := 0.8 * k * math.Sqrt(q) / math.Hypot(real(u), imag(u))
					want := TwoBeam(10*nm, xi, s/(0.8*q))
					floatcmp.Check(t, fmt.Sprintf("%v along %g s %g t %g", h, along, s, nm), got[1], want, 1e-10, 0)
					floatcmp.Check(t, "incident", got[0], 1-want, 1e-10, 0)
					single := beams[1].single(0.8*k, 10*nm) * (real(u)*real(u) + imag(u)*imag(u))
					floatcmp.Check(t, "kinematic", single, TwoBeamKinematic(10*nm, xi, s/(0.8*q)), 1e-10, 1e-10)
				}
			}
		}
	}
	// ExtinctionDistance is this xi for a slab across the beam, but for cos(theta).
	floatcmp.Check(t, "xi", ExtinctionDistance(200, st.Cell.Volume(), 3, 1e6), k/(Gamma(200)*3/(math.Pi*st.Cell.Volume())), 0, 1e-9)
}

// TestReciprocity: exchanging source and detector and inverting the crystal changes nothing, so
// in a centrosymmetric slab on the Bragg condition the current of g under K is that of -g under
// K+g (von Laue 1935; Pogany & Turner 1968). Without a centre it is not, which
// shows that the test can fail.
func TestReciprocity(t *testing.T) {
	worst := map[string]float64{}
	for _, symbol := range []string{"P -1", "P 1 21/c 1", "P 21 21 21"} {
		st := small(t, symbol)
		f, err := newField(context.Background(), st, 200, 2.2)
		if err != nil {
			t.Fatal(err)
		}
		k := 1 / Wavelength(200)
		rec, orient := reciprocal(st.Cell), tilted()
		vector := func(h crystal.HKL) [3]float64 {
			return turn(orient, turn(rec, [3]float64{float64(h.H), float64(h.K), float64(h.L)}))
		}
		for _, h := range []crystal.HKL{{H: 1, K: 1, L: 1}, {H: 2, K: -1, L: 1}, {H: 0, K: 2, L: -2}} {
			g := vector(h)
			// K on the sphere of g: -g/2 plus something across g.
			across := minus([3]float64{0, 0, 1}, [3]float64{g[0] * g[2] / dot(g, g), g[1] * g[2] / dot(g, g), g[2] * g[2] / dot(g, g)})
			scale := math.Sqrt((k*k - dot(g, g)/4) / dot(across, across))
			in := [3]float64{scale*across[0] - g[0]/2, scale*across[1] - g[1]/2, scale*across[2] - g[2]/2}
			normal := [3]float64{0, math.Sin(0.3), math.Cos(0.3)}
			hkl, gs := []crystal.HKL{{}, h}, [][3]float64{{}, g}
			for a := -3; a <= 3; a++ {
				for b := -3; b <= 3; b++ {
					for c := -3; c <= 3; c++ {
						i := crystal.HKL{H: a, K: b, L: c}
						v := vector(i)
						out := sum(in, v)
						if i == (crystal.HKL{}) || i == h || math.Abs(dot(out, out)-k*k) > 0.04*k {
							continue
						}
						hkl, gs = append(hkl, i), append(gs, v)
					}
				}
			}
			forward := beamsOf(in, normal, hkl, gs)
			var hkl2 []crystal.HKL
			var gs2 [][3]float64
			for _, i := range append([]int{1, 0}, upTo(2, len(hkl))...) {
				hkl2 = append(hkl2, crystal.HKL{H: hkl[i].H - h.H, K: hkl[i].K - h.K, L: hkl[i].L - h.L})
				gs2 = append(gs2, minus(gs[i], g))
			}
			in2 := sum(in, g)
			back := beamsOf(in2, normal, hkl2, gs2)
			a := currents(t, f, forward, dot(in, normal), 900)[1]
			b := currents(t, f, back, dot(in2, normal), 900)[1]
			if symbol == "P 21 21 21" {
				worst[symbol] = math.Max(worst[symbol], math.Abs(a-b))
				continue
			}
			floatcmp.Check(t, fmt.Sprintf("%s %v, %d beams", symbol, h, len(hkl)), b, a, 1e-10, 0)
			if len(hkl) < 8 || !(a > 1e-4) {
				t.Errorf("%s %v: %d beams, current %g: too little to test", symbol, h, len(hkl), a)
			}
		}
	}
	if !(worst["P 21 21 21"] > 1e-4) {
		t.Errorf("without a centre the currents agree to %g", worst["P 21 21 21"])
	}
}

func upTo(from, to int) []int {
	var out []int
	for i := from; i < to; i++ {
		out = append(out, i)
	}
	return out
}

func TestBeamBackwards(t *testing.T) {
	f, err := newField(context.Background(), small(t, "P -1"), 200, 2)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := excite(f, []beam{{}, {hkl: crystal.HKL{H: 1}, along: -3}}, 2); err == nil {
		t.Error("a beam that leaves through the entrance surface was taken")
	}
}
