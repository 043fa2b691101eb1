package evidence

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
	"thinward/analysis/resample"
)

// field is a small rotation series: indices of a cube recorded on frames of their
// own, four times each as equivalents, with what is asked for.
func field(leak, double, jitter float64, stream int) *Crossings {
	r := resample.NewSeed(9).At("field").Stream(stream)
	c := &Crossings{}
	const size = 6
	var strength []float64
	unique := map[index]int32{}
	at := map[index]map[int32]float64{}
	frames := map[int32]float64{}
	for turn := range 4 {
		for h := range size {
			for k := range size {
				for l := range size {
					key := index{int16(h), int16(k), int16(l)}
					if turn == 0 {
						unique[key] = int32(len(strength))
						strength = append(strength, 100*r.Exponential())
						at[key] = map[int32]float64{}
					}
					f := int32(100*turn + r.Intn(12))
					if _, ok := frames[f]; !ok {
						frames[f] = math.Exp(jitter * r.Normal())
					}
					c.H, c.K, c.L = append(c.H, key.h), append(c.K, key.k), append(c.L, key.l)
					c.Unique, c.Frame = append(c.Unique, unique[key]), append(c.Frame, f)
					j := strength[unique[key]]
					c.Signal, c.Scale, c.Own = append(c.Signal, j), append(c.Scale, 1), append(c.Own, j)
					c.I, c.Var = append(c.I, frames[f]*j+2*r.Normal()), append(c.Var, 4)
					at[key][f] = j
				}
			}
		}
	}
	for o := range c.I {
		for _, d := range [6]index{{h: 1}, {h: -1}, {k: 1}, {k: -1}, {l: 1}, {l: -1}} {
			n := at[index{c.H[o] + d.h, c.K[o] + d.k, c.L[o] + d.l}]
			for g := int32(-1); g <= 1; g++ {
				c.I[o] += leak * n[c.Frame[o]+g]
			}
		}
		if double != 0 {
			for key, n := range at {
				rest := at[index{c.H[o] - key.h, c.K[o] - key.k, c.L[o] - key.l}]
				for g := int32(-1); g <= 1; g++ {
					for q := int32(-1); q <= 1; q++ {
						c.I[o] += double * n[c.Frame[o]+g] * rest[c.Frame[o]+q]
					}
				}
			}
		}
	}
	return c
}

func TestBleed(t *testing.T) {
	none, err := Bleed(field(0, 0, 0, 0))
	if err != nil {
		t.Fatal(err)
	}
	some, err := Bleed(field(0.03, 0, 0, 0))
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(none.Z) > 3 || some.Z < 10 {
		t.Errorf("z without bleed %.1f, with it %.1f", none.Z, some.Z)
	}
	floatcmp.Check(t, "share that leaks", some.Value, 0.03, 0.006, 0)
}

func TestDoubleScattering(t *testing.T) {
	none, err := DoubleScattering(field(0, 0, 0, 1))
	if err != nil {
		t.Fatal(err)
	}
	some, err := DoubleScattering(field(0, 1e-4, 0, 1))
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(none.Z) > 3 || some.Z < 5 {
		t.Errorf("z without double scattering %.1f, with it %.1f", none.Z, some.Z)
	}
}

func TestFrameJitter(t *testing.T) {
	none, err := FrameJitter(field(0, 0, 0, 2))
	if err != nil {
		t.Fatal(err)
	}
	some, err := FrameJitter(field(0, 0, 0.2, 2))
	if err != nil {
		t.Fatal(err)
	}
	// 48 frames: the spread of a standard deviation is a tenth of it.
	floatcmp.Check(t, "jitter", some.Tau, 0.2, 0.07, 0)
	floatcmp.Check(t, "no jitter", none.Tau, 0, 0.01, 0)
	if none.DF != some.DF || none.DF < 30 {
		t.Errorf("%d and %d degrees of freedom", none.DF, some.DF)
	}
}

func TestCrossingsWithoutFrames(t *testing.T) {
	c := field(0, 0, 0, 3)
	c.Frame = nil
	if _, err := Bleed(c); err == nil {
		t.Error("bleed without frames passed")
	}
	if _, err := DoubleScattering(c); err == nil {
		t.Error("double scattering without frames passed")
	}
	if _, err := FrameJitter(c); err == nil {
		t.Error("jitter without frames passed")
	}
}

// An excess of -0.5 in one ring is found there and nowhere else.
func TestRings(t *testing.T) {
	r := resample.NewSeed(9).At("rings").Stream(0)
	var d, eps, v []float64
	for range 6000 {
		x := 1.8 + 2.4*r.Float64()
		e := 0.2 * r.Normal()
		if math.Abs(x-3.67) < 0.03 {
			e -= 0.5
		}
		d, eps, v = append(d, x), append(eps, e), append(v, 0.04)
	}
	rings := Rings(d, eps, v, []float64{3.9, 3.67, 3.44, 2.25, 9})
	if len(rings) != 4 {
		t.Fatalf("%d rings", len(rings))
	}
	for _, x := range rings {
		if x.D == 3.67 {
			floatcmp.Check(t, "excess", x.Excess, -0.5, 0.08, 0)
			if x.Z > -8 {
				t.Errorf("z = %.1f", x.Z)
			}
		} else if math.Abs(x.Z) > 3.5 {
			t.Errorf("ring at %g has z = %.1f", x.D, x.Z)
		}
	}
}
