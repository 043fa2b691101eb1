package size

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// solution is the two-step estimate of a system.
type solution struct {
	theta []float64
	cov   *mat.Dense
	j     float64
	df    int
	omega *mat.SymDense // sum of psi psi' at the first step
	rows  [][]float64   // weights by leg and row; nil for ones
	width []float64     // degrees of freedom of each variance in cov
}

// weighted holds the weighted, centred functions and the linear moment sums
// g - a theta.
type weighted struct {
	f [][][]float64 // by leg, function, row
	u [][]float64   // by leg, row
	a *mat.Dense
	g *mat.VecDense
	b *mat.SymDense // sum of (u f)(u f)'
}

// settled is the change of the curb, in its standard errors, at which its second order is
// taken to be found.
const settled = 0.01

// solve is nil when the parameters cannot be told apart. The curb is taken to
// second order at the q that was found until that stays.
func (s *system) solve(set *Settings) *solution {
	sol := s.solveFrom(nil, set.flat())
	if s.model < MQ || set.firstOrder() {
		return sol
	}
	for range 8 {
		if sol == nil {
			return nil
		}
		before := sol
		s.bend(before.theta[1] / (1 - before.theta[0]))
		sol = s.solveFrom(before.theta, set.flat())
		if sol != nil && math.Abs(sol.theta[1]-before.theta[1]) <= settled*math.Sqrt(sol.cov.At(1, 1))+1e-6*math.Abs(sol.theta[1]) {
			break
		}
	}
	return sol
}

// solveFrom takes the law of the residual from theta or, when that is nil, from a
// first step that weights all rows alike; the law is then found twice, as that theta is
// a rough one.
func (s *system) solveFrom(theta []float64, flat bool) *solution {
	var rows [][]float64
	var m *weighted
	laws := 1
	if flat || theta == nil {
		m = s.sums(nil)
	}
	if theta == nil {
		if theta = linear(m.a, m.b, m.g); theta == nil {
			return nil
		}
		laws = 2
	}
	for range laws {
		if !flat {
			rows = s.rowWeights(theta)
			m = s.sums(rows)
		}
		if theta = linear(m.a, m.b, m.g); theta == nil {
			return nil
		}
	}
	omega := s.covarianceOfMoments(m, theta, nil)
	sol := s.secondStep(m, theta, omega)
	if sol != nil {
		sol.rows = rows
	}
	return sol
}

// secondStep weights the moments by the inverse of omega. Where omega is
// nothing beside the functions the model fits without residue, theta stands and
// J is 0.
func (s *system) secondStep(m *weighted, theta []float64, omega *mat.SymDense) *solution {
	k, p := m.a.Dims()
	sol := &solution{theta: theta, df: k - p, omega: omega}
	weight := omega
	exact := true
	for i := range k {
		exact = exact && omega.At(i, i) <= 1e-20*m.b.At(i, i)
	}
	if exact {
		weight = m.b
	} else if sol.theta = linear(m.a, omega, m.g); sol.theta == nil {
		return nil
	}
	var ch mat.Cholesky
	ch.Factorize(weight)
	var wa, awa mat.Dense
	if err := ch.SolveTo(&wa, m.a); err != nil {
		return nil
	}
	awa.Mul(m.a.T(), &wa)
	var bread, meat, half mat.Dense
	if err := bread.Inverse(&awa); err != nil {
		return nil
	}
	var lever mat.Dense
	lever.Mul(&bread, wa.T())
	last := s.covarianceOfMoments(m, sol.theta, s.leverage(m, &lever))
	half.Mul(wa.T(), last)
	meat.Mul(&half, &wa)
	half.Reset()
	half.Mul(&bread, &meat)
	sol.cov = mat.NewDense(p, p, nil)
	sol.cov.Mul(&half, &bread)
	sol.width = s.width(m, &lever, sol.theta)
	if !exact {
		sol.j = distance(m, sol.theta, &ch)
	}
	return sol
}

// distance is (g - a theta)' W^-1 (g - a theta).
func distance(m *weighted, theta []float64, ch *mat.Cholesky) float64 {
	var r, wr mat.VecDense
	r.MulVec(m.a, mat.NewVecDense(len(theta), theta))
	r.SubVec(m.g, &r)
	if err := ch.SolveVecTo(&wr, &r); err != nil {
		return math.NaN()
	}
	return mat.Dot(&r, &wr)
}

// linear minimises (g - a theta)' weight^-1 (g - a theta); nil when singular.
func linear(a *mat.Dense, weight *mat.SymDense, g *mat.VecDense) []float64 {
	k, p := a.Dims()
	if k < p {
		return nil
	}
	var ch mat.Cholesky
	if !ch.Factorize(weight) {
		return nil
	}
	var wa mat.Dense
	if err := ch.SolveTo(&wa, a); err != nil {
		return nil
	}
	var n mat.Dense
	n.Mul(a.T(), &wa)
	// Parameters have different units, so the condition is judged on the
	// normal matrix with unit diagonal.
	d := make([]float64, p)
	for i := range d {
		if d[i] = math.Sqrt(n.At(i, i)); !(d[i] > 0) {
			return nil
		}
	}
	sym := mat.NewSymDense(p, nil)
	for i := range p {
		for j := i; j < p; j++ {
			sym.SetSym(i, j, n.At(i, j)/(d[i]*d[j]))
		}
	}
	var cn mat.Cholesky
	if !cn.Factorize(sym) || cn.Cond() > 1e10 {
		return nil
	}
	var rhs, th mat.VecDense
	rhs.MulVec(wa.T(), g)
	for i := range p {
		rhs.SetVec(i, rhs.AtVec(i)/d[i])
	}
	if err := cn.SolveVecTo(&th, &rhs); err != nil {
		return nil
	}
	out := make([]float64, p)
	for i := range out {
		out[i] = th.AtVec(i) / d[i]
	}
	return out
}

