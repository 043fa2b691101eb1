package size

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// columns are the sums that one moment is made of: of a function times 1, y1, y2,
// h Q and h^2 T, with the weights of the moments.
type columns [5]float64

// linearSums are those of a moment in theta: what multiplies each parameter, then y1 - y2.
type linearSums [4]float64

// stratum is a resolution shell of one leg as a deletion sees it.
type stratum struct {
	present, used, centring float64 // counts: of all, of those with a strength; weights of the centring
	first, second           float64 // means of h Q and h^2 T
	one                     columns
	f, slope                []columns // by function; slope is its change with -ln of the mean of the axis
	whole                   []linearSums
}

// deletion works out what theta becomes without one reflection: all shell means, the
// axis's too, the centres of the functions and the factors that go with a shell mean are
// those of the rest; weights and the second order of the curb stay.
type deletion struct {
	s       *system
	m       *weighted
	p, k    int
	inverse [][]float64 // of the weight of the moments
	slope   [][][]float64
	shells  [][]stratum
	whole   []linearSums
	part    []linearSums
	moved   []linearSums
}

// jackknife is what the deletion of one reflection at a time says of theta: its bias, which
// is to be added, and its covariance,
//
//	shift = (n-1)/n sum_i w_i (theta - theta_i)
//	cov   = (n-1)/n sum_i w_i (theta_i - <theta_i>)(theta_i - <theta_i>)'
//
// theta_i without one count of reflection i (Quenouille 1956, Biometrika 43:353; Tukey
// 1958, Ann. Math. Stat. 29:614). Shell means, centres of functions and factors are worked out
// anew, weights are not, so that of the terms of this order (Newey & Smith 2004,
// Econometrica 72:219) it has those of the columns and of the shell means: a mean of a
// sample stands in both positions, in the column of the curb and in that of the offset,
// and its chance pulls m toward 0 by a few hundredths of itself, and o up.
type jackknife struct {
	shift []float64 // nil where one is beyond a standard error: then 1/n is no small number
	cov   *mat.Dense
	m     []float64 // by row, what its deletion takes off m, so that squares add up to its variance
}

// jackknife is nil where nothing is left over or a deletion leaves a shell without a
// positive mean.
func (s *system) jackknife(sol *solution) *jackknife {
	if sol.exact {
		return nil
	}
	d := s.deletion(sol)
	if d == nil {
		return nil
	}
	base := d.solve(d.whole)
	off := make([][3]float64, len(s.weight))
	var mean [3]float64
	n := 0.0
	for i, w := range s.weight {
		if w == 0 {
			continue
		}
		moved, ok := d.without(i)
		if !ok {
			return nil
		}
		n += w
		theta := d.solve(moved)
		for j := range d.p {
			off[i][j] = base[j] - theta[j]
			mean[j] += w * off[i][j]
		}
	}
	j := &jackknife{shift: make([]float64, d.p), cov: mat.NewDense(d.p, d.p, nil), m: make([]float64, s.all)}
	for a := range d.p {
		j.shift[a] = (n - 1) / n * mean[a]
		mean[a] /= n
	}
	for i, w := range s.weight {
		for a := range d.p {
			for b := range d.p {
				v := w * (n - 1) / n * (off[i][a] - mean[a]) * (off[i][b] - mean[b])
				j.cov.Set(a, b, j.cov.At(a, b)+v)
			}
		}
		row := i
		if s.rows != nil {
			row = s.rows[i]
		}
		j.m[row] = math.Sqrt(w*(n-1)/n) * (off[i][0] - mean[0])
	}
	for a, v := range j.shift {
		if !(math.Abs(v) <= math.Sqrt(j.cov.At(a, a))) {
			j.shift = nil
			break
		}
	}
	return j
}

