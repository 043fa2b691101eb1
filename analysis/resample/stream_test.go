package resample

import (
	"crypto/sha256"
	"encoding/binary"
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"gonum.org/v1/gonum/stat/distuv"

	"thinward/analysis/internal/floatcmp"
)

func TestStreamKeyLayout(t *testing.T) {
	var msg []byte
	msg = binary.LittleEndian.AppendUint64(msg, 20260101)
	for _, n := range []string{"L1", "thin-thick", "bands"} {
		msg = binary.LittleEndian.AppendUint64(msg, uint64(len(n)))
		msg = append(msg, n...)
	}
	msg = binary.LittleEndian.AppendUint64(msg, 7)
	want := rand.NewChaCha8(sha256.Sum256(msg))
	got := NewSeed(20260101).At("L1", "thin-thick", "bands").Stream(7)
	for i := range 1000 {
		if g, w := got.Uint64(), want.Uint64(); g != w {
			t.Fatalf("word %d: %x, want %x", i, g, w)
		}
	}
}

// The first four words of three streams, recorded when the layout was fixed.
func TestStreamGolden(t *testing.T) {
	for _, c := range []struct {
		s    *Stream
		want [4]uint64
	}{
		{NewSeed(0).Stream(0), goldenWords[0]},
		{NewSeed(20260101).At("L1", "thin-thick", "bands").Stream(0), goldenWords[1]},
		{NewSeed(math.MaxUint64).At("", "tarn").Stream(1999), goldenWords[2]},
	} {
		for i, w := range c.want {
			if g := c.s.Uint64(); g != w {
				t.Errorf("word %d: %#x, want %#x", i, g, w)
			}
		}
	}
}

func TestSeedPaths(t *testing.T) {
	s := NewSeed(5)
	if s.At("a", "b") != s.At("a").At("b") {
		t.Error("At in two steps is not At in one")
	}
	if s.At("ab") == s.At("a", "b") || s.At() != s || s.At("") == s {
		t.Error("paths that differ are equal, or the reverse")
	}
	if (Seed{}) != NewSeed(0) || s.At("x").Number() != 5 {
		t.Error("zero seed or number wrong")
	}
	first := make(map[uint64]bool)
	for i := -3; i < 3; i++ {
		for _, p := range []Seed{s, s.At(""), s.At("a"), s.At("b"), s.At("a", "b"), s.At("ab"), NewSeed(6)} {
			first[p.Stream(i).Uint64()] = true
		}
	}
	if len(first) != 6*7 {
		t.Errorf("%d different first words of 42", len(first))
	}
}

// Every sampler is frozen: a change of a draw changes every published result.
func TestSamplersFrozen(t *testing.T) {
	s := NewSeed(1).At("frozen").Stream(0)
	var got []float64
	for range 2 {
		got = append(got, s.Float64(), s.Open(), s.Sign(), float64(s.Intn(1000)), s.Normal(), s.Normal(),
			s.Exponential(), s.Gamma(0.5, 2), s.Gamma(7, 1), s.ChiSquared(3), s.StudentT(4),
			float64(s.Poisson(3)), float64(s.Poisson(200)), float64(s.Poisson(1e9)),
			float64(s.Binomial(20, 0.2)), float64(s.Binomial(1000, 0.7)))
	}
	floatcmp.CheckSlice(t, "draws", got, goldenDraws, 0, 1e-12)
	if p := NewSeed(1).At("frozen").Stream(1).Perm(10); !slices.Equal(p, goldenPerm) {
		t.Errorf("permutation %v", p)
	}
}

// Moments of each sampler against the closed forms, within 5 standard errors.
func TestSamplerMoments(t *testing.T) {
	const n = 40000
	s := NewSeed(2).At("moments").Stream(0)
	for _, c := range []struct {
		name           string
		draw           func() float64
		mean, variance float64
		kurtosis       float64 // excess, for the error of the variance
	}{
		{"uniform", s.Float64, 0.5, 1.0 / 12, -1.2},
		{"open", s.Open, 0.5, 1.0 / 12, -1.2},
		{"sign", s.Sign, 0, 1, -1.999},
		{"normal", s.Normal, 0, 1, 0},
		{"exponential", s.Exponential, 1, 1, 6},
		{"gamma .4", func() float64 { return s.Gamma(0.4, 3) }, 1.2, 3.6, 15},
		{"gamma 20", func() float64 { return s.Gamma(20, 0.5) }, 10, 5, 0.3},
		{"chi-squared 5", func() float64 { return s.ChiSquared(5) }, 5, 10, 2.4},
		{"t 12", func() float64 { return s.StudentT(12) }, 0, 1.2, 0.75},
		{"poisson .3", func() float64 { return float64(s.Poisson(0.3)) }, 0.3, 0.3, 1 / 0.3},
		{"poisson 9.9", func() float64 { return float64(s.Poisson(9.9)) }, 9.9, 9.9, 0.1},
		{"poisson 10.1", func() float64 { return float64(s.Poisson(10.1)) }, 10.1, 10.1, 0.1},
		{"poisson 1e4", func() float64 { return float64(s.Poisson(1e4)) }, 1e4, 1e4, 0},
		{"binomial small", func() float64 { return float64(s.Binomial(12, 0.3)) }, 3.6, 2.52, 0},
		{"binomial large", func() float64 { return float64(s.Binomial(500, 0.06)) }, 30, 28.2, 0},
		{"binomial mirrored", func() float64 { return float64(s.Binomial(500, 0.94)) }, 470, 28.2, 0},
	} {
		x := make([]float64, n)
		mean := 0.0
		for i := range x {
			x[i] = c.draw()
			mean += x[i] / n
		}
		v := 0.0
		for _, q := range x {
			v += (q - mean) * (q - mean) / (n - 1)
		}
		floatcmp.Check(t, c.name+" mean", mean, c.mean, 5*math.Sqrt(c.variance/n), 0)
		floatcmp.Check(t, c.name+" variance", v, c.variance, 5*c.variance*math.Sqrt((c.kurtosis+2)/n), 1e-6)
	}
}

