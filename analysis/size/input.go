package size

import (
	"fmt"
	"math"
)

// Input holds the pairs of one contrast as parallel columns, thin and thick on
// the common scale.
//
// Z is the strength of each reflection on the axis, intensity over local shell
// mean; NaN marks a reflection without one: it enters the shell means and
// nothing else. Shell numbers the resolution shells from 0 to Shells-1. VarThin
// and VarThick are variances at the expected intensity; they are needed by the
// curb (VarThin) and by PrecisionWeights, and may be nil otherwise. S2 is
// sin^2(theta)/lambda^2 in 1/A^2; nil makes the mean over all reflections the
// reference intensity in place of that of the lowest third in s^2.
//
// Optional columns, nil when absent: ThinA and ThinB, two independent halves of
// the thin position, whose product then replaces Thin^2 - VarThin; Exposure, the
// factor that turns the common-scale intensity into the count rate at which the
// thick position recorded the reflection; Precision, weights of the moments,
// which may depend on Z, S2 and shell-wise variances only.
type Input struct {
	Z                 []float64
	Thin, Thick       []float64
	VarThin, VarThick []float64
	Shell             []int32
	Shells            int
	S2                []float64
	ThinA, ThinB      []float64
	Exposure          []float64
	Precision         []float64
}

// Settings of the estimators; nil and zero fields mean the defaults.
type Settings struct {
	Level      float64   // of intervals; 0.95
	Clip       float64   // of the axis in Exchange, in shell means; 6
	Knots      []float64 // of the functions min(z, knot) in Moments; .3, 1, 3, 8
	Curb       CurbForm  // what the curb grows with; CurbCommon
	FlatShells bool      // Moments weights all reflections alike; default false: by their expected residual variance
	FirstOrder bool      // Moments takes J (1 - q u) for the curb; default false: J exp(-q u) to second order in q
	AsFound    bool      // Moments leaves out the jackknife: no correction, sandwich errors; default false
}

// Interval is closed; an open end is an infinity.
type Interval struct{ Lo, Hi float64 }

func (s *Settings) level() float64 {
	if s == nil || s.Level == 0 {
		return 0.95
	}
	return s.Level
}

func (s *Settings) clip() float64 {
	if s == nil || s.Clip == 0 {
		return 6
	}
	return s.Clip
}

func (s *Settings) knots() []float64 {
	if s == nil || len(s.Knots) == 0 {
		return []float64{0.3, 1, 3, 8}
	}
	return s.Knots
}

func (s *Settings) curb() CurbForm {
	if s == nil {
		return CurbCommon
	}
	return s.Curb
}

func (s *Settings) flat() bool { return s != nil && s.FlatShells }

func (s *Settings) asFound() bool { return s != nil && s.AsFound }

func (s *Settings) firstOrder() bool { return s != nil && s.FirstOrder }

// check reports settings that mean nothing.
func (s *Settings) check() error {
	if l := s.level(); !(l > 0 && l < 1) {
		return fmt.Errorf("size: level %g is not between 0 and 1", l)
	}
	if c := s.clip(); !(c > 0) {
		return fmt.Errorf("size: clip %g is not positive", c)
	}
	for i, k := range s.knots() {
		if !(k > 0) || (i > 0 && !(k > s.knots()[i-1])) {
			return fmt.Errorf("size: knot %d is %g; knots are positive and rise", i, k)
		}
	}
	if f := s.curb(); f < CurbCommon || f > CurbRate {
		return fmt.Errorf("size: no curb form %d", int(f))
	}
	return nil
}

// check panics on unequal lengths and reports the first value that cannot
// be used. Gaps allows NaN in Thin and Thick.
func (in *Input) check(name string, w []float64, gaps bool) error {
	n := len(in.Z)
	same := func(what string, length int, optional bool) {
		if length != n && !(optional && length == 0) {
			panic(fmt.Sprintf("size: %s: %s has length %d, Z has %d", name, what, length, n))
		}
	}
	same("Thin", len(in.Thin), false)
	same("Thick", len(in.Thick), false)
	same("Shell", len(in.Shell), false)
	optional := []struct {
		what  string
		v     []float64
		least float64
	}{
		{"VarThin", in.VarThin, 0}, {"VarThick", in.VarThick, 0}, {"S2", in.S2, 0},
		{"ThinA", in.ThinA, math.Inf(-1)}, {"ThinB", in.ThinB, math.Inf(-1)},
		{"Exposure", in.Exposure, 0}, {"Precision", in.Precision, 0}, {"weights", w, 0},
	}
	for _, c := range optional {
		same(c.what, len(c.v), true)
	}
	for i, s := range in.Shell {
		if s < 0 || int(s) >= in.Shells {
			return fmt.Errorf("size: %s: shell %d of reflection %d is outside 0 to %d", name, s, i, in.Shells-1)
		}
		if math.IsInf(in.Z[i], 0) {
			return fmt.Errorf("size: %s: Z of reflection %d is %g", name, i, in.Z[i])
		}
		for _, v := range []float64{in.Thin[i], in.Thick[i]} {
			if math.IsInf(v, 0) || (math.IsNaN(v) && !gaps) {
				return fmt.Errorf("size: %s: intensity of reflection %d is %g", name, i, v)
			}
		}
	}
	for _, c := range optional {
		for i, v := range c.v {
			if math.IsInf(v, 0) || (math.IsNaN(v) && !gaps) || v < c.least {
				return fmt.Errorf("size: %s: %s of reflection %d is %g", name, c.what, i, v)
			}
		}
	}
	return nil
}