// sums builds the moments; rows, when not nil, multiplies the weights by leg
// and row. Functions that repeat the ones before them are left out.
func (s *system) sums(rows [][]float64) *weighted {
	m := &weighted{}
	for l, c := range s.legs {
		u := append([]float64(nil), c.u...)
		if rows != nil {
			for i := range u {
				u[i] *= rows[l][i]
			}
		}
		f := make([][]float64, len(c.f))
		for k := range f {
			f[k] = c.centred(c.f[k])
		}
		m.u = append(m.u, u)
		m.f = append(m.f, f)
	}
	full := s.gram(m, func(l, k, i int) float64 { return m.u[l][i] * m.f[l][k][i] })
	keep := independent(full)
	for l := range m.f {
		var f [][]float64
		for _, k := range keep {
			f = append(f, m.f[l][k])
		}
		m.f[l] = f
	}
	k, p := len(keep), s.parameters()
	m.b = mat.NewSymDense(max(k, 1), nil)
	for i := range keep {
		for j := i; j < k; j++ {
			m.b.SetSym(i, j, full.At(keep[i], keep[j]))
		}
	}
	m.a, m.g = mat.NewDense(max(k, 1), p, nil), mat.NewVecDense(max(k, 1), nil)
	for l, c := range s.legs {
		for kk, f := range m.f[l] {
			a := make([]float64, p+1)
			for i, w := range c.w {
				wf := w * m.u[l][i] * f[i]
				if wf == 0 {
					continue
				}
				for j := range p {
					a[j] += wf * c.x[j][i]
				}
				a[p] += wf * (c.y1[i] - c.y2[i])
			}
			for j := range p {
				m.a.Set(kk, j, m.a.At(kk, j)+a[j])
			}
			m.g.SetVec(kk, m.g.AtVec(kk)+a[p])
		}
	}
	return m
}

// gram sums products over legs within a reflection, so that legs of one
// reflection count as one.
func (s *system) gram(m *weighted, v func(l, k, i int) float64) *mat.SymDense {
	n := len(m.f[0])
	out := mat.NewSymDense(n, nil)
	data := make([]float64, n*n)
	row := make([]float64, n)
	frames := s.frames()
	for i := range s.legs[0].w {
		w := rowWeight(frames, i)
		if w == 0 {
			continue
		}
		for k := range row {
			row[k] = 0
			for l := range s.legs {
				row[k] += v(l, k, i)
			}
		}
		for k := range row {
			for j := k; j < n; j++ {
				data[k*n+j] += w * row[k] * row[j]
			}
		}
	}
	for k := range n {
		for j := k; j < n; j++ {
			out.SetSym(k, j, data[k*n+j])
		}
	}
	return out
}

// independent picks rows of a Gram matrix in order, leaving out those that the
// picked ones explain to 1e-8 of their square.
func independent(g *mat.SymDense) []int {
	n := g.SymmetricDim()
	rest := mat.NewDense(n, n, nil)
	rest.Copy(g)
	var keep []int
	for k := range n {
		if !(rest.At(k, k) > 1e-8*g.At(k, k)) {
			continue
		}
		keep = append(keep, k)
		pivot := rest.At(k, k)
		col := mat.Col(nil, k, rest)
		for i := range n {
			for j := range n {
				rest.Set(i, j, rest.At(i, j)-col[i]*col[j]/pivot)
			}
		}
	}
	return keep
}

// leverage is the share of each reflection in its own fitted value, x' k (u f)
// with theta = k g, plus that in its shell mean.
func (s *system) leverage(m *weighted, k *mat.Dense) []float64 {
	h := make([]float64, len(s.legs[0].w))
	share := make([]float64, len(h))
	for l, c := range s.legs {
		for i, sh := range c.in.Shell {
			if c.w[i] == 0 {
				continue
			}
			share[i] = math.Max(share[i], 1/c.sum[sh])
			for p, x := range c.x {
				for kk, f := range m.f[l] {
					h[i] += x[i] * k.At(p, kk) * m.u[l][i] * f[i]
				}
			}
		}
	}
	for i := range h {
		h[i] = math.Min(h[i]+share[i], mostLeverage)
	}
	return h
}

// covarianceOfMoments is the sum over reflections of psi psi' about its mean,
// psi over 1 - h where h is given.
func (s *system) covarianceOfMoments(m *weighted, theta, h []float64) *mat.SymDense {
	n := len(s.legs[0].w)
	psi := make([][]float64, len(m.f[0]))
	mean := make([]float64, len(psi))
	frames := s.frames()
	for k := range psi {
		psi[k] = make([]float64, n)
	}
	for l, c := range s.legs {
		c.influence(psi, m.f[l], m.u[l], theta)
	}
	for k := range psi {
		for i := range psi[k] {
			mean[k] += rowWeight(frames, i) * psi[k][i]
		}
		mean[k] /= s.present
		for i := range psi[k] {
			psi[k][i] -= mean[k]
			if h != nil {
				psi[k][i] /= 1 - h[i]
			}
		}
	}
	return s.gram(m, func(l, k, i int) float64 {
		if l > 0 {
			return 0
		}
		return psi[k][i]
	})
}
