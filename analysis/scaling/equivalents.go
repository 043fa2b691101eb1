package scaling

import "math"

// equivalents holds, for one position, the observations that have company: y is
// I/g, p is v'/g^2, q the squared intensity, both on the common scale; first
// marks where each reflection begins, with one entry more than reflections.
type equivalents struct {
	y, p, q []float64
	first   []int
}

func (e *equivalents) reflections() int { return max(0, len(e.first)-1) }

// collectEquivalents gathers them for all positions, every n-th reflection where
// there are very many.
func collectEquivalents(in *Input, fit *Fit) []*equivalents {
	out := make([]*equivalents, in.Positions)
	count := make([]int, in.Positions)
	for p := range out {
		out[p] = &equivalents{}
	}
	for _, p := range in.Position {
		count[p]++
	}
	from := 0
	for from < len(fit.order) {
		h := in.Unique[fit.order[from]]
		to := from
		for to < len(fit.order) && in.Unique[fit.order[to]] == h {
			to++
		}
		block := fit.order[from:to]
		q := math.Max(0, fit.J[h]*fit.J[h]-fit.JVar[h])
		for p := range out {
			if stride := int32(1 + count[p]/noiseRows); h%stride == 0 {
				out[p].take(in, fit, block, int32(p), q)
			}
		}
		from = to
	}
	for _, e := range out {
		if len(e.first) > 0 {
			e.first = append(e.first, len(e.y))
		}
	}
	return out
}

func (e *equivalents) take(in *Input, fit *Fit, block []int32, p int32, q float64) {
	n := 0
	for _, row := range block {
		if in.Position[row] == p {
			n++
		}
	}
	if n < 2 {
		return
	}
	e.first = append(e.first, len(e.y))
	for _, row := range block {
		if in.Position[row] == p {
			g := fit.Scale[row]
			e.y = append(e.y, in.I[row]/g)
			e.p = append(e.p, fit.VarExpected[row]/(g*g))
			e.q = append(e.q, q)
		}
	}
}
