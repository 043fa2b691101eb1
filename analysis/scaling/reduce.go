package scaling

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// blockKind says what a set of reduced parameters describes.
type blockKind int

const (
	commonCurve   blockKind = iota // c(phi) of a connected set
	relativeCurve                  // d_p(phi)
	ownCurve                       // a curve against frame number
)

// curveBlock is a run of reduced parameters that form one curve; positions are
// those whose observations tell how large it is.
type curveBlock struct {
	kind      blockKind
	from, to  int
	positions []int
}

// freedom says which curves are free; a curve that the data do not fix is taken
// away and the fit goes on.
type freedom struct {
	common   bool
	relative []bool // also curves against frame number
}

// reduction maps the free parameters eta to theta = T eta: it holds gauge, model
// and the constancy of curves. prior is the penalty in theta.
type reduction struct {
	t      *mat.Dense
	prior  *mat.SymDense
	blocks []curveBlock
	cols   [][]entry
	size   int
}

type entry struct {
	row int
	v   float64
}

// reductionInput is what a reduction is made from.
type reductionInput struct {
	table *table
	state *state
	use   []usage
	over  *overlap
	set   *Settings
}

func (in *reductionInput) build(free freedom) *reduction {
	r := &reduction{size: in.state.size()}
	r.prior = mat.NewSymDense(r.size, nil)
	for base := range in.over.component {
		if in.over.component[base] == base {
			in.addSet(r, base, free)
		}
	}
	if len(r.cols) > 0 {
		r.t = mat.NewDense(r.size, len(r.cols), nil)
		for c, col := range r.cols {
			for _, e := range col {
				r.t.Set(e.row, c, e.v)
			}
		}
	}
	r.cols = nil
	return r
}

// addSet adds the parameters of one connected set of positions, whose lowest
// member fixes the gauge.
func (in *reductionInput) addSet(r *reduction, base int, free freedom) {
	var curved []int
	for p, c := range in.over.component {
		if a := in.table.curve[p]; c == base && !a.flat && !a.frames && in.over.n[p] > 0 {
			curved = append(curved, p)
		}
	}
	if len(curved) > 0 && free.common {
		ref := curved[0]
		from := len(r.cols)
		r.addCentred(in.use[ref].mean, in.offsets(curved))
		r.blocks = append(r.blocks, curveBlock{commonCurve, from, len(r.cols), curved})
		in.ridge(r, ref, in.set.RidgeLnK)
	}
	withB := in.set.Model == Full || in.set.Model == BOnly
	for p, c := range in.over.component {
		if c != base || in.over.n[p] == 0 {
			continue
		}
		in.addPosition(r, p, base, curved, free)
		if withB && p != base {
			r.cols = append(r.cols, []entry{{in.state.indexB(in.table, p), 1}})
		}
	}
}

func (in *reductionInput) addPosition(r *reduction, p, base int, curved []int, free freedom) {
	a := in.table.curve[p]
	off := in.state.off[p]
	from := len(r.cols)
	switch {
	case a.frames && free.relative[p]:
		r.addCentred(in.use[p].mean, []int{off})
		r.blocks = append(r.blocks, curveBlock{ownCurve, from, len(r.cols), []int{p}})
		in.ridge(r, p, in.set.RidgeLnK)
	case !a.flat && !a.frames && p != curved[0] && free.relative[p]:
		for i := range a.functions() {
			r.cols = append(r.cols, []entry{{off + i, 1}})
		}
		r.blocks = append(r.blocks, curveBlock{relativeCurve, from, len(r.cols), []int{p}})
		in.tie(r, p, curved[0])
		return
	}
	if p == base {
		return
	}
	if a.flat {
		r.cols = append(r.cols, []entry{{off, 1}})
		return
	}
	col := make([]entry, a.functions())
	for i := range col {
		col[i] = entry{off + i, 1}
	}
	r.cols = append(r.cols, col)
}

func (in *reductionInput) offsets(ps []int) []int {
	out := make([]int, len(ps))
	for i, p := range ps {
		out[i] = in.state.off[p]
	}
	return out
}

// addCentred adds curves whose mean over the observations is 0: an orthonormal
// basis of the complement of the mean row (Householder 1958), laid at each offset.
func (r *reduction) addCentred(mean []float64, offsets []int) {
	n := len(mean)
	v := append([]float64(nil), mean...)
	norm := 0.0
	for _, x := range v {
		norm += x * x
	}
	v[0] += math.Copysign(math.Sqrt(norm), v[0])
	vv := 0.0
	for _, x := range v {
		vv += x * x
	}
	for c := 1; c < n; c++ {
		var col []entry
		for i := range n {
			e := -2 * v[i] * v[c] / vv
			if i == c {
				e++
			}
			for _, off := range offsets {
				col = append(col, entry{off + i, e})
			}
		}
		r.cols = append(r.cols, col)
	}
}

// ridge pulls the curve of position p to a constant: deviations of the
// coefficients from their mean have the given spread.
func (in *reductionInput) ridge(r *reduction, p int, spread float64) {
	mean := in.use[p].mean
	n := len(mean)
	f := 1 / (spread * spread)
	for i := range n {
		for j := i; j < n; j++ {
			s := 0.0
			for k := range n {
				a, b := -mean[i], -mean[j]
				if k == i {
					a++
				}
				if k == j {
					b++
				}
				s += a * b
			}
			off := in.state.off[p]
			r.prior.SetSym(off+i, off+j, r.prior.At(off+i, off+j)+f*s)
		}
	}
}

// tie gives neighbouring coefficients of d_p = ln K_p - ln K_ref a difference of
// spread 2: far too weak to matter but where there are no observations.
func (in *reductionInput) tie(r *reduction, p, ref int) {
	const f = 1.0 / 4
	n := in.table.curve[p].functions()
	a, b := in.state.off[p], in.state.off[ref]
	for i := range n - 1 {
		at := [4]int{a + i, a + i + 1, b + i, b + i + 1}
		sign := [4]float64{1, -1, -1, 1}
		for x := range at {
			for y := x; y < 4; y++ {
				r.prior.SetSym(at[x], at[y], r.prior.At(at[x], at[y])+f*sign[x]*sign[y])
			}
		}
	}
}