// deletion is nil when the weight of the moments has no inverse.
func (s *system) deletion(sol *solution) *deletion {
	m := sol.m
	d := &deletion{s: s, m: m, p: s.parameters(), k: len(m.of)}
	var inverse mat.SymDense
	if err := sol.ch.InverseTo(&inverse); err != nil {
		return nil
	}
	for i := range d.k {
		d.inverse = append(d.inverse, mat.Row(nil, i, &inverse))
	}
	d.whole, d.part, d.moved = make([]linearSums, d.k), make([]linearSums, d.k), make([]linearSums, d.k)
	for l, c := range s.legs {
		d.slope = append(d.slope, d.slopes(c))
		d.shells = append(d.shells, d.gather(l))
		for sh := range d.shells[l] {
			if st := &d.shells[l][sh]; st.present > 0 {
				d.moments(l, sh, -1, st.whole)
				for k := range d.whole {
					d.whole[k].add(&st.whole[k], 1)
				}
			}
		}
	}
	return d
}

// slopes are the centred changes of the functions with -ln of the mean of the axis.
func (d *deletion) slopes(c *conditions) [][]float64 {
	out := make([][]float64, d.k)
	for k, of := range d.m.of {
		fn := d.s.functions[of]
		g := make([]float64, len(c.w))
		for i, z := range c.z {
			if z >= fn.knot {
				continue
			}
			g[i] = z
			if fn.factor != nil {
				g[i] *= fn.factor(d.s, c, i)
			}
		}
		out[k] = c.centred(g)
	}
	return out
}

func (c *conditions) columns(i int) columns {
	v := columns{1, c.y1[i], c.y2[i]}
	if c.first != nil {
		v[3], v[4] = c.first[i], c.second[i]
	}
	return v
}

func (v *columns) add(x *columns, times float64) {
	for j := range v {
		v[j] += times * x[j]
	}
}

func (v *linearSums) add(x *linearSums, times float64) {
	for j := range v {
		v[j] += times * x[j]
	}
}

// gather sums leg l by shell.
func (d *deletion) gather(l int) []stratum {
	c := d.s.legs[l]
	out := make([]stratum, c.in.Shells)
	for sh := range out {
		out[sh].f, out[sh].slope = make([]columns, d.k), make([]columns, d.k)
		out[sh].whole = make([]linearSums, d.k)
	}
	for i, sh := range c.in.Shell {
		w := c.w[i]
		if w == 0 {
			continue
		}
		st, v := &out[sh], c.columns(i)
		st.present += w
		st.centring += w * c.u[i]
		if c.u[i] > 0 {
			st.used += w
		}
		st.first += w * v[3]
		st.second += w * v[4]
		wu := d.m.wu[l][i]
		st.one.add(&v, wu)
		for k := range d.k {
			st.f[k].add(&v, wu*d.m.f[l][k][i])
			st.slope[k].add(&v, wu*d.slope[l][k][i])
		}
	}
	for sh := range out {
		if st := &out[sh]; st.present > 0 {
			st.first /= st.present
			st.second /= st.present
		}
	}
	return out
}

// change is what one count less does to a shell.
type change struct {
	thin, thick, axis float64 // its means over what they were
	first, second     float64 // means of h Q and h^2 T, in units of the old mean of thin
	centring          float64
	unit, cubic       float64 // what h Q and h^2 T are over what they were
}

// alone reports whether a shell has nothing to give without row i: a function less its mean is
// 0 where it has one reflection.
func (st *stratum) alone(c *conditions, i int) bool {
	return st.present <= 1 || (c.u[i] > 0 && (st.used <= 1 || st.centring <= c.u[i]))
}

// lost is the change by row i, none for i < 0; false when a mean is not positive.
func (st *stratum) lost(c *conditions, i int) (change, bool) {
	ch := change{1, 1, 1, st.first, st.second, st.centring, 1, 1}
	if i < 0 {
		return ch, true
	}
	n := st.present
	v := c.columns(i)
	ch.thin, ch.thick = (n-v[1])/(n-1), (n-v[2])/(n-1)
	ch.first, ch.second = (n*st.first-v[3])/(n-1), (n*st.second-v[4])/(n-1)
	ch.centring -= c.u[i]
	if c.u[i] > 0 {
		ch.axis = (st.used - c.z[i]) / (st.used - 1)
	}
	ch.unit, ch.cubic = 1/ch.thin, 1/ch.thin // h Q goes as mean1^-power, h^2 T as mean1^(1-2 power)
	if c.power == 2 {
		ch.unit, ch.cubic = ch.unit*ch.unit, ch.unit*ch.unit*ch.unit
	}
	return ch, ch.thin > 0 && ch.thick > 0 && ch.axis > 0
}

