package difference

import "math"

// InverseVariance returns the inverse-variance mean of each pair over the
// pooled local mean, with the thin sigma multiplied by ratio (0 means 1). Noise
// of the pair drops out of its slope only when VarThin and VarThick stand in
// the true ratio; Tipping says how far that may be wrong.
func (p *Pairs) InverseVariance(ratio float64) *Strengths {
	if ratio == 0 {
		ratio = 1
	}
	if !(ratio > 0) {
		panic("difference: InverseVariance: ratio is not above zero")
	}
	s := p.strengths(AxisInverseVariance, p.inverseVarianceMean(ratio))
	for i := range s.Var {
		a, b := ratio*ratio*p.VarThin[i], p.VarThick[i]
		s.Var[i] = a * b / (a + b) / (p.MeanPooled[i] * p.MeanPooled[i])
	}
	return s
}

// Naive returns the thin or the thick intensity or the plain mean of both over
// the pooled local mean. Such an axis shares the noise of the difference: it is
// drawn with its ghost and concluded from never. It panics on another axis.
func (p *Pairs) Naive(axis Axis) *Strengths {
	c1, c2 := naiveCoefficients(axis)
	j := make([]float64, p.Len())
	for i := range j {
		j[i] = c1*p.Thin[i] + c2*p.Thick[i]
	}
	s := p.strengths(axis, j)
	for i := range s.Var {
		s.Var[i] = (c1*c1*p.VarThin[i] + c2*c2*p.VarThick[i]) / (p.MeanPooled[i] * p.MeanPooled[i])
	}
	return s
}

func naiveCoefficients(axis Axis) (c1, c2 float64) {
	switch axis {
	case AxisThin:
		return 1, 0
	case AxisThick:
		return 0, 1
	case AxisMean:
		return 0.5, 0.5
	}
	panic("difference: Naive: axis " + axis.String() + " is not naive")
}

func (p *Pairs) strengths(axis Axis, j []float64) *Strengths {
	s := &Strengths{Axis: axis, Z: j, Var: make([]float64, len(j)), N: len(j), Correlation: math.NaN(), PlainCorrelation: math.NaN()}
	for i := range j {
		j[i] /= p.MeanPooled[i]
	}
	return s
}
