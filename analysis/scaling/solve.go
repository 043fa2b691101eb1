package scaling

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// normal unfolds the normal matrix from the sums of a pass.
func (t *table) normal(s *state, n *sums) *mat.SymDense {
	m := s.size()
	full := make([]float64, m*m)
	copy(full, n.outer)
	t.eachCell(s, func(at int, idx [5]int) {
		c := n.cells[at : at+cellTerms]
		k := 0
		for i := range 4 {
			for j := i; j < 4; j++ {
				full[idx[i]*m+idx[j]] += c[k]
				if i != j {
					full[idx[j]*m+idx[i]] += c[k]
				}
				k++
			}
		}
		for i := range 4 {
			full[idx[i]*m+idx[4]] += c[10+i]
			full[idx[4]*m+idx[i]] += c[10+i]
		}
		full[idx[4]*m+idx[4]] += c[14]
	})
	return symmetric(m, full)
}

func symmetric(m int, full []float64) *mat.SymDense {
	out := mat.NewSymDense(m, nil)
	for i := range m {
		for j := i; j < m; j++ {
			out.SetSym(i, j, 0.5*(full[i*m+j]+full[j*m+i]))
		}
	}
	return out
}

// gradientOf unfolds the gradient of half the weighted sum of squares, with the
// sign of a step towards the minimum.
func (t *table) gradientOf(s *state, n *sums) *mat.VecDense {
	g := mat.NewVecDense(s.size(), nil)
	t.eachCell(s, func(at int, idx [5]int) {
		for i, k := range idx {
			g.SetVec(k, g.AtVec(k)+n.cells[at+15+i])
		}
	})
	return g
}

func (t *table) eachCell(s *state, f func(at int, idx [5]int)) {
	cellAt, _ := t.cellOffsets()
	for p, c := range t.curve {
		for i := range max(1, c.cells) {
			o := s.off[p] + i
			f((cellAt[p]+i)*cellTerms, [5]int{o, o + 1, o + 2, o + 3, s.indexB(t, p)})
		}
	}
}

// reducedSystem is the normal matrix in the free parameters and its inverse;
// directions without information are left out of the inverse.
type reducedSystem struct {
	inverse *mat.SymDense
	lost    []int // reduced parameters that lead the lost directions
}

// reduce returns T' M T + f I.
func (r *reduction) reduce(m mat.Symmetric, f float64) *mat.SymDense {
	_, k := r.t.Dims()
	var a, b mat.Dense
	a.Mul(m, r.t)
	b.Mul(r.t.T(), &a)
	out := mat.NewSymDense(k, nil)
	for i := range k {
		for j := i; j < k; j++ {
			out.SetSym(i, j, 0.5*(b.At(i, j)+b.At(j, i)))
		}
		out.SetSym(i, i, out.At(i, i)+f)
	}
	return out
}

// invert inverts a after scaling it to unit diagonal, by Cholesky factors where
// it is well conditioned, else by eigenvectors without the lost directions.
func invert(a *mat.SymDense) *reducedSystem {
	k := a.SymmetricDim()
	d := make([]float64, k)
	for i := range d {
		d[i] = 1
		if v := a.At(i, i); v > 0 {
			d[i] = 1 / math.Sqrt(v)
		}
	}
	scaled := mat.NewSymDense(k, nil)
	for i := range k {
		for j := i; j < k; j++ {
			scaled.SetSym(i, j, a.At(i, j)*d[i]*d[j])
		}
	}
	out := &reducedSystem{inverse: mat.NewSymDense(k, nil)}
	var ch mat.Cholesky
	if ch.Factorize(scaled) && ch.Cond() < 1e11 {
		if err := ch.InverseTo(out.inverse); err == nil {
			unscale(out.inverse, d)
			return out
		}
	}
	var eig mat.EigenSym
	if !eig.Factorize(scaled, true) {
		for i := range k {
			out.lost = append(out.lost, i)
		}
		return out
	}
	val := eig.Values(nil)
	var vec mat.Dense
	eig.VectorsTo(&vec)
	for e, l := range val {
		if l < 1e-11*val[k-1] {
			out.lost = append(out.lost, largest(&vec, e))
			continue
		}
		out.inverse.SymRankOne(out.inverse, 1/l, vec.ColView(e))
	}
	unscale(out.inverse, d)
	return out
}

func unscale(a *mat.SymDense, d []float64) {
	for i := range d {
		for j := i; j < len(d); j++ {
			a.SetSym(i, j, a.At(i, j)*d[i]*d[j])
		}
	}
}

func largest(v *mat.Dense, col int) int {
	best, at := -1.0, 0
	n, _ := v.Dims()
	for i := range n {
		if x := math.Abs(v.At(i, col)); x > best {
			best, at = x, i
		}
	}
	return at
}

// softness returns the standard error of ln K along the softest direction of
// each curve, directions being scaled to a root mean square of 1 over the
// observations. A prior of spread 100 stands in for no information.
func (in *reductionInput) softness(r *reduction, normal *mat.SymDense) []float64 {
	out := make([]float64, len(r.blocks))
	if len(r.blocks) == 0 {
		return out
	}
	inv := invert(r.reduce(normal, 1e-4)).inverse
	for b, blk := range r.blocks {
		k := blk.to - blk.from
		gram := in.gram(r, blk)
		cov := mat.NewSymDense(k, nil)
		for i := range k {
			for j := i; j < k; j++ {
				cov.SetSym(i, j, inv.At(blk.from+i, blk.from+j))
			}
		}
		out[b] = math.Sqrt(math.Max(0, largestProduct(cov, gram)))
	}
	return out
}

// gram is the mean square of a curve over the observations of its positions,
// less the square of its mean, as a form in the reduced parameters.
func (in *reductionInput) gram(r *reduction, blk curveBlock) *mat.SymDense {
	k := blk.to - blk.from
	out := mat.NewSymDense(k, nil)
	for _, p := range blk.positions {
		u := in.use[p]
		n := len(u.mean)
		t := mat.DenseCopyOf(r.t.Slice(in.state.off[p], in.state.off[p]+n, blk.from, blk.to))
		centred := mat.NewSymDense(n, nil)
		for i := range n {
			for j := i; j < n; j++ {
				centred.SetSym(i, j, (u.gram[i*n+j]-u.mean[i]*u.mean[j])/float64(len(blk.positions)))
			}
		}
		var a, b mat.Dense
		a.Mul(centred, t)
		b.Mul(t.T(), &a)
		for i := range k {
			for j := i; j < k; j++ {
				out.SetSym(i, j, out.At(i, j)+0.5*(b.At(i, j)+b.At(j, i)))
			}
		}
	}
	return out
}

// largestProduct returns the largest eigenvalue of a b, both symmetric and not
// negative.
func largestProduct(a, b *mat.SymDense) float64 {
	var eig mat.EigenSym
	if !eig.Factorize(a, true) {
		return math.Inf(1)
	}
	val := eig.Values(nil)
	var root mat.Dense
	eig.VectorsTo(&root)
	n := len(val)
	for j := range n {
		f := math.Sqrt(math.Max(val[j], 0))
		for i := range n {
			root.Set(i, j, root.At(i, j)*f)
		}
	}
	var x, y mat.Dense
	x.Mul(b, &root)
	y.Mul(root.T(), &x)
	s := mat.NewSymDense(n, nil)
	for i := range n {
		for j := i; j < n; j++ {
			s.SetSym(i, j, 0.5*(y.At(i, j)+y.At(j, i)))
		}
	}
	if !eig.Factorize(s, false) {
		return math.Inf(1)
	}
	return eig.Values(nil)[n-1]
}
