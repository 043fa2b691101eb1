package intensity

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// span is a run order[from:to] of rows that become one observation.
type span struct{ from, to int32 }

// spansOfIndex calls f with each run of rows that carry one index.
func spansOfIndex(c *Columns, order []int32, f func(from, to int)) {
	for from := 0; from < len(order); {
		to := from + 1
		for to < len(order) && c.sameIndex(order[from], order[to]) {
			to++
		}
		f(from, to)
		from = to
	}
}

// joinCopies joins rows of equal index, intensity and sigma. It reorders order.
func joinCopies(c *Columns, order []int32, a *RowAudit) *Columns {
	frame := func(r int32) int32 {
		if c.Frame == nil {
			return 0
		}
		return c.Frame[r]
	}
	spans := make([]span, 0, a.Rows-a.Copies)
	far := 0
	spansOfIndex(c, order, func(from, to int) {
		group := order[from:to]
		slices.SortFunc(group, func(p, r int32) int {
			return cmp.Or(cmp.Compare(c.I[p], c.I[r]), cmp.Compare(c.Sigma[p], c.Sigma[r]), cmp.Compare(frame(p), frame(r)), cmp.Compare(p, r))
		})
		first := len(spans)
		for i := from; i < to; {
			j := i + 1
			for j < to && c.I[order[j]] == c.I[order[i]] && c.Sigma[order[j]] == c.Sigma[order[i]] {
				if int64(frame(order[j]))-int64(frame(order[j-1])) > 3 {
					far++
				}
				j++
			}
			spans = append(spans, span{int32(i), int32(j)})
			i = j
		}
		slices.SortFunc(spans[first:], func(p, r span) int {
			return cmp.Or(cmp.Compare(frame(order[p.from]), frame(order[r.from])), cmp.Compare(order[p.from], order[r.from]))
		})
	})
	if far > 0 {
		a.Warnings = append(a.Warnings, Warning{Code: "copies-far", Text: fmt.Sprintf(
			"%d copies lie more than three frames from the one before them and were joined all the same; their angle is a mean over distant frames", far)})
	}
	if c.Phi != nil {
		a.PhiMean = "plain"
	}
	return build(c, order, spans, func(out *Columns, o int, rows []int32) {
		out.I[o], out.Sigma[o] = c.I[rows[0]], c.Sigma[rows[0]]
		out.placeMiddle(c, o, rows)
	})
}

// joinSlices sums runs of one index on consecutive frames.
func joinSlices(c *Columns, order []int32, a *RowAudit) *Columns {
	spans := make([]span, 0, a.Rows-a.Neighbours)
	spansOfIndex(c, order, func(from, to int) {
		for i := from; i < to; {
			j := i + 1
			for j < to && int64(c.Frame[order[j]])-int64(c.Frame[order[j-1]]) == 1 {
				j++
			}
			spans = append(spans, span{int32(i), int32(j)})
			i = j
		}
	})
	if c.Phi != nil {
		a.PhiMean = "plain"
		if c.Partiality != nil {
			a.PhiMean = "partiality"
		}
	}
	out := build(c, order, spans, func(out *Columns, o int, rows []int32) {
		sum, square := 0.0, 0.0
		for _, r := range rows {
			sum += c.I[r]
			square += c.Sigma[r] * c.Sigma[r]
		}
		out.I[o], out.Sigma[o] = sum, math.Sqrt(square)
		out.placeMiddle(c, o, rows)
		if c.Partiality == nil {
			return
		}
		share, angle := 0.0, 0.0
		for _, r := range rows {
			share += c.Partiality[r]
			if c.Phi != nil {
				angle += c.Partiality[r] * (c.Phi[r] - c.Phi[rows[0]])
			}
		}
		out.Partiality[o] = share
		if share < 0.95 {
			a.Incomplete++
		}
		if c.Phi != nil && share > 0 {
			out.Phi[o] = c.Phi[rows[0]] + angle/share
		}
	})
	if a.Incomplete > 0 {
		a.Warnings = append(a.Warnings, Warning{Code: "slices-incomplete", Text: fmt.Sprintf(
			"%d of %d summed observations have recorded shares that add to less than 0.95; they were kept as they are", a.Incomplete, out.Len())})
	}
	return out
}

func build(c *Columns, order []int32, spans []span, fill func(out *Columns, o int, rows []int32)) *Columns {
	n := len(spans)
	out := &Columns{H: make([]int16, n), K: make([]int16, n), L: make([]int16, n), I: make([]float64, n), Sigma: make([]float64, n)}
	if c.Phi != nil {
		out.Phi = make([]float64, n)
	}
	if c.Frame != nil {
		out.Frame = make([]int32, n)
	}
	if c.Partiality != nil {
		out.Partiality = make([]float64, n)
	}
	for o, s := range spans {
		rows := order[s.from:s.to]
		out.H[o], out.K[o], out.L[o] = c.H[rows[0]], c.K[rows[0]], c.L[rows[0]]
		fill(out, o, rows)
	}
	return out
}

// placeMiddle gives observation o the mean angle and partiality and the middle
// frame of rows, which are in the order of frames.
func (out *Columns) placeMiddle(c *Columns, o int, rows []int32) {
	n := float64(len(rows))
	if c.Phi != nil {
		first, sum := c.Phi[rows[0]], 0.0
		for _, r := range rows {
			sum += c.Phi[r] - first
		}
		out.Phi[o] = first + sum/n
	}
	if c.Frame != nil {
		out.Frame[o] = c.Frame[rows[(len(rows)-1)/2]]
	}
	if c.Partiality != nil {
		sum := 0.0
		for _, r := range rows {
			sum += c.Partiality[r]
		}
		out.Partiality[o] = sum / n
	}
}
