package difference

import "math"

// ScoreBins is the number of bins of equal count of a score.
const ScoreBins = 20

// Score says how strong a pattern the differences draw against an axis. Value
// is the mean square of the z-scores of ScoreBins bins by that axis (z is the
// mean of the bin's eps over its standard error from the scatter within), 1
// for a flat curve. Ghost is what noise alone would bring it to,
//
//	mean over bins of 1 + (ghost mean / standard error)^2
//
// and Share the part of the pattern that goes when the ghost is taken off,
// (Value - Rest) / (Value - 1) with Rest the value after that, held between 0
// and 1; NaN when Value is below 2 and there is little to explain. Strength, Mean, SE
// and GhostMean describe the bins.
type Score struct {
	Axis                          Axis
	Value, Ghost, Share           float64
	Strength, Mean, SE, GhostMean []float64
}

// Score scores a naive or the inverse-variance axis. Errors are those of
// Ghost; fewer than 2 pairs a bin give NaN.
func (p *Pairs) Score(axis Axis) (*Score, error) {
	g, err := p.Ghost(axis)
	if err != nil {
		return nil, err
	}
	var z []float64
	if axis.Naive() {
		z = p.Naive(axis).Z
	} else {
		z = p.InverseVariance(1).Z
	}
	s := scoreOf(z, p.Eps())
	s.Axis = axis
	lo, hi := binRanks(len(z))
	if len(lo) == 0 {
		return s, nil
	}
	s.GhostMean = g.Windows(lo, hi)
	rest := 0.0
	for b, m := range s.GhostMean {
		t := m / s.SE[b]
		s.Ghost += (1 + t*t) / ScoreBins
		r := (s.Mean[b] - m) / s.SE[b]
		rest += r * r / ScoreBins
	}
	s.Share = math.NaN()
	if s.Value >= 2 {
		s.Share = math.Min(math.Max((s.Value-rest)/(s.Value-1), 0), 1)
	}
	return s, nil
}

// ScoreOf scores eps against any strengths, parallel; NaN strengths are left
// out. Ghost and Share are NaN.
func ScoreOf(z, eps []float64) *Score {
	if len(z) != len(eps) {
		panic("difference: ScoreOf: strengths and differences are not parallel")
	}
	var a, b []float64
	for i := range z {
		if !math.IsNaN(z[i]) && !math.IsNaN(eps[i]) {
			a, b = append(a, z[i]), append(b, eps[i])
		}
	}
	s := scoreOf(a, b)
	s.Ghost, s.Share = math.NaN(), math.NaN()
	return s
}

func scoreOf(z, eps []float64) *Score {
	s := &Score{}
	lo, hi := binRanks(len(z))
	if len(lo) == 0 {
		s.Value, s.Ghost, s.Share = math.NaN(), math.NaN(), math.NaN()
		return s
	}
	order, _ := ascending(z)
	for b := range lo {
		n, strength, mean := float64(hi[b]-lo[b]), 0.0, 0.0
		for _, i := range order[lo[b]:hi[b]] {
			strength += z[i] / n
			mean += eps[i] / n
		}
		square := 0.0
		for _, i := range order[lo[b]:hi[b]] {
			square += (eps[i] - mean) * (eps[i] - mean)
		}
		se := math.Sqrt(square / (n * (n - 1)))
		s.Strength, s.Mean, s.SE = append(s.Strength, strength), append(s.Mean, mean), append(s.SE, se)
		s.Value += mean * mean / (se * se) / ScoreBins
	}
	return s
}

// binRanks returns the rank windows of the bins, none when a bin would hold
// fewer than two pairs.
func binRanks(n int) (lo, hi []int) {
	if n < 2*ScoreBins {
		return nil, nil
	}
	for b := range ScoreBins {
		lo = append(lo, b*n/ScoreBins)
		hi = append(hi, (b+1)*n/ScoreBins)
	}
	return lo, hi
}