// moments works out what shell sh of leg l gives to each moment without one count of
// row i; i < 0 leaves none out.
func (d *deletion) moments(l, sh, i int, out []linearSums) bool {
	c, st := d.s.legs[l], &d.shells[l][sh]
	if i >= 0 && st.alone(c, i) {
		clear(out)
		return true
	}
	ch, ok := st.lost(c, i)
	if !ok {
		return false
	}
	one := st.one
	var v columns
	var wu, grown float64
	if i >= 0 {
		v = c.columns(i)
		wu = d.m.wu[l][i] / c.w[i]
		one.add(&v, -wu)
		grown = 1/ch.axis - 1
	}
	for k, of := range d.m.of {
		sum := st.f[k]
		if i >= 0 {
			sum.add(&st.slope[k], grown)
			f := d.m.f[l][k][i] + grown*d.slope[l][k][i]
			sum.add(&v, -wu*f)
			if c.u[i] > 0 {
				sum.add(&one, c.u[i]*f/ch.centring) // the centre is that of the rest
			}
			fn := &d.s.functions[of]
			if by := power(ch.thin, fn.thin) * power(ch.thick, fn.thick); by != 1 {
				sum.add(&sum, by-1)
			}
		}
		d.linear(&sum, ch, c, sh, &out[k])
	}
	return true
}

func power(x float64, n int) float64 {
	switch n {
	case 0:
		return 1
	case 1:
		return x
	case -1:
		return 1 / x
	}
	return math.Pow(x, float64(n))
}

// linear turns sums in units of the old shell means into those of the model in units of
// the new ones; see newSystem and bend for the columns.
func (d *deletion) linear(sum *columns, ch change, c *conditions, sh int, out *linearSums) {
	y1 := sum[1] / ch.thin
	out[0] = y1 - sum[0]
	if d.p > int(MQ) {
		q := d.s.bent
		first, second := ch.first*ch.unit, ch.second*ch.cubic
		mean := first + q*(first*first-second/2)
		out[1] = sum[3]*ch.unit*(1+q*first) - q*sum[4]*ch.cubic/2 - mean*y1
	}
	if d.p > int(MQO) {
		out[2] = c.inverse[sh] / ch.thick * out[0]
	}
	out[d.p] = y1 - sum[2]/ch.thick
}

// without gives the moments without one count of row i, until the next call.
func (d *deletion) without(i int) ([]linearSums, bool) {
	moved := d.moved
	copy(moved, d.whole)
	for l, c := range d.s.legs {
		if c.w[i] == 0 {
			continue
		}
		sh := int(c.in.Shell[i])
		if !d.moments(l, sh, i, d.part) {
			return nil, false
		}
		for k := range moved {
			moved[k].add(&d.part[k], 1)
			moved[k].add(&d.shells[l][sh].whole[k], -1)
		}
	}
	return moved, true
}

// solve minimises the distance of the moments from 0 by elimination; a leading pivot
// is positive where the whole has been solved.
func (d *deletion) solve(sums []linearSums) (theta [3]float64) {
	var n [3]linearSums
	for i := range sums {
		var w linearSums
		for k := range sums {
			w.add(&sums[k], d.inverse[i][k])
		}
		for e := range d.p {
			n[e].add(&w, sums[i][e])
		}
	}
	for e := range d.p {
		for r := e + 1; r < d.p; r++ {
			n[r].add(&n[e], -n[r][e]/n[e][e])
		}
	}
	for e := d.p - 1; e >= 0; e-- {
		theta[e] = n[e][d.p]
		for j := e + 1; j < d.p; j++ {
			theta[e] -= n[e][j] * theta[j]
		}
		theta[e] /= n[e][e]
	}
	return theta
}
