package evidence

import (
	"context"
	"math"
	"testing"

	"thinward/analysis/internal/floatcmp"
)

// ratio is a pipeline of known answer: thin and thick follow each other, and m is
// 1 - b of the regression of thick on thin about their means.
func ratio(_ context.Context, v []float64) (Summary, error) {
	n := len(v) / 2
	var a, b float64
	for i := range n {
		a += v[i] / float64(n)
		b += v[n+i] / float64(n)
	}
	num, den := 0.0, 0.0
	for i := range n {
		num += (v[i]/a - 1) * (v[n+i]/b - 1)
		den += (v[i]/a - 1) * (v[i]/a - 1)
	}
	m := 1 - num/den
	return Summary{M: Estimate{m, 0.01, m - 0.02, m + 0.02}, P: math.NaN()}, nil
}

func example() (v []float64, x *Injection) {
	strength := []float64{0.1, 0.3, 0.6, 1, 1.4, 2.6}
	n := len(strength)
	x = &Injection{Thick: make([]bool, 2*n), Local: make([]float64, 2*n), Expected: make([]float64, 2*n), Unit: make([]float64, 2*n)}
	for side := range 2 {
		for i, s := range strength {
			k := side*n + i
			j := s
			if side == 1 {
				j = 0.9*s + 0.1
			}
			v = append(v, j)
			x.Thick[k], x.Local[k], x.Expected[k], x.Unit[k] = side == 1, 1, j, 1
		}
	}
	return v, x
}

// An exchange of 0.1 that is there and one of 0.05 that is added make 1 - 0.9 0.95.
func TestRecoverComposesExchanges(t *testing.T) {
	v, x := example()
	before, _ := ratio(context.Background(), v)
	floatcmp.Check(t, "before", before.M.Value, 0.1, 1e-12, 0)
	x.M = 0.05
	r, err := Recover(context.Background(), before, x, v, ratio)
	if err != nil {
		t.Fatal(err)
	}
	floatcmp.Check(t, "after", r.After.M.Value, 1-0.9*0.95, 1e-12, 0)
	floatcmp.Check(t, "recovered", r.M.Value, 0.05, 1e-12, 0)
	floatcmp.Check(t, "interval moves along", r.M.Hi-r.M.Value, 0.02, 1e-12, 0)
}

// A curb put into intensities that hold an exchange acts on what was there before it: the
// result is that of a curb first and the exchange after it, mean intensities included.
func TestCurbComesBeforeTheExchangeThatIsThere(t *testing.T) {
	v, x := example()
	x.Q, x.Given, x.Lost = 0.02, 0.1, make([]float64, len(v))
	strength, left := v[:6], make([]float64, 6)
	var mean, lost float64
	for i, j := range strength {
		left[i] = j * math.Exp(-0.02*j)
		mean += left[i] / 6
		lost += (j - left[i]) / 6
	}
	for i := range v {
		x.Expected[i], x.Lost[i] = strength[i%6], lost
	}
	got := x.Apply(v)
	for i := range strength {
		floatcmp.Check(t, "thick side", got[6+i], 0.9*left[i]+0.1*mean, 1e-14, 0)
	}
}

func TestApplyTouchesTheThickSideOnly(t *testing.T) {
	v, x := example()
	x.M, x.Q = 0.05, 0.02
	kept := append([]float64(nil), v...)
	got := x.Apply(v)
	floatcmp.CheckSlice(t, "input", v, kept, 0, 0)
	floatcmp.CheckSlice(t, "thin side", got[:6], v[:6], 0, 0)
	for i := 6; i < 12; i++ {
		floatcmp.Check(t, "thick side, nothing given", got[i], 0.95*v[i]*math.Exp(-0.02*v[i])+0.05, 1e-14, 0)
	}
}

func TestRecoverRefusesWhatHasNoAnswer(t *testing.T) {
	v, x := example()
	if _, err := Recover(context.Background(), Summary{M: Estimate{Value: math.NaN()}}, x, v, ratio); err == nil {
		t.Error("no m before the injection passed")
	}
	defer func() {
		if recover() != "evidence: Injection.Apply: columns differ in length" {
			t.Error("unequal lengths do not panic as said")
		}
	}()
	x.Apply(v[:3])
}
