package figure

import (
	"math"
	"sort"
	"strconv"
	"strings"
)

// ticks chooses marks by the length of the axis in pixels: about one every
// spacing pixels, at round numbers, all inside the range.
func (s *scaler) ticks(length, spacing float64) []Mark {
	switch s.scale {
	case Root, Log:
		return s.spaced(length, spacing)
	case Rank:
		return s.rankTicks(length, spacing)
	}
	return s.even(length, spacing)
}

func (s *scaler) even(length, spacing float64) []Mark {
	n := max(2, math.Floor(length/spacing))
	raw := (s.hi - s.lo) / n
	p := math.Pow(10, math.Floor(math.Log10(raw)))
	step := 10 * p
	for _, f := range []float64{1, 2, 2.5, 5} {
		if f*p >= raw*(1-1e-9) {
			step = f * p
			break
		}
	}
	if !(step > 0) || math.IsInf(step, 0) {
		return nil
	}
	var out []Mark
	first := math.Ceil(s.lo/step - 1e-9)
	for i := 0.0; i < 60; i++ {
		v := (first + i) * step
		if v > s.hi+1e-9*step {
			break
		}
		if s.drawable(v) {
			out = append(out, Mark{v, label(v, step)})
		}
	}
	return out
}

// spaced takes round numbers in order of roundness while they keep their
// distance, for axes on which even steps would crowd one end.
func (s *scaler) spaced(length, spacing float64) []Mark {
	var taken []float64
	free := func(v float64) bool {
		t := s.at(v)
		for _, w := range taken {
			if math.Abs(s.at(w)-t)*length < spacing {
				return false
			}
		}
		return true
	}
	if s.scale == Root && s.within(0) {
		taken = append(taken, 0)
	}
	top := max(math.Abs(s.lo), math.Abs(s.hi))
	for _, digits := range [][]float64{{1}, {5}, {2}, {3}, {7}, {1.5, 4}, {6, 8}} {
		for k := 0; k < 18; k++ {
			p := math.Pow(10, math.Floor(math.Log10(top))-float64(k))
			for _, d := range digits {
				for _, v := range []float64{d * p, -d * p} {
					if s.within(v) && free(v) {
						taken = append(taken, v)
					}
				}
			}
		}
	}
	sort.Float64s(taken)
	out := make([]Mark, len(taken))
	for i, v := range taken {
		out[i] = Mark{v, Number(v)}
	}
	return out
}

func (s *scaler) rankTicks(length, spacing float64) []Mark {
	n := int(max(2, math.Floor(length/spacing)))
	var out []Mark
	last := math.Inf(-1)
	for i := 0; i <= n; i++ {
		v := s.ranks[(len(s.ranks)-1)*i/n]
		if v != last && s.within(v) {
			out = append(out, Mark{v, Number(v)})
		}
		last = v
	}
	return out
}

func label(v, step float64) string {
	if math.Abs(v) < 1e-9*step {
		return "0"
	}
	if a := math.Abs(v); a >= 1e6 || step < 1e-5 {
		return Number(v)
	}
	decimals := max(0, int(math.Ceil(-math.Log10(step)-1e-9)))
	if m := step * math.Pow(10, float64(decimals)); math.Abs(m-math.Round(m)) > 1e-6 {
		decimals++
	}
	return minus(strconv.FormatFloat(v, 'f', decimals, 64))
}

// Number writes v with three digits that matter and a true minus sign; a dash
// for not-a-number.
func Number(v float64) string {
	switch {
	case math.IsNaN(v):
		return "\u2013"
	case math.IsInf(v, 1):
		return "\u221e"
	case math.IsInf(v, -1):
		return "\u2212\u221e"
	case v == 0:
		return "0"
	}
	a := math.Abs(v)
	if a >= 1e6 || a < 1e-4 {
		return minus(strconv.FormatFloat(v, 'e', 1, 64))
	}
	decimals := max(0, 2-int(math.Floor(math.Log10(a))))
	t := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Contains(t, ".") {
		t = strings.TrimRight(strings.TrimRight(t, "0"), ".")
	}
	return minus(t)
}

func minus(s string) string { return strings.ReplaceAll(s, "-", "\u2212") }
