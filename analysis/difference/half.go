package difference

import (
	"fmt"
	"math"

	"thinward/analysis/intensity"
)

// Fold is one of the two ways round of a cross-fitted half: the strength Z from
// one half of a position, and the pair whose member of that position comes
// from the other half. All are parallel to the pairs, NaN where a half has
// nothing. N counts the others.
type Fold struct {
	Z, Thin, Thick    []float64
	VarThin, VarThick []float64
	N                 int
}

// Halved is a strength axis from halves of one position, both ways round. A
// size is estimated in each fold and averaged.
type Halved struct {
	Axis  Axis
	Folds [2]Fold
}

// Half splits one position of the pairs by raw index (intensity.Halves with
// key) and returns the strength from each half with the pair taken from the
// other. A slope read off AxisHalfThin errs upward, off AxisHalfThick downward, by what
// the position deviates and the other does not, which its halves share; the two make the
// bracket of a crystal that stands alone. A model with a curb takes these deviations
// for a curb, and its exchange errs on no known side. In matched pairs both
// members come from the other half, seen at the same angles. Strengths are over
// the half's own means of the pairs' shells. Reflections with one raw index
// are NaN. Errors: another axis, no reflection with two raw indices.
func (p *Pairs) Half(axis Axis, key uint64) (*Halved, error) {
	if axis != AxisHalfThin && axis != AxisHalfThick {
		return nil, fmt.Errorf("axis %s is no half of a position", axis)
	}
	h := &Halved{Axis: axis}
	for k := range h.Folds {
		own, other := p.halves(axis, key, uint8(k))
		h.Folds[k] = p.fold(axis, own, other)
		if h.Folds[k].N == 0 {
			return nil, fmt.Errorf("no reflection of the pairs has two raw indices to split")
		}
	}
	return h, nil
}

// halves returns what half k of the axis' position says of each reflection and
// what the pairs say without it.
func (p *Pairs) halves(axis Axis, key uint64, k uint8) (own, other *Pairs) {
	s := &p.source
	if p.Matched {
		half := intensity.Halves(s.matchedThin(), key)
		own, other = &Pairs{source: *s}, &Pairs{source: *s}
		own.average(func(i int) bool { return half[i] == k })
		other.average(func(i int) bool { return half[i] != k })
		return own, other
	}
	n := s.catalogue.Len()
	whole, split := s.thick, s.thin
	if axis == AxisHalfThick {
		whole, split = s.thin, s.thick
	}
	a, b := intensity.MergeHalves(n, split, key)
	if k == 1 {
		a, b = b, a
	}
	rest := intensity.Merge(n, whole)
	own, other = &Pairs{source: *s}, &Pairs{source: *s}
	if axis == AxisHalfThin {
		own.join(a, a)
		other.join(b, rest)
	} else {
		own.join(a, a)
		other.join(rest, b)
	}
	return own, other
}

// matchedThin is the thin side of the matched singles, for splitting.
func (s *source) matchedThin() *intensity.Scaled {
	m := &intensity.Scaled{Unique: make([]int32, len(s.single)), Raw: make([]int32, len(s.single))}
	for i, x := range s.single {
		m.Unique[i], m.Raw[i] = x.thin.unique, x.thin.raw
	}
	return m
}

func (p *Pairs) fold(axis Axis, own, other *Pairs) Fold {
	n := p.Len()
	f := Fold{Z: make([]float64, n), Thin: make([]float64, n), Thick: make([]float64, n), VarThin: make([]float64, n), VarThick: make([]float64, n)}
	z := own.Thin
	if axis == AxisHalfThick {
		z = own.Thick
	}
	sum, count := make([]float64, p.Shells), make([]float64, p.Shells)
	a, b := 0, 0
	for i, u := range p.Unique {
		for a < own.Len() && own.Unique[a] < u {
			a++
		}
		for b < other.Len() && other.Unique[b] < u {
			b++
		}
		if a == own.Len() || b == other.Len() || own.Unique[a] != u || other.Unique[b] != u {
			for _, col := range [][]float64{f.Z, f.Thin, f.Thick, f.VarThin, f.VarThick} {
				col[i] = math.NaN()
			}
			continue
		}
		f.Z[i], f.Thin[i], f.Thick[i] = z[a], other.Thin[b], other.Thick[b]
		f.VarThin[i], f.VarThick[i] = other.VarThin[b], other.VarThick[b]
		sum[p.Shell[i]] += z[a] / p.Epsilon[i]
		count[p.Shell[i]]++
		f.N++
	}
	for i, k := range p.Shell {
		f.Z[i] /= p.Epsilon[i] * sum[k] / count[k]
	}
	return f
}
