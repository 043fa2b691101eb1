package size

import (
	"math"
	"math/rand/v2"
	"os"
	"slices"
	"testing"
)

// full says whether the long calibrations are asked for.
func full() bool { return os.Getenv("THINWARD_FULL") == "1" }

// repeats is the number of simulated series: few in the daily run, many on request.
func repeats(few, many int) int {
	if full() {
		return many
	}
	return few
}

func stream(n uint64) *rand.Rand { return rand.New(rand.NewPCG(n, 0x7461726e)) }

// plan of a pair-level simulation of one contrast in units of the reference.
type plan struct {
	n, shells      int
	m, q, o        float64
	noise          [3]float64 // of axis, thin, thick, reference units
	error          float64    // multiplicative, of each of the three
	heavy          bool       // Student-4 in place of normal errors
	falloff        float64    // S = exp(-falloff s^2), s up to 0.556
	curbByStrength bool
}

// draw makes exponential (acentric Wilson) strengths and an independent axis.
// The curb comes first and takes exp(-q x), x the intensity before it, on the common
// scale or over the shell level; what is left is exchanged with its mean under the law,
// 1/(1 + q level)^2 of the level, so that a shell mean is one of a sample.
func (p plan) draw(r *rand.Rand) *Input {
	shells := max(p.shells, 1)
	in := &Input{Shells: shells, S2: make([]float64, p.n), Shell: make([]int32, p.n)}
	for i := range in.S2 {
		s := 0.556 * math.Cbrt(r.Float64())
		in.S2[i] = s * s
	}
	slices.Sort(in.S2)
	scatter := func() float64 {
		if !p.heavy {
			return r.NormFloat64()
		}
		var chi float64
		for range 4 {
			g := r.NormFloat64()
			chi += g * g
		}
		return r.NormFloat64() / math.Sqrt(chi/4) / math.Sqrt2
	}
	for i, s2 := range in.S2 {
		in.Shell[i] = int32(i * shells / p.n)
		level := math.Exp(-p.falloff * s2)
		e := r.ExpFloat64()
		unit := level
		if p.curbByStrength {
			unit = 1
		}
		left := e * math.Exp(-p.q*e*unit)
		thick := ((1-p.m)*left+p.m/math.Pow(1+p.q*unit, 2))*level + p.o
		seen := func(j, noise float64) float64 {
			return j*math.Max(0, 1+p.error*scatter()) + noise*r.NormFloat64()
		}
		in.Z = append(in.Z, seen(e*level, p.noise[0])/level)
		in.Thin = append(in.Thin, seen(e*level, p.noise[1]))
		in.Thick = append(in.Thick, seen(thick, p.noise[2]))
		b2 := p.error * p.error
		in.VarThin = append(in.VarThin, p.noise[1]*p.noise[1]+b2*e*e*level*level)
		in.VarThick = append(in.VarThick, p.noise[2]*p.noise[2]+b2*thick*thick)
	}
	return in
}

// series of estimates.
type tally struct{ v []float64 }

func (t *tally) add(x float64) { t.v = append(t.v, x) }

func (t *tally) mean() float64 {
	var s float64
	for _, x := range t.v {
		s += x
	}
	return s / float64(len(t.v))
}

func (t *tally) sd() float64 {
	m := t.mean()
	var s float64
	for _, x := range t.v {
		s += (x - m) * (x - m)
	}
	return math.Sqrt(s / float64(len(t.v)-1))
}

func (t *tally) se() float64 { return t.sd() / math.Sqrt(float64(len(t.v))) }

// inBand fails unless lo <= got <= hi; NaN fails.
func inBand(t *testing.T, what string, got, lo, hi float64) {
	t.Helper()
	t.Logf("%s: %.4f, wanted %.4f to %.4f", what, got, lo, hi)
	if !(got >= lo && got <= hi) {
		t.Errorf("%s: got %.4f, want %.4f to %.4f", what, got, lo, hi)
	}
}

func must[T any](t testing.TB, v T, err error) T {
	t.Helper()
	if err != nil {
		t.Fatal(err)
	}
	return v
}
