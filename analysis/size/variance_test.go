package size

import (
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// Where errors go with the intensity few strong reflections say what q is; this is the
// hardest case tried, 1300 reflections of one observation a position, and q covers .91 to .93
// of 300 (the whole pipeline .96 of 600). q is in units of the mean of the lowest third.
func TestErrorOfCurbUnderProportionalErrors(t *testing.T) {
	var q, se, cover, refused tally
	g := stream(61)
	for range repeats(150, 1000) {
		in := plan{n: 1300, shells: 13, q: .01, falloff: 9, noise: [3]float64{.02, .02, .02}, error: .08}.draw(g)
		f, err := Moments(in, nil, MQO, nil)
		f = must(t, f, err)
		q.add(f.Q.Value - .01*f.ReferenceThin)
		se.add(f.Q.SE)
		cover.add(within(.01*f.ReferenceThin, f.Q))
		refused.add(map[bool]float64{true: 1}[f.JP < .05])
	}
	spread := 3 / math.Sqrt(2*float64(len(q.v)))
	inBand(t, "claimed over true error of q", se.mean()/q.sd(), .93-spread, 1.07+spread)
	inBand(t, "q covers", cover.mean(), .92-3*cover.binomial(.95), .98+3*cover.binomial(.95))
	inBand(t, "q less truth", q.mean(), -.002-3*q.se(), .002+3*q.se())
	inBand(t, "J refuses", refused.mean(), 0, .05+3*refused.binomial(.05))
}

// The law of the squared residual is found again: a by shell, b in common.
func TestVarianceLaw(t *testing.T) {
	g := stream(62)
	n := 20000
	c := &conditions{frame: &frame{in: &Input{Shells: 2, Shell: make([]int32, n)}, w: make([]float64, n), u: make([]float64, n), z: make([]float64, n)}}
	r := make([]float64, n)
	want := make([]float64, n)
	for i := range r {
		s := i % 2
		c.in.Shell[i], c.w[i], c.u[i], c.z[i] = int32(s), 1, 1, g.ExpFloat64()
		want[i] = []float64{.1, .4}[s] + .05*c.z[i]*c.z[i]
		r[i] = math.Sqrt(want[i]) * g.NormFloat64()
	}
	got := c.variances(r)
	for _, z := range []float64{.1, 1, 3} {
		for s := range 2 {
			near := s
			for i := s; i < n; i += 2 {
				if math.Abs(c.z[i]-z) < math.Abs(c.z[near]-z) {
					near = i
				}
			}
			floatcmp.Check(t, "variance", got[near], want[near], 0, .06)
		}
	}
	c.u[0], c.u[1] = 0, 0
	if got = c.variances(r); !math.IsNaN(got[0]) || math.IsNaN(got[2]) {
		t.Error("a row that takes no part has a variance")
	}
}

// With the variances of both positions the law follows their means by shell up to one
// factor: a shell whose residuals are three times as far as the others' does not weigh itself down.
func TestVarianceLawHasNoConstantOfItsOwnForEachShell(t *testing.T) {
	g := stream(63)
	n := 30000
	in := &Input{Shells: 3, Shell: make([]int32, n), VarThin: make([]float64, n), VarThick: make([]float64, n)}
	c := &conditions{frame: &frame{in: in, w: make([]float64, n), u: make([]float64, n), z: make([]float64, n), sum: make([]float64, 3), mean1: []float64{2, 1, 1}, mean2: []float64{1, 1, .5}}}
	r := make([]float64, n)
	for i := range r {
		s := i % 3
		in.Shell[i], c.w[i], c.u[i], c.z[i] = int32(s), 1, 1, g.ExpFloat64()
		c.sum[s]++
		// v_s = .2, .2, .4 in units of the shell means.
		in.VarThin[i], in.VarThick[i] = []float64{.4, .1, .2}[s], []float64{.1, .1, .05}[s]
		sd := math.Sqrt(.5*[]float64{.2, .2, .4}[s] + .05*c.z[i]*c.z[i])
		if s == 1 && i >= n/2 {
			sd *= 3
		}
		r[i] = sd * g.NormFloat64()
	}
	got := c.variances(r)
	floor := [3]float64{math.Inf(1), math.Inf(1), math.Inf(1)}
	for i, v := range got {
		floor[i%3] = min(floor[i%3], v)
	}
	floatcmp.Check(t, "second shell over the first", floor[1]/floor[0], 1, .01, 0)
	floatcmp.Check(t, "third shell over the first", floor[2]/floor[0], 2, .02, 0)
	in.VarThin[0] = 0
	for i := 3; i < n; i += 3 {
		in.VarThin[i], in.VarThick[i] = 0, 0
	}
	in.VarThick[0] = 0
	if c.shellVariances() != nil {
		t.Error("a shell without a variance passes")
	}
}
