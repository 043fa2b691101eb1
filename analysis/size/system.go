package size

import (
	"fmt"
	"math"
	"sort"
)

// system is the set of linear moment conditions of one model over its legs.
type system struct {
	legs       []*conditions
	model      Model
	curb       CurbForm
	ref1, ref2 float64 // mean of thin and thick over the lowest third in s^2
	rate       float64 // mean count rate of the thin intensity there
	strongest  float64 // greatest expected h y of the axis
	used       float64
	present    float64
	shells     int
	weight     []float64 // of each row, the same in every leg that has it
	functions  []function
	rows       []int   // of the input that take part, nil for all of them
	all        int     // rows of the input
	bent       float64 // q at which the curb is taken to second order
}

// function is min(z, knot) times a factor that goes as powers of the two shell means.
type function struct {
	knot        float64
	factor      func(s *system, c *conditions, i int) float64 // nil for one
	thin, thick int
}

// conditions are the columns of one leg: x[p][i] multiplies parameter p.
type conditions struct {
	*frame
	x       [][]float64
	t       []float64 // h Q, less its second order in q
	tMean   []float64 // by shell
	first   []float64 // h Q
	second  []float64 // h^2 T
	power   float64   // t goes as mean1^-power
	f       [][]float64
	inverse []float64   // by shell: reference over mean2
	middle  [][]float64 // f less its mean by shell
}

func (s *system) parameters() int { return int(s.model) + 1 }

func (s *system) frames() []*frame {
	f := make([]*frame, len(s.legs))
	for i, l := range s.legs {
		f[i] = l.frame
	}
	return f
}

func newSystem(legs []*frame, model Model, curb CurbForm) (*system, error) {
	s := &system{model: model, curb: curb}
	s.used, s.present, s.shells = counts(legs)
	s.references(legs)
	all := len(legs[0].w)
	legs, s.rows = present(legs)
	s.all = all
	s.weight = make([]float64, len(legs[0].w))
	for i := range s.weight {
		s.weight[i] = rowWeight(legs, i)
	}
	for _, f := range legs {
		c := &conditions{frame: f}
		m := make([]float64, len(f.w))
		for i := range m {
			m[i] = f.y1[i] - 1
		}
		c.x = append(c.x, m)
		if model >= MQ {
			if err := s.addCurb(c); err != nil {
				return nil, err
			}
		}
		if model == MQO {
			o := make([]float64, len(f.w))
			c.inverse = make([]float64, f.in.Shells)
			for sh, mean := range f.mean2 {
				c.inverse[sh] = s.ref2 / mean
			}
			for i, sh := range f.in.Shell {
				o[i] = c.inverse[sh] * (f.y1[i] - 1)
			}
			c.x = append(c.x, o)
		}
		s.legs = append(s.legs, c)
	}
	return s, nil
}

// references finds the means over the lowest third in s^2, pooled over the legs.
func (s *system) references(legs []*frame) {
	var n, n1, n2, nr float64
	for _, f := range legs {
		limit := math.Inf(1)
		if f.in.S2 != nil {
			sorted := append([]float64(nil), f.in.S2...)
			sort.Float64s(sorted)
			limit = sorted[(len(sorted)-1)/3]
		}
		for i, w := range f.w {
			if w == 0 || (f.in.S2 != nil && f.in.S2[i] > limit) {
				continue
			}
			n += w
			n1 += w * f.in.Thin[i]
			n2 += w * f.in.Thick[i]
			if f.in.Exposure != nil {
				nr += w * f.in.Thin[i] * f.in.Exposure[i]
			}
		}
	}
	s.ref1, s.ref2, s.rate = n1/n, n2/n, nr/n
}

// addCurb appends the column of the curb, of first order until bend is called.
func (s *system) addCurb(c *conditions) error {
	in := c.in
	halves := in.ThinA != nil && in.ThinB != nil
	if !halves && in.VarThin == nil {
		return fmt.Errorf("size: Moments: the curb needs VarThin, or ThinA and ThinB")
	}
	if s.curb == CurbRate && in.Exposure == nil {
		return fmt.Errorf("size: Moments: the curb by count rate needs Exposure")
	}
	c.power = 1
	if s.curb == CurbStrength {
		c.power = 2
	}
	n := len(c.w)
	c.first, c.second, c.t, c.tMean = make([]float64, n), make([]float64, n), make([]float64, n), make([]float64, in.Shells)
	for i, sh := range in.Shell {
		if c.w[i] == 0 {
			continue
		}
		// Powers of the intensity less what their noise adds: E I^2 = J^2 + v and
		// E I^3 = J^3 + 3 J v.
		var square, cube float64
		if j := in.Thin[i]; halves {
			square = in.ThinA[i] * in.ThinB[i]
			mean, d := (in.ThinA[i]+in.ThinB[i])/2, in.ThinA[i]-in.ThinB[i]
			cube = mean * (mean*mean - 3*d*d/4)
		} else {
			square, cube = j*j-in.VarThin[i], j*(j*j-3*in.VarThin[i])
		}
		unit := s.curbUnit(c, i)
		mean := c.mean1[sh]
		c.first[i] = square / (mean * unit)
		c.second[i] = cube / (mean * unit * unit)
		if c.u[i] > 0 {
			s.strongest = math.Max(s.strongest, c.z[i]*mean/unit)
		}
	}
	c.x = append(c.x, make([]float64, n))
	c.bend(0)
	return nil
}