// Whole laws against gonum, by the chi-squared of the cell counts.
func TestDiscreteSamplersLaw(t *testing.T) {
	const n = 30000
	s := NewSeed(3).At("law").Stream(0)
	for _, c := range []struct {
		name   string
		draw   func() int
		p      func(x float64) float64
		lo, hi int
	}{
		{"poisson 4", func() int { return s.Poisson(4) }, distuv.Poisson{Lambda: 4}.Prob, 0, 12},
		{"poisson 25", func() int { return s.Poisson(25) }, distuv.Poisson{Lambda: 25}.Prob, 10, 42},
		{"binomial 15", func() int { return s.Binomial(15, 0.4) }, distuv.Binomial{N: 15, P: 0.4}.Prob, 1, 12},
		{"binomial 90", func() int { return s.Binomial(90, 0.35) }, distuv.Binomial{N: 90, P: 0.35}.Prob, 18, 46},
		{"integer", func() int { return s.Intn(7) }, func(float64) float64 { return 1.0 / 7 }, 0, 6},
	} {
		count := make(map[int]float64)
		for range n {
			count[c.draw()]++
		}
		rest, restP, chi2 := float64(n), 1.0, 0.0
		for k := c.lo; k <= c.hi; k++ {
			e := n * c.p(float64(k))
			chi2 += (count[k] - e) * (count[k] - e) / e
			rest -= count[k]
			restP -= c.p(float64(k))
		}
		if restP > 1e-9 {
			chi2 += (rest - n*restP) * (rest - n*restP) / (n * restP)
		}
		if p := (distuv.ChiSquared{K: float64(c.hi - c.lo)}).Survival(chi2); !(p > 1e-4) {
			t.Errorf("%s: chi-squared %g, p %g", c.name, chi2, p)
		}
	}
}

func TestSamplerPanics(t *testing.T) {
	s := NewSeed(1).Stream(0)
	for want, f := range map[string]func(){
		"resample: Stream.Intn: n must be positive":                           func() { s.Intn(0) },
		"resample: Stream.Perm: n must not be negative":                       func() { s.Perm(-1) },
		"resample: Stream.Gamma: shape and scale must be positive and finite": func() { s.Gamma(0, 1) },
		"resample: Stream.ChiSquared: df must be positive":                    func() { s.ChiSquared(math.NaN()) },
		"resample: Stream.StudentT: df must be positive":                      func() { s.StudentT(-1) },
		"resample: Stream.Poisson: mean must be at least 0 and below 2^53":    func() { s.Poisson(math.NaN()) },
		"resample: Stream.Binomial: need n >= 0 and 0 <= p <= 1":              func() { s.Binomial(3, 1.5) },
		"resample: UnitsNeeded: level must lie between 0 and 1":               func() { UnitsNeeded(1) },
		"resample: Quantile: p must lie in [0, 1]":                            func() { Quantile([]float64{1}, 2, 6) },
		"resample: Quantile: kind must be 1 to 9":                             func() { Quantile([]float64{1}, 0.5, 10) },
		"resample: Quantile: x is not ascending at 1":                         func() { Quantile([]float64{2, 1}, 0.5, 6) },
		"resample: TheilSen: 1 x for 2 y":                                     func() { TheilSen([]float64{1}, []float64{1, 2}) },
		"resample: Settings.Blocks: 1 groups for 2 elements": func() {
			FlipTest(bg, []float64{1, 2}, []FlipSet{{Windows: []Window{{0, 2}}}}, &Settings{Blocks: []int32{1}})
		},
		"resample: Bands: 1 weights for 2 values":                    func() { Bands(bg, []float64{1, 2}, []float64{1}, nil, nil) },
		"resample: Settings.Accel: 2 accelerations for 1 statistics": func() { Scalars(bg, 3, weightedMean([]float64{1, 2, 3}), &Settings{Accel: []float64{0, 0}}) },
	} {
		func() {
			defer func() {
				if got := recover(); got != want {
					t.Errorf("panic %v, want %q", got, want)
				}
			}()
			f()
		}()
	}
}

func TestPoissonTable(t *testing.T) {
	var n, m1, m2, m3 int
	for k, c := range byteCounts {
		n += c
		m1 += c * k
		m2 += c * k * k
		m3 += c * k * k * k
	}
	if n != 256 || m1 != 256 || m2 != 512 {
		t.Errorf("counts %d, mean %d/256, second moment %d/256; want 256, 1, 2", n, m1, m2)
	}
	floatcmp.Check(t, "third moment", float64(m3)/256, 4.98, 0.005, 0)
	w := make([]float64, 1001)
	PoissonWeights(NewSeed(4).Stream(2), w)
	raw := NewSeed(4).Stream(2)
	for i := 0; i < len(w); i += 8 {
		word := raw.Uint64()
		for j := i; j < min(i+8, len(w)); j++ {
			if w[j] != weightTable[word>>(8*(j-i))&255] {
				t.Fatalf("weight %d is %g", j, w[j])
			}
		}
	}
}
