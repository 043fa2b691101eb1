package scaling

import (
	"context"
	"fmt"
	"math"
	"slices"

	"thinward/analysis/internal/parallel"
)

// chunkRows is the least number of observations in a unit of parallel work. It
// is fixed, so that sums are formed in one order whatever the workers.
const chunkRows = 32768

// table holds the observations sorted by (unique, raw, position), so that every
// pass runs through memory in order and meets each reflection as one block.
type table struct {
	order   []int32   // row of the input
	y       []float64 // intensity
	excess  []float64 // reported variance less the law's value at the observed intensity
	u       []float64 // place within the spline interval
	cell    []int16
	pos     []int16
	rawHead []bool // first observation of a raw index

	first []int32 // start of each reflection in the above, one more than reflections
	id    []int32 // its unique number
	s2    []float64
	used  []bool // reflections that determine the scale; nil means all

	chunk []int // boundaries in reflections
	curve []curveAxis
	laws  []varianceLaw
}

// curveAxis is the scale curve of one position; flat means one constant.
type curveAxis struct {
	splineAxis
	flat   bool
	frames bool // abscissa is the frame number, the curve stands alone
}

// width is the number of coefficients kept in the parameter vector; a flat curve
// keeps four so that all observations are handled alike, three of them fixed.
func (c curveAxis) width() int {
	if c.flat {
		return 4
	}
	return c.functions()
}

func (c curveAxis) basis(u float64) (b0, b1, b2, b3 float64) {
	if c.flat {
		return 1, 0, 0, 0
	}
	return cubicBasis(u)
}

// newTable sorts and copies the observations.
func newTable(ctx context.Context, in *Input, curve []curveAxis, laws []varianceLaw, workers int) (*table, error) {
	n := in.Len()
	t := &table{curve: curve, laws: laws}
	t.sort(in)
	t.y, t.excess, t.u = make([]float64, n), make([]float64, n), make([]float64, n)
	t.cell, t.pos, t.rawHead = make([]int16, n), make([]int16, n), make([]bool, n)
	t.cut()
	err := parallel.For(ctx, t.chunks(), workers, func(_ context.Context, c int) error {
		for g := t.chunk[c]; g < t.chunk[c+1]; g++ {
			if err := t.fill(in, g); err != nil {
				return err
			}
		}
		return nil
	})
	return t, err
}

// fill orders and copies the observations of reflection g.
func (t *table) fill(in *Input, g int) error {
	lo, hi := t.first[g], t.first[g+1]
	sortBlock(in, t.order[lo:hi])
	lead := t.order[lo]
	sum := 0.0
	for k := lo; k < hi; k++ {
		row := t.order[k]
		if d := math.Abs(in.S2[row] - in.S2[lead]); !(d <= 1e-6*in.S2[lead]+1e-12) {
			return fmt.Errorf("scaling: rows %d and %d are one reflection but have s^2 %g and %g", lead, row, in.S2[lead], in.S2[row])
		}
		sum += in.S2[row]
		t.y[k] = in.I[row]
		p := in.Position[row]
		t.pos[k] = int16(p)
		t.excess[k] = in.Var[row] - t.laws[p].at(in.I[row])
		t.rawHead[k] = k == lo || in.Raw[row] != in.Raw[t.order[k-1]]
		if !t.curve[p].flat {
			c, u := t.curve[p].locate(in.Phi[row])
			t.cell[k], t.u[k] = int16(c), u
		}
	}
	t.s2[g] = sum / float64(hi-lo)
	return nil
}

// sort fills order, first and id: a counting sort by unique number when numbers
// are dense, then a comparison sort within each reflection.
func (t *table) sort(in *Input) {
	n := in.Len()
	t.order = make([]int32, n)
	if top := int(slices.Max(in.Unique)); top < 4*n+1024 {
		next := make([]int32, top+2)
		for _, h := range in.Unique {
			next[h+1]++
		}
		groups := 0
		for h := 1; h < len(next); h++ {
			if next[h] > 0 {
				groups++
			}
			next[h] += next[h-1]
		}
		t.reserve(groups)
		for i, h := range in.Unique {
			t.order[next[h]] = int32(i)
			next[h]++
		}
	} else {
		for i := range t.order {
			t.order[i] = int32(i)
		}
		slices.SortStableFunc(t.order, func(a, b int32) int { return int(in.Unique[a]) - int(in.Unique[b]) })
	}
	for k, row := range t.order {
		if k == 0 || in.Unique[row] != in.Unique[t.order[k-1]] {
			t.first = append(t.first, int32(k))
			t.id = append(t.id, in.Unique[row])
		}
	}
	t.first = append(t.first, int32(n))
	t.s2 = make([]float64, len(t.id))
}

func (t *table) reserve(groups int) {
	t.first = make([]int32, 0, groups+1)
	t.id = make([]int32, 0, groups)
}

func sortBlock(in *Input, block []int32) {
	less := func(a, b int32) int {
		if d := int(in.Raw[a]) - int(in.Raw[b]); d != 0 {
			return d
		}
		if d := int(in.Position[a]) - int(in.Position[b]); d != 0 {
			return d
		}
		return int(a) - int(b)
	}
	if len(block) > 24 {
		slices.SortFunc(block, less)
		return
	}
	for i := 1; i < len(block); i++ {
		for j := i; j > 0 && less(block[j], block[j-1]) < 0; j-- {
			block[j], block[j-1] = block[j-1], block[j]
		}
	}
}

// cut sets the chunk boundaries.
func (t *table) cut() {
	t.chunk = []int{0}
	from := int32(0)
	for g := range t.id {
		if t.first[g+1]-from >= chunkRows {
			t.chunk = append(t.chunk, g+1)
			from = t.first[g+1]
		}
	}
	if t.chunk[len(t.chunk)-1] != len(t.id) {
		t.chunk = append(t.chunk, len(t.id))
	}
}

func (t *table) chunks() int { return len(t.chunk) - 1 }
