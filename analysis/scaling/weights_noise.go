package scaling

import "math"

// noise adds the scoring sums of (a^2, b^2) for one reflection: residuals from
// the mean of the reflection within its position (or from the joint mean, where
// a position has too few equivalents), each carrying 1 - leverage degrees of
// freedom, so that pairs count once and the estimate is unbiased at low
// multiplicity.
func (w *worker) noise(j float64) {
	all := posSums{}
	for k := range w.obs {
		o := &w.obs[k]
		b := &w.byPos[o.p]
		b.n++
		d := o.g * o.g / o.vAll
		b.d += d
		num := o.g * (o.r + o.gj) / o.vAll
		b.num += num
		all.n++
		all.d += d
		all.num += num
	}
	nu := w.s.nu
	for k := range w.obs {
		o := &w.obs[k]
		b := w.byPos[o.p]
		if w.joint[o.p] {
			b = all
		}
		if b.n < 2 {
			continue
		}
		e := o.r + o.gj - o.g*b.num/b.d
		df := 1 - o.g*o.g/(o.vAll*b.d)
		if !(df > 1e-6) {
			continue
		}
		z2 := e * e / (o.vAll * df)
		tau, info := 1.0, 0.5
		if !math.IsInf(nu, 1) {
			tau = (nu + 1) / (nu + z2)
			info = nu / (2 * (nu + 3))
		}
		x := o.g * j
		da, db := o.vExp/o.vAll, x*x/o.vAll
		f := 0.5 * df * (tau*z2 - 1)
		n := &w.sums.noise[o.p]
		n.gA += f * da
		n.gB += f * db
		n.hAA += df * info * da * da
		n.hAB += df * info * da * db
		n.hBB += df * info * db * db
		n.df += df
	}
	for k := range w.obs {
		w.byPos[w.obs[k].p] = posSums{}
	}
	w.shared(j)
}

// shared adds to the regression of products of residuals of one raw index in
// different positions on the covariance they would have if all of the smallest
// b^2 were common.
func (w *worker) shared(j float64) {
	raws := len(w.heads) - 1
	least := w.s.leastB2()
	if raws < 2 || !(least > 0) || !(j > 0) {
		return
	}
	lost := 1 - 1/float64(raws)
	for h := range raws {
		part := w.obs[w.heads[h]:w.heads[h+1]]
		for a := range part {
			for b := range a {
				p, q := &part[a], &part[b]
				if p.p == q.p {
					continue
				}
				scale := 1 / math.Sqrt(p.vAll*q.vAll)
				c := least * p.g * q.g * j * j * scale * lost
				zp, zq := clip(p.r/math.Sqrt(p.vAll)), clip(q.r/math.Sqrt(q.vAll))
				w.sums.sharedNum += c * zp * zq
				w.sums.sharedDen += c * c * 0.5 * (zp*zp + zq*zq) / lost
			}
		}
	}
}

func clip(z float64) float64 { return math.Max(-3, math.Min(3, z)) }

// renewNoise moves (a^2, b^2) of every position by one scoring step and renews
// the shared part; it reports the largest relative change.
func (s *state) renewNoise(n *sums, matched bool) float64 {
	const leastDF = 10
	change := 0.0
	for p := range n.noise {
		k := &n.noise[p]
		if k.df < leastDF {
			s.a2[p], s.b2[p] = 1, 0
			continue
		}
		a, b := scoringStep(k, s.a2[p], s.b2[p])
		v0, v1 := s.a2[p]+s.b2[p], a+b
		change = math.Max(change, math.Abs(v1-v0)/v0)
		s.a2[p], s.b2[p] = a, b
	}
	if matched && n.sharedDen > 0 {
		s.shared = math.Max(0, math.Min(0.9, n.sharedNum/n.sharedDen))
	}
	return change
}

// scoringStep solves the two equations, bounded to a factor of 4 in both and to
// b^2 >= 0; at that bound a^2 is solved for alone. A noise model that falls faster
// than the scale improves would call all observations outliers.
func scoringStep(k *noiseSums, a, b float64) (a2, b2 float64) {
	const leastA2, smallB2 = 1e-8, 1e-4
	det := k.hAA*k.hBB - k.hAB*k.hAB
	var da, db float64
	if det > 1e-10*k.hAA*k.hBB {
		da = (k.hBB*k.gA - k.hAB*k.gB) / det
		db = (k.hAA*k.gB - k.hAB*k.gA) / det
	} else if k.hAA > 0 {
		da = k.gA / k.hAA
	}
	b2 = b + db
	if b2 < 0 {
		b2 = 0
		da = (k.gA + k.hAB*b) / k.hAA
	}
	if b > smallB2 {
		b2 = math.Max(b2, b/4)
	}
	b2 = math.Min(b2, 4*b+0.05)
	a2 = math.Max(math.Min(a+da, 4*a), math.Max(a/4, leastA2))
	return a2, b2
}
