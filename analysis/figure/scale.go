package figure

import (
	"fmt"
	"math"
	"slices"
	"sort"
)

// largest bounds what can be drawn: beyond it differences of two numbers overflow.
const largest = 1e150

// scaler maps numbers to places between 0 and 1.
type scaler struct {
	scale   Scale
	lo, hi  float64
	reverse bool
	soft    float64 // core of a Root axis that crosses 0
	ranks   []float64
	left    int // values that no place exists for
}

func (s *scaler) drawable(v float64) bool {
	return !math.IsNaN(v) && math.Abs(v) <= largest && (s.scale != Log || v >= 1/largest)
}

// newScaler finds the range of an axis from the values that it will show. Values
// that are infinite, or not positive on a Log axis, are left out and counted;
// not-a-number is a gap and not counted;
// without any value the axis goes from 0 to 1.
// Bounds, the ends of bands and intervals, widen the range and are not counted.
func newScaler(a Axis, values, bounds [][]float64) *scaler {
	s := &scaler{scale: a.Scale, reverse: a.Reverse, lo: math.Inf(1), hi: math.Inf(-1)}
	for i, list := range slices.Concat(values, bounds) {
		for _, v := range list {
			if !s.drawable(v) {
				if i < len(values) && !math.IsNaN(v) {
					s.left++
				}
				continue
			}
			s.lo, s.hi = min(s.lo, v), max(s.hi, v)
			if s.scale == Rank {
				s.ranks = append(s.ranks, v)
			}
		}
	}
	fixed := a.Scale != Rank && a.Lo < a.Hi && s.drawable(a.Lo) && s.drawable(a.Hi)
	switch {
	case fixed:
		s.lo, s.hi = a.Lo, a.Hi
	case s.lo > s.hi && s.scale == Log:
		s.lo, s.hi = 1, 10
	case s.lo > s.hi:
		s.lo, s.hi = 0, 1
	default:
		s.room(a.Zero)
		s.lo, s.hi = max(s.lo, -largest), min(s.hi, largest)
		if s.scale == Log {
			s.lo = max(s.lo, 1/largest)
		}
	}
	if s.scale == Root && s.lo < 0 && s.hi > 0 {
		s.soft = max(-s.lo, s.hi) / 20
	}
	if s.scale == Rank {
		sort.Float64s(s.ranks)
		s.ranks = slices.Compact(s.ranks)
		if len(s.ranks) < 2 {
			s.scale, s.ranks = Linear, nil
		} else {
			s.lo, s.hi = s.ranks[0], s.ranks[len(s.ranks)-1]
		}
	}
	return s
}

// room widens a range so that no point lies on the frame, and a range without
// width so that it has one.
func (s *scaler) room(zero bool) {
	if zero && s.scale != Log {
		s.lo, s.hi = min(s.lo, 0), max(s.hi, 0)
	}
	if size := max(math.Abs(s.lo), math.Abs(s.hi)); s.hi-s.lo <= 1e-9*size || s.hi == s.lo {
		half := max(0.1*size, 1e-12)
		if size == 0 {
			half = 1
		}
		if s.scale == Log {
			s.lo, s.hi = s.lo/2, s.hi*2
		} else {
			s.lo, s.hi = s.lo-half, s.hi+half
		}
		return
	}
	switch s.scale {
	case Linear:
		pad := 0.04 * (s.hi - s.lo)
		if s.lo != 0 {
			s.lo -= pad
		}
		if s.hi != 0 {
			s.hi += pad
		}
	case Root:
		a, b := root(s.lo), root(s.hi)
		pad := 0.03 * (b - a)
		s.hi = square(b + pad)
		if s.lo < 0 {
			s.lo = square(a - pad)
		} else if a < 0.3*b {
			s.lo = 0
		}
	case Log:
		f := math.Pow(s.hi/s.lo, 0.03)
		if s.lo/f > 0 {
			s.lo /= f
		}
		s.hi *= f
	}
}

func root(v float64) float64   { return math.Copysign(math.Sqrt(math.Abs(v)), v) }
func square(v float64) float64 { return math.Copysign(v*v, v) }

func (s *scaler) map1(v float64) float64 {
	switch s.scale {
	case Root:
		return math.Copysign(math.Sqrt(math.Abs(v)+s.soft)-math.Sqrt(s.soft), v)
	case Log:
		return math.Log(v)
	case Rank:
		return s.rank(v)
	}
	return v
}

// rank is the place of v among the drawn values, between 0 and their number less
// one; values between two of them lie between.
func (s *scaler) rank(v float64) float64 {
	n := len(s.ranks)
	i := sort.SearchFloat64s(s.ranks, v)
	switch {
	case i == n:
		return float64(n - 1)
	case s.ranks[i] == v || i == 0:
		return float64(i)
	}
	return float64(i-1) + (v-s.ranks[i-1])/(s.ranks[i]-s.ranks[i-1])
}

// at gives the place of v, NaN when it has none.
func (s *scaler) at(v float64) float64 {
	if !s.drawable(v) {
		return math.NaN()
	}
	a, b := s.map1(s.lo), s.map1(s.hi)
	t := (s.map1(v) - a) / (b - a)
	if math.IsNaN(t) {
		return math.NaN()
	}
	if s.reverse {
		t = 1 - t
	}
	return min(max(t, -4), 5)
}

// within tells whether v lies inside the range.
func (s *scaler) within(v float64) bool { return s.drawable(v) && v >= s.lo && v <= s.hi }

func (s *scaler) note(axis string) string {
	if s.left == 0 {
		return ""
	}
	why := "not finite or too large to draw"
	if s.scale == Log {
		why = "not positive and finite, as a logarithmic axis needs"
	}
	return fmt.Sprintf("%s: values left out, %s: %d.", axis, why, s.left)
}
