package size

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// clipVariance is the strength on the axis above which the variance of a residual
// is not thought to grow: few reflections say so.
const clipVariance = 8

// variances fits, leg by leg, the law of the squared residual,
//
//	u r^2 = a v_s + b z^2,
//
// v_s the mean over the shell of both positions' variances in units of its own means, a
// and b common, z the axis between 0 and 8 shell means and u the weights that were
// given. Weighted least squares alternate between a and b with weights 1/(a v_s + b z^2)^2,
// as for squares of normal residuals; in b a square counts at most as nine variances. The
// law depends on the axis and the shell only, so that weights from it bias no moment but by what
// v_s has of the chance of single reflections, of order 1/n; but a
// constant for each shell would be found from the very residuals that it weights, and as
// errors of the strongest are skew where an exchange makes those of one position smaller,
// it takes 3 % off a large m. Without both variances, or with one of a shell that is not
// positive, a v_s is such a constant. NaN where a row takes no part.
func (s *system) variances(theta []float64) [][]float64 {
	out := make([][]float64, len(s.legs))
	for l, c := range s.legs {
		out[l] = c.variances(c.residual(theta))
	}
	return out
}

func (c *conditions) variances(r []float64) []float64 {
	law := make(squares, 0, len(r))
	a, n := make([]float64, c.in.Shells), make([]float64, c.in.Shells)
	for i, s := range c.in.Shell {
		if c.w[i]*c.u[i] > 0 {
			z := max(0, min(c.z[i], clipVariance))
			square, z2 := c.u[i]*r[i]*r[i], z*z
			law = append(law, squared{s, c.w[i], square, z2, c.w[i] * z2})
			a[s] += c.w[i] * square / (1 + z2)
			n[s] += c.w[i]
		}
	}
	least := make([]float64, len(a))
	for s := range a {
		a[s] /= n[s]
		least[s] = a[s] / 20
	}
	shape := c.shellVariances()
	if shape != nil {
		law.level(a, shape, 0)
	}
	b := 0.0
	num, den := make([]float64, len(a)), make([]float64, len(a))
	for range 8 {
		b = law.growth(a, b)
		if shape != nil {
			law.level(a, shape, b)
		} else {
			law.base(a, b, least, num, den)
		}
	}
	out := make([]float64, len(r))
	k := 0
	for i, s := range c.in.Shell {
		out[i] = math.NaN()
		if c.w[i]*c.u[i] > 0 {
			out[i] = a[s] + b*law[k].z2
			k++
		}
	}
	return out
}

// squared is the squared residual of a row that takes part.
type squared struct {
	shell               int32
	w, square, z2, wOfZ float64 // wOfZ is w z2
}

type squares []squared

// shellVariances is the mean variance of y1 and y2 together by shell, 1 for a shell
// without reflections; nil when it is not known or not positive somewhere.
func (c *conditions) shellVariances() []float64 {
	if c.in.VarThin == nil || c.in.VarThick == nil {
		return nil
	}
	v := make([]float64, c.in.Shells)
	for i, s := range c.in.Shell {
		if c.w[i] > 0 {
			v[s] += c.w[i] * (c.in.VarThin[i]/(c.mean1[s]*c.mean1[s]) + c.in.VarThick[i]/(c.mean2[s]*c.mean2[s])) / c.sum[s]
		}
	}
	for s, n := range c.sum {
		if n == 0 {
			v[s] = 1
		} else if !(v[s] > 0) {
			return nil
		}
	}
	return v
}

// level turns a into shape times the factor that suits b best, never below a twentieth of
// the one that b = 0 would have.
func (q squares) level(a, shape []float64, b float64) {
	var num, den, all float64
	for i := range q {
		x := &q[i]
		if v := a[x.shell] + b*x.z2; v > 0 {
			w, h := x.w/(v*v), shape[x.shell]
			num += w * (x.square - b*x.z2) * h
			all += w * x.square * h
			den += w * h * h
		}
	}
	if !(den > 0) {
		return
	}
	for s := range a {
		a[s] = shape[s] * max(num, all/20) / den
	}
}

// growth is b for given a.
func (q squares) growth(a []float64, b float64) float64 {
	var num, den float64
	for i := range q {
		x := &q[i]
		if v := a[x.shell] + b*x.z2; v > 0 {
			w := x.wOfZ / (v * v)
			num += w * min(x.square-a[x.shell], 9*v)
			den += w * x.z2
		}
	}
	if !(den > 0) {
		return 0
	}
	return max(0, num/den)
}

// base turns a into that for given b; num and den are room for sums by shell.
func (q squares) base(a []float64, b float64, least, num, den []float64) {
	clear(num)
	clear(den)
	for i := range q {
		x := &q[i]
		if v := a[x.shell] + b*x.z2; v > 0 {
			w := x.w / (v * v)
			num[x.shell] += w * (x.square - b*x.z2)
			den[x.shell] += w
		}
	}
	for s := range a {
		if den[s] > 0 {
			a[s] = max(num[s]/den[s], least[s])
		}
	}
}

// rowWeights is the inverse of the variance of each residual by its law; ones where
// there is no residue.
func (s *system) rowWeights(theta []float64) [][]float64 {
	out := s.variances(theta)
	for l, c := range s.legs {
		n := make([]float64, c.in.Shells)
		for i, sh := range c.in.Shell {
			if c.u[i] > 0 {
				n[sh] += c.w[i]
			}
		}
		for i, v := range out[l] {
			out[l][i] = 1
			if v > 1e-20 {
				// A shell of a few reflections whose constant is its own must not outweigh all others
				// by chance; with a common one this tilts weights by little.
				k := n[c.in.Shell[i]]
				out[l][i] = (k - 1) / (k + 1) / v
			}
		}
	}
	return out
}

// width gives the degrees of freedom of the variance of each parameter,
// (sum s_i)^2 / sum s_i^2, s_i what reflection i is expected to add to the variance
// (Satterthwaite 1946, Biometrics Bull. 2:110; for sandwich errors Bell & McCaffrey 2002,
// Survey Methodology 28:169): few where few reflections carry an estimate.
func (s *system) width(m *weighted, lever *mat.Dense, theta []float64) []float64 {
	p, _ := lever.Dims()
	n := len(s.weight)
	law := s.variances(theta)
	out := make([]float64, p)
	own := make([]float64, n)
	for j := range out {
		clear(own)
		row := lever.RawRowView(j)
		for l, c := range s.legs {
			u := m.u[l]
			for i, v := range law[l] {
				if math.IsNaN(v) {
					continue
				}
				g := 0.0
				for k, f := range m.f[l] {
					g += row[k] * u[i] * f[i]
				}
				own[i] += g * g * v / c.u[i]
			}
		}
		var sum, squares float64
		for i, w := range s.weight {
			sum += w * own[i]
			squares += w * own[i] * own[i]
		}
		out[j] = math.Inf(1)
		if squares > 0 {
			out[j] = math.Max(1, sum*sum/squares)
		}
	}
	return out
}
