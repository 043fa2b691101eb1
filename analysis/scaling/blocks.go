package scaling

import (
	"math"

	"gonum.org/v1/gonum/floats"
)

// collect adds reflection g to gradient, normal matrix and scores.
func (w *worker) collect(g int) {
	j := w.j
	jw := math.Max(j, 0)
	shared := w.shareB2 * jw * jw
	slope := -2 * w.t.s2[g]
	d := 0.0
	for h := 0; h+1 < len(w.heads); h++ {
		part := w.obs[w.heads[h]:w.heads[h+1]]
		w.pull(part, shared)
		if w.kind.hessian {
			d += w.rawBlock(part, j, slope, shared)
		}
	}
	w.gradient(j, slope)
	if w.kind.hessian {
		w.addOuter(w.sums.outer, -1/d)
	}
	if w.kind.meat {
		w.score(j, slope)
		w.addOuter(w.sums.meat, 1)
	}
	if len(w.obs) > 1 {
		w.sums.clusters++
	}
}

// leastCurvature keeps every observation's part of the exact normal matrix
// positive; the derivative of Student's score is negative for outliers.
const leastCurvature = 0.05

// pull computes the gradient weight of each observation of one raw index, and
// its weight in the normal matrix: the weight itself, or in the exact matrix the
// derivative of the score, in which the t weight moves with the residual.
func (w *worker) pull(part []obs, shared float64) {
	var dr, sr float64
	for k := range part {
		o := &part[k]
		dr += o.w * o.g * o.g
		sr += o.w * o.g * o.r
	}
	kappa := shared / (1 + shared*dr)
	nu := w.s.nu
	gauss := math.IsInf(nu, 1)
	for k := range part {
		o := &part[k]
		own := o.r - kappa*o.g*sr
		o.q = o.w * own
		o.hw = o.w
		if gauss {
			w.sums.weight++
			w.sums.curvature++
			continue
		}
		e := nu + o.r*o.r/o.vAll
		c := o.tw - 2*(nu+1)*o.r*own/(o.vAll*e*e)
		w.sums.weight += o.tw
		w.sums.curvature += c
		if w.kind.exact {
			o.hw = math.Max(c, leastCurvature) / o.v
		}
	}
}

func (w *worker) gradient(j, slope float64) {
	for k := range w.obs {
		o := &w.obs[k]
		c := w.cell(o)
		f := o.q * o.g * j
		c[15] += f * o.basis[0]
		c[16] += f * o.basis[1]
		c[17] += f * o.basis[2]
		c[18] += f * o.basis[3]
		c[19] += f * slope
	}
}

func (w *worker) cell(o *obs) []float64 {
	at := (w.cellAt[o.p] + o.at - w.s.off[o.p]) * cellTerms
	return w.sums.cells[at : at+cellTerms : at+cellTerms]
}

// rawBlock adds the part of the normal matrix that belongs to one raw index,
// lays its share of the projection vector into dense and returns its information
// on J.
func (w *worker) rawBlock(part []obs, j, slope, shared float64) float64 {
	dr := 0.0
	for k := range part {
		dr += part[k].hw * part[k].g * part[k].g
	}
	kappa := shared / (1 + shared*dr)
	keep := 1 - kappa*dr
	alone := len(part) == 1
	w.raw, w.rawAt = w.raw[:0], w.rawAt[:0]
	for k := range part {
		o := &part[k]
		c := w.cell(o)
		f := o.hw * o.g * o.g * j
		a := f * j
		if alone {
			a *= keep
		}
		b := &o.basis
		for i, at := 0, 0; i < 4; i++ {
			ab := a * b[i]
			for l := i; l < 4; l++ {
				c[at] += ab * b[l]
				at++
			}
			c[10+i] += ab * slope
		}
		c[14] += a * slope * slope
		n := w.s.indexB(w.t, o.p)
		if !alone && kappa > 0 {
			w.raw = append(w.raw, f*b[0], f*b[1], f*b[2], f*b[3], f*slope)
			w.rawAt = append(w.rawAt, o.at, o.at+1, o.at+2, o.at+3, n)
		}
		f *= keep
		for i := range 4 {
			w.lay(o.at+i, f*b[i])
		}
		w.lay(n, f*slope)
	}
	m := w.s.size()
	for i, a := range w.rawAt {
		f := -kappa * w.raw[i]
		row := w.sums.outer[a*m : (a+1)*m]
		for l, b := range w.rawAt {
			row[b] += f * w.raw[l]
		}
	}
	return keep * dr
}

func (w *worker) lay(i int, v float64) {
	if !w.isSet[i] {
		w.isSet[i] = true
		w.touched = append(w.touched, i)
	}
	w.dense[i] += v
}

// score lays the score of the whole reflection into dense.
func (w *worker) score(j, slope float64) {
	for k := range w.obs {
		o := &w.obs[k]
		f := o.q * o.g * j
		for i := range 4 {
			w.lay(o.at+i, f*o.basis[i])
		}
		w.lay(w.s.indexB(w.t, o.p), f*slope)
	}
}

// addOuter adds f dense dense' to dst and clears dense.
func (w *worker) addOuter(dst []float64, f float64) {
	m := len(w.dense)
	if 3*len(w.touched) > m {
		for _, i := range w.touched {
			floats.AddScaled(dst[i*m:(i+1)*m], f*w.dense[i], w.dense)
		}
	} else {
		for _, i := range w.touched {
			row := dst[i*m : (i+1)*m]
			a := f * w.dense[i]
			for _, l := range w.touched {
				row[l] += a * w.dense[l]
			}
		}
	}
	for _, i := range w.touched {
		w.dense[i], w.isSet[i] = 0, false
	}
	w.touched = w.touched[:0]
}
