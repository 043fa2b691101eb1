package scaling

import (
	"context"
	"math"

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

// obs is one observation while its reflection is worked on.
type obs struct {
	basis          [4]float64
	g, v, w, r     float64 // scale, independent variance, weight, residual
	vAll, vExp, tw float64 // variance with the shared part, v', t weight
	q, hw          float64 // weight in the gradient and in the normal matrix
	gj             float64 // expected intensity
	p, at          int
}

// worker holds what one chunk needs.
type worker struct {
	t      *table
	s      *state
	kind   passKind
	joint  []bool
	cellAt []int
	sums   *sums

	obs     []obs
	heads   []int
	damp    []float64 // exp(-2 B s^2) by position
	shareB2 float64

	dense   []float64 // projection vector of the reflection
	touched []int
	raw     []float64
	rawAt   []int
	isSet   []bool
	byPos   []posSums
	j       float64 // intensity that goes with the residuals
}

type posSums struct {
	n            int
	d, num, mean float64
}

func (w *worker) prepare() {
	m := w.s.size()
	w.dense = make([]float64, m)
	w.isSet = make([]bool, m)
	w.damp = make([]float64, len(w.t.curve))
	w.byPos = make([]posSums, len(w.t.curve))
	w.shareB2 = w.s.shared * w.s.leastB2()
}

// reflection works on reflection g.
func (w *worker) reflection(g int) {
	lo, hi := int(w.t.first[g]), int(w.t.first[g+1])
	w.obs = grown(w.obs, hi-lo)
	w.load(g, lo)
	if w.kind.cold {
		w.eliminate(g, math.Max(w.s.j[g], 0))
		w.load(g, lo)
	}
	jw := math.Max(w.s.j[g], 0) // the intensity behind the weights
	d := w.eliminate(g, jw)
	if w.t.used != nil && !w.t.used[g] {
		return
	}
	if !(d > 0) {
		return
	}
	w.collect(g)
	if w.kind.noise {
		w.noise(jw)
	}
}

// load computes scale, variances and weights of all observations of reflection g.
func (w *worker) load(g, lo int) {
	t, s := w.t, w.s
	for p := range w.damp {
		w.damp[p] = math.Exp(-2 * s.theta[s.indexB(t, p)] * t.s2[g])
	}
	j := s.j[g]
	share := w.shareB2
	gauss := math.IsInf(s.nu, 1)
	for k := range w.obs {
		o := &w.obs[k]
		i := lo + k
		o.p = int(t.pos[i])
		b0, b1, b2, b3 := t.curve[o.p].basis(t.u[i])
		o.basis = [4]float64{b0, b1, b2, b3}
		o.at = s.off[o.p] + int(t.cell[i])
		th := s.theta[o.at : o.at+4 : o.at+4]
		o.g = math.Exp(th[0]*b0+th[1]*b1+th[2]*b2+th[3]*b3) * w.damp[o.p]
		gj := o.g * j
		x := gj
		if x < 0 {
			x = 0
		}
		if s.report {
			o.vExp = t.excess[i] + t.laws[o.p].at(t.y[i])
			o.v, o.vAll = o.vExp, o.vExp
		} else {
			law := t.laws[o.p].at(x)
			o.vExp = t.excess[i] + law
			if o.vExp < floorShare*law {
				o.vExp = floorShare * law
			}
			o.vAll = s.a2[o.p]*o.vExp + s.b2[o.p]*x*x
			o.v = o.vAll - share*x*x
		}
		o.tw = 1
		if !gauss {
			e := t.y[i] - gj
			o.tw = (s.nu + 1) / (s.nu + e*e/o.vAll)
		}
		o.w = o.tw / o.v
	}
}

// eliminate renews J of reflection g and the residuals, and returns the
// information on J. Observations of one raw index share a deviation of variance
// (tau J)^2, so their covariance is diagonal plus one outer product (Woodbury).
func (w *worker) eliminate(g int, jw float64) float64 {
	t, s := w.t, w.s
	lo := int(t.first[g])
	shared := w.shareB2 * jw * jw
	w.heads = w.heads[:0]
	var d, num float64
	w.eachRaw(lo, func(part []obs, from int) {
		w.heads = append(w.heads, from)
		var dr, nr float64
		for k := range part {
			o := &part[k]
			dr += o.w * o.g * o.g
			nr += o.w * o.g * t.y[lo+from+k]
		}
		keep := 1 / (1 + shared*dr)
		d += keep * dr
		num += keep * nr
	})
	w.heads = append(w.heads, len(w.obs))
	s.dj[g] = d
	old := s.j[g]
	j := old
	if d > 0 {
		j = num / d
	}
	w.j = j
	s.j[g] = old + (j-old)*w.s.relax
	for k := range w.obs {
		o := &w.obs[k]
		o.gj = o.g * j
		o.r = t.y[lo+k] - o.gj
	}
	return d
}

func (w *worker) eachRaw(lo int, f func(part []obs, from int)) {
	from := 0
	for k := 1; k <= len(w.obs); k++ {
		if k == len(w.obs) || w.t.rawHead[lo+k] {
			f(w.obs[from:k], from)
			from = k
		}
	}
}

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