// curbUnit is the intensity at which the curb of row i is q.
func (s *system) curbUnit(c *conditions, i int) float64 {
	switch s.curb {
	case CurbStrength:
		return c.mean1[c.in.Shell[i]]
	case CurbRate:
		return s.rate / c.in.Exposure[i]
	}
	return s.ref1
}

// bend writes the column of the curb at an estimate q of its size. With
// y' = y exp(-q h y) over its own shell mean,
//
//	y - y' = q (t - <t> y),  t = h Q + q (h Q <h Q> - h^2 T/2) + O(q^2),
//
// <t> being taken of t.
func (c *conditions) bend(q float64) {
	mean := make([]float64, len(c.tMean))
	for i, sh := range c.in.Shell {
		if c.w[i] > 0 {
			mean[sh] += c.w[i] * c.first[i] / c.sum[sh]
		}
	}
	clear(c.tMean)
	for i, sh := range c.in.Shell {
		if c.w[i] > 0 {
			c.t[i] = c.first[i] + q*(c.first[i]*mean[sh]-c.second[i]/2)
			c.tMean[sh] += c.w[i] * c.t[i] / c.sum[sh]
		}
	}
	for i, sh := range c.in.Shell {
		if c.w[i] > 0 {
			c.x[1][i] = c.t[i] - c.tMean[sh]*c.y1[i]
		}
	}
}

// mostCurbed bounds the loss q h y of the strongest reflection in the second order,
// whose series holds for small losses only: at this one the next term is a sixth of
// its square, 4 %.
const mostCurbed = 0.5

// bend takes the curb of all legs to second order at q.
func (s *system) bend(q float64) {
	if s.strongest > 0 {
		most := mostCurbed / s.strongest
		q = math.Max(-most, math.Min(q, most))
	}
	s.bent = q
	for _, c := range s.legs {
		c.bend(q)
	}
}

// addFunctions appends min(z, knot), times the factor of like where that has one.
func (s *system) addFunctions(knots []float64, like function) {
	for _, k := range knots {
		like.knot = k
		s.functions = append(s.functions, like)
		for _, c := range s.legs {
			f := make([]float64, len(c.w))
			for i, z := range c.z {
				f[i] = min(z, k)
				if like.factor != nil {
					f[i] *= like.factor(s, c, i)
				}
			}
			c.f, c.middle = append(c.f, f), append(c.middle, c.centred(f))
		}
	}
}

// plain has no factor.
func plain() function { return function{} }

// inverseMean is the reference over the shell mean of the thick position.
func inverseMean() function {
	return function{factor: func(s *system, c *conditions, i int) float64 { return s.ref2 / c.mean2[c.in.Shell[i]] }, thick: -1}
}

// shellLevel is the shell mean of the thin position over the reference.
func shellLevel() function {
	return function{factor: func(s *system, c *conditions, i int) float64 { return c.mean1[c.in.Shell[i]] / s.ref1 }, thin: 1}
}

func exposure() function {
	return function{factor: func(_ *system, c *conditions, i int) float64 { return c.in.Exposure[i] }}
}

// residual is y1 - y2 less the model.
func (c *conditions) residual(theta []float64) []float64 {
	r := make([]float64, len(c.w))
	for i, w := range c.w {
		if w != 0 {
			r[i] = c.y1[i] - c.y2[i]
		}
	}
	for p, th := range theta {
		for i, x := range c.x[p] {
			if c.w[i] != 0 {
				r[i] -= th * x
			}
		}
	}
	return r
}

// influence adds to psi[k][i] what reflection i contributes to moment k at
// theta, uf being the weighted functions: its own product, and the moment's change
// through the shell means of y1, y2 and t, whose relative errors i makes up.
func (c *conditions) influence(psi [][]float64, uf [][]float64, wu, theta []float64, f [][]float64) {
	r := c.residual(theta)
	d1, d2 := c.slopes(theta)
	curb := len(theta) > 1
	var q float64
	if curb {
		q = theta[1]
	}
	shells := c.in.Shells
	g1, g2, gt := make([]float64, shells), make([]float64, shells), make([]float64, shells)
	for k := range f {
		clear(g1)
		clear(g2)
		clear(gt)
		for j, s := range c.in.Shell {
			wf := wu[j] * f[k][j]
			if wf == 0 {
				continue
			}
			if curb {
				gt[s] += wf * q * c.y1[j]
			}
			g1[s] += wf * d1[j]
			g2[s] += wf * d2[j]
		}
		own, out := uf[k], psi[k]
		for i, s := range c.in.Shell {
			if c.w[i] == 0 {
				continue
			}
			p := own[i]*r[i] + (g1[s]*(c.y1[i]-1)+g2[s]*(c.y2[i]-1))/c.sum[s]
			if curb {
				p += gt[s] * (c.t[i] - c.tMean[s]) / c.sum[s]
			}
			out[i] += p
		}
	}
}

// slopes is what the residual of each row gains from relative errors of its two shell
// means.
func (c *conditions) slopes(theta []float64) (d1, d2 []float64) {
	d1, d2 = make([]float64, len(c.w)), make([]float64, len(c.w))
	for j, s := range c.in.Shell {
		y1 := c.y1[j]
		d1[j] = -y1 + theta[0]*y1
		d2[j] = c.y2[j]
		if len(theta) > 1 {
			d1[j] -= theta[1] * (-c.power*c.t[j] + (c.power+1)*c.tMean[s]*y1)
		}
		if len(theta) > 2 {
			d1[j] += theta[2] * c.inverse[s] * y1
			d2[j] += theta[2] * c.x[2][j]
		}
	}
	return d1, d2
}
