package cif

import (
	"math"
	"testing"

	"thinward/io/internal/text"
)

func TestBounds(t *testing.T) {
	nan := math.NaN()
	for _, tt := range []struct {
		x      []float64
		lo, hi float64
	}{{nil, 0, 0}, {[]float64{nan}, 0, 0}, {[]float64{nan, 3, nan}, 3, 3}, {[]float64{5, 4, nan, 3}, 3, 5}, {[]float64{-1, nan, 2}, -1, 2}} {
		if lo, hi := bounds(tt.x); lo != tt.lo || hi != tt.hi {
			t.Errorf("%v: %g to %g", tt.x, lo, hi)
		}
	}
	for _, tt := range []struct {
		x      []int16
		lo, hi int
	}{{nil, 0, 0}, {[]int16{text.NullIndex}, 0, 0}, {[]int16{7, text.NullIndex, -3}, -3, 7}, {[]int16{math.MaxInt16}, math.MaxInt16, math.MaxInt16}, {[]int16{-math.MaxInt16}, -math.MaxInt16, -math.MaxInt16}} {
		if lo, hi := indexBounds(tt.x); lo != tt.lo || hi != tt.hi {
			t.Errorf("%v: %d to %d", tt.x, lo, hi)
		}
	}
}
