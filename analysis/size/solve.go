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

	m         *weighted
	wa, bread *mat.Dense    // weight^-1 a and (a' weight^-1 a)^-1
	lever     *mat.Dense    // theta = lever g
	ch        *mat.Cholesky // of the weight of the moments
	exact     bool          // nothing is left over
	unbiased  []float64     // theta with its correction
	jack      *jackknife    // nil without one
}

// weighted holds the weighted, centred functions and the linear moment sums
// g - a theta.
type weighted struct {
	f  [][][]float64 // by leg, function, row
	of []int         // which functions these are
	u  [][]float64   // by leg, row
	uf [][][]float64 // u f
	wu [][]float64   // by leg, row: u times the counts
	a  *mat.Dense
	g  *mat.VecDense
	b  *mat.SymDense // sum of (u f)(u f)'
}

// settled is the change of the curb, in its standard errors, at which its second order is
// taken to be found.
const settled = 0.01

// solve is nil when the parameters cannot be told apart. The curb is taken to
// second order at the q that was found until that stays.
func (s *system) solve(set *Settings) *solution {
	once := s.model < MQ || set.firstOrder()
	sol := s.solveFrom(nil, set.flat())
	if once {
		return s.finish(sol, set)
	}
	for range 8 {
		if sol == nil {
			return nil
		}
		before := sol
		s.bend(before.theta[1] / (1 - before.theta[0]))
		sol = s.solveFrom(before.theta, set.flat())
		s.errors(sol)
		if sol != nil && math.Abs(sol.theta[1]-before.theta[1]) <= settled*math.Sqrt(sol.cov.At(1, 1))+1e-6*math.Abs(sol.theta[1]) {
			break
		}
	}
	return s.finish(sol, set)
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

// secondStep weights the moments by the inverse of omega and finds theta. Where omega is
// nothing beside the functions the model fits without residue, theta stands and
// J is 0.
func (s *system) secondStep(m *weighted, theta []float64, omega *mat.SymDense) *solution {
	k, p := m.a.Dims()
	sol := &solution{theta: theta, df: k - p, omega: omega, m: m, ch: &mat.Cholesky{}, exact: true}
	weight := omega
	for i := range k {
		sol.exact = sol.exact && omega.At(i, i) <= 1e-20*m.b.At(i, i)
	}
	if sol.exact {
		weight = m.b
	} else if sol.theta = linear(m.a, omega, m.g); sol.theta == nil {
		return nil
	}
	sol.ch.Factorize(weight)
	var wa, awa, bread mat.Dense
	if err := sol.ch.SolveTo(&wa, m.a); err != nil {
		return nil
	}
	awa.Mul(m.a.T(), &wa)
	if err := bread.Inverse(&awa); err != nil {
		return nil
	}
	sol.bread, sol.wa = &bread, &wa
	return sol
}

// errors adds the covariance of theta, once; nil stays.
func (s *system) errors(sol *solution) {
	if sol == nil || sol.cov != nil {
		return
	}
	p := len(sol.theta)
	sol.lever = &mat.Dense{}
	sol.lever.Mul(sol.bread, sol.wa.T())
	last := s.covarianceOfMoments(sol.m, sol.theta, s.leverage(sol.m, sol.lever))
	var meat, half mat.Dense
	half.Mul(sol.wa.T(), last)
	meat.Mul(&half, sol.wa)
	half.Reset()
	half.Mul(sol.bread, &meat)
	sol.cov = mat.NewDense(p, p, nil)
	sol.cov.Mul(&half, sol.bread)
}

// finish adds all that does not steer the search for theta; nil stays.
func (s *system) finish(sol *solution, set *Settings) *solution {
	if sol == nil {
		return nil
	}
	s.errors(sol)
	sol.width = s.width(sol.m, sol.lever, sol.theta)
	sol.unbiased = append([]float64(nil), sol.theta...)
	if !set.asFound() {
		sol.jack = s.jackknife(sol)
	}
	if sol.jack != nil {
		sol.cov = sol.jack.cov
		for i, c := range sol.jack.shift {
			sol.unbiased[i] += c
		}
	}
	if !sol.exact {
		sol.j = distance(sol.m, sol.theta, sol.ch)
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
		wu := make([]float64, len(u))
		for i, w := range c.w {
			wu[i] = w * u[i]
		}
		uf := make([][]float64, len(c.f))
		room := make([]float64, len(u)*len(uf))
		for k, f := range c.middle {
			uf[k] = room[k*len(u) : (k+1)*len(u)]
			for i, v := range f {
				uf[k][i] = u[i] * v
			}
		}
		m.u, m.wu = append(m.u, u), append(m.wu, wu)
		m.f, m.uf = append(m.f, c.middle), append(m.uf, uf)
	}
	full := s.gram(m.uf)
	keep := independent(full)
	m.of = keep
	for l := range m.f {
		var f, uf [][]float64
		for _, k := range keep {
			f, uf = append(f, m.f[l][k]), append(uf, m.uf[l][k])
		}
		m.f[l], m.uf[l] = f, uf
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
			for i, wu := range m.wu[l] {
				wf := wu * f[i]
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
func (s *system) gram(v [][][]float64) *mat.SymDense {
	n := len(v[0])
	out := mat.NewSymDense(n, nil)
	data := make([]float64, n*n)
	row := make([]float64, n)
	for i, w := range s.weight {
		if w == 0 {
			continue
		}
		clear(row)
		for _, leg := range v {
			for k := range row {
				row[k] += leg[k][i]
			}
		}
		for k, a := range row {
			wa, sums := w*a, data[k*n:(k+1)*n]
			for j := k; j < n; j++ {
				sums[j] += wa * row[j]
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
	h := make([]float64, len(s.weight))
	share := make([]float64, len(h))
	for l, c := range s.legs {
		u := m.u[l]
		for i, sh := range c.in.Shell {
			if c.w[i] == 0 {
				continue
			}
			share[i] = max(share[i], 1/c.sum[sh])
			sum := h[i]
			for p, x := range c.x {
				row := k.RawRowView(p)
				for kk, f := range m.f[l] {
					sum += x[i] * row[kk] * u[i] * f[i]
				}
			}
			h[i] = sum
		}
	}
	for i := range h {
		h[i] = min(h[i]+share[i], mostLeverage)
	}
	return h
}

// covarianceOfMoments is the sum over reflections of psi psi' about its mean,
// psi over 1 - h where h is given.
func (s *system) covarianceOfMoments(m *weighted, theta, h []float64) *mat.SymDense {
	psi := make([][]float64, len(m.f[0]))
	n := len(s.weight)
	room := make([]float64, n*len(psi))
	for k := range psi {
		psi[k] = room[k*n : (k+1)*n]
	}
	for l, c := range s.legs {
		c.influence(psi, m.uf[l], m.wu[l], theta, m.f[l])
	}
	for _, p := range psi {
		mean := 0.0
		for i, w := range s.weight {
			mean += w * p[i]
		}
		mean /= s.present
		for i := range p {
			p[i] -= mean
			if h != nil {
				p[i] /= 1 - h[i]
			}
		}
	}
	return s.gram([][][]float64{psi})
}
