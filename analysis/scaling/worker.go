package scaling

import "math"

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
