package difference

// GhostSlope is the slope that noise alone gives the line of eps on a naive
// axis a = c1 thin + c2 thick,
//
//	mean(c1 v1 - c2 v2) / Var(a)
//
// in eps units, v at the expected intensities and Var(a) as observed. With
// variances that do not change with intensity it is the regression to the mean
// of Bland & Altman (1986). It panics on an axis that is not naive.
func (p *Pairs) GhostSlope(axis Axis) float64 {
	c1, c2 := naiveCoefficients(axis)
	z := p.Naive(axis).Z
	slope := 0.0
	for i := range z {
		slope += (c1*p.VarThin[i] - c2*p.VarThick[i]) / (p.MeanPooled[i] * p.MeanPooled[i]) / float64(len(z))
	}
	xx, _ := products(z, z)
	return slope / (xx / float64(len(z)))
}

// products returns the sums of squares of x and of products of x and y about
// their means.
func products(x, y []float64) (xx, xy float64) {
	mx, my := mean(x), mean(y)
	for i := range x {
		xx += (x[i] - mx) * (x[i] - mx)
		xy += (x[i] - mx) * (y[i] - my)
	}
	return xx, xy
}

func mean(x []float64) float64 {
	m := 0.0
	for i, v := range x {
		m += (v - m) / float64(i+1)
	}
	return m
}
