package scaling

import (
	"context"

	"gonum.org/v1/gonum/floats"

	"thinward/analysis/internal/parallel"
)

// passKind says what a pass collects beside the gradient.
type passKind struct {
	hessian bool // the normal matrix
	exact   bool // with the derivative of the t score in place of the weight
	meat    bool // the sum of squared scores of whole reflections
	noise   bool // scoring sums of the noise model in the weights
	cold    bool // J is not that of these parameters: find it before anything is weighed with it
	stride  int  // only every n-th reflection; 0 and 1 mean all
}

// cellTerms counts the sums kept for one spline interval of one position: the
// upper half of a 5 by 5 block (four functions and B), then 5 of the gradient.
const cellTerms = 20

// sums is what a pass adds up over reflections.
type sums struct {
	cells []float64 // cellTerms for each interval of each position
	outer []float64 // what is off the interval blocks, to be symmetrised
	meat  []float64
	noise []noiseSums
	// numerator and denominator of the shared share
	sharedNum, sharedDen float64
	weight, curvature    float64 // sums of t weights and of derivatives of the t score
	clusters             float64 // reflections that carry information
}

// noiseSums holds score and information in (a^2, b^2) of one position.
type noiseSums struct{ gA, gB, hAA, hAB, hBB, df float64 }

func newSums(cells, size, positions int, kind passKind) *sums {
	s := &sums{cells: make([]float64, cells*cellTerms), noise: make([]noiseSums, positions)}
	if kind.hessian {
		s.outer = make([]float64, size*size)
	}
	if kind.meat {
		s.meat = make([]float64, size*size)
	}
	return s
}

func (s *sums) add(o *sums) {
	floats.Add(s.cells, o.cells)
	if s.outer != nil {
		floats.Add(s.outer, o.outer)
	}
	if s.meat != nil {
		floats.Add(s.meat, o.meat)
	}
	for p := range s.noise {
		a, b := &s.noise[p], &o.noise[p]
		a.gA += b.gA
		a.gB += b.gB
		a.hAA += b.hAA
		a.hAB += b.hAB
		a.hBB += b.hBB
		a.df += b.df
	}
	s.sharedNum += o.sharedNum
	s.sharedDen += o.sharedDen
	s.weight += o.weight
	s.curvature += o.curvature
	s.clusters += o.clusters
}

// pass runs over all reflections once: it renews J in closed form and collects
// gradient, normal matrix and noise sums. Chunks are fixed and their sums are
// added in order.
func (t *table) pass(ctx context.Context, s *state, kind passKind, joint []bool, workers int) (*sums, error) {
	cellAt, cells := t.cellOffsets()
	parts := make([]*sums, t.chunks())
	err := parallel.For(ctx, t.chunks(), workers, func(_ context.Context, c int) error {
		w := &worker{t: t, s: s, kind: kind, joint: joint, cellAt: cellAt, sums: newSums(cells, s.size(), len(t.curve), kind)}
		w.prepare()
		step := max(1, kind.stride)
		for g := (t.chunk[c] + step - 1) / step * step; g < t.chunk[c+1]; g += step {
			w.reflection(g)
		}
		parts[c] = w.sums
		return nil
	})
	if err != nil {
		return nil, err
	}
	total := parts[0]
	for _, p := range parts[1:] {
		total.add(p)
	}
	return total, nil
}

func (t *table) cellOffsets() (at []int, n int) {
	at = make([]int, len(t.curve))
	for p, c := range t.curve {
		at[p] = n
		if c.flat {
			n++
		} else {
			n += c.cells
		}
	}
	return at, n
}
