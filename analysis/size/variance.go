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
//	u r^2 = a_s + b z^2,
//
// a_s by shell for counting noise and b common for errors in proportion to
// the intensity, z the axis between 0 and 8 shell means and u the weights that were
// given. Weighted least squares alternate between a and b with weights 1/(a_s + b z^2)^2,
// as for squares of normal residuals; in b a square counts at most as nine variances. The
// law depends on the axis and the shell only, so weights from it bias no moment. NaN where a
// row takes no part.
func (s *system) variances(theta []float64) [][]float64 {
	out := make([][]float64, len(s.legs))
	for l, c := range s.legs {
		out[l] = c.variances(c.residual(theta))
	}
	return out
}

func (c *conditions) variances(r []float64) []float64 {
	square, z2 := make([]float64, len(r)), make([]float64, len(r))
	a, n := make([]float64, c.in.Shells), make([]float64, c.in.Shells)
	for i, s := range c.in.Shell {
		if c.w[i]*c.u[i] > 0 {
			z := math.Max(0, math.Min(c.z[i], clipVariance))
			square[i], z2[i] = c.u[i]*r[i]*r[i], z*z
			a[s] += c.w[i] * square[i] / (1 + z2[i])
			n[s] += c.w[i]
		}
	}
	least := make([]float64, len(a))
	for s := range a {
		a[s] /= n[s]
		least[s] = a[s] / 20
	}
	b := 0.0
	for range 8 {
		b = c.growth(square, z2, a, b)
		a = c.base(square, z2, a, b, least)
	}
	out := make([]float64, len(r))
	for i, s := range c.in.Shell {
		out[i] = math.NaN()
		if c.w[i]*c.u[i] > 0 {
			out[i] = a[s] + b*z2[i]
		}
	}
	return out
}

// growth is b for given a.
func (c *conditions) growth(square, z2, a []float64, b float64) float64 {
	var num, den float64
	for i, s := range c.in.Shell {
		if v := a[s] + b*z2[i]; c.w[i]*c.u[i] > 0 && v > 0 {
			w := c.w[i] * z2[i] / (v * v)
			num += w * math.Min(square[i]-a[s], 9*v)
			den += w * z2[i]
		}
	}
	if !(den > 0) {
		return 0
	}
	return math.Max(0, num/den)
}

// base is a for given b.
func (c *conditions) base(square, z2, a []float64, b float64, least []float64) []float64 {
	num, den := make([]float64, len(a)), make([]float64, len(a))
	for i, s := range c.in.Shell {
		if v := a[s] + b*z2[i]; c.w[i]*c.u[i] > 0 && v > 0 {
			w := c.w[i] / (v * v)
			num[s] += w * (square[i] - b*z2[i])
			den[s] += w
		}
	}
	out := make([]float64, len(a))
	for s := range out {
		out[s] = a[s]
		if den[s] > 0 {
			out[s] = math.Max(num[s]/den[s], least[s])
		}
	}
	return out
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
				// A shell of a few reflections must not outweigh all others by chance.
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
	n := len(s.legs[0].w)
	law := s.variances(theta)
	frames := s.frames()
	out := make([]float64, p)
	for j := range out {
		var sum, squares float64
		for i := range n {
			var own float64
			for l, c := range s.legs {
				if math.IsNaN(law[l][i]) {
					continue
				}
				g := 0.0
				for k := range m.f[l] {
					g += lever.At(j, k) * m.u[l][i] * m.f[l][k][i]
				}
				own += g * g * law[l][i] / c.u[i]
			}
			w := rowWeight(frames, i)
			sum += w * own
			squares += w * own * own
		}
		out[j] = math.Inf(1)
		if squares > 0 {
			out[j] = math.Max(1, sum*sum/squares)
		}
	}
	return out
}
