package scaling

import "math"

// state is where the fit stands: parameters, intensities and the noise model
// inside the weights.
type state struct {
	theta  []float64 // position by position: spline coefficients, then B
	off    []int     // start of each position in theta
	a2, b2 []float64
	shared float64 // share of b^2 common to equal raw indices
	nu     float64
	report bool    // weights from reported variances
	relax  float64 // J moves by this times the difference to its weighted mean
	j      []float64
	dj     []float64 // information on j
}

func newState(t *table, set *Settings) *state {
	p := len(t.curve)
	s := &state{
		off: make([]int, p), a2: make([]float64, p), b2: make([]float64, p),
		nu: set.TailDF, relax: 1, report: set.Weighting == WeightReported,
		j: make([]float64, len(t.id)), dj: make([]float64, len(t.id)),
	}
	at := 0
	for i, c := range t.curve {
		s.off[i] = at
		at += c.width() + 1
		s.a2[i] = 1
		if !s.report {
			s.b2[i] = 0.09
		}
	}
	s.theta = make([]float64, at)
	return s
}

func (s *state) size() int { return len(s.theta) }

func (s *state) indexB(t *table, p int) int { return s.off[p] + t.curve[p].width() }

// leastB2 is the smallest b^2 of all positions, the most that can be shared.
func (s *state) leastB2() float64 {
	least := s.b2[0]
	for _, b := range s.b2 {
		least = min(least, b)
	}
	return least
}

// firstJ sets J to the plain mean of I/g.
func (t *table) firstJ(s *state) {
	k := make([]float64, len(t.curve))
	for p := range k {
		k[p] = math.Exp(-s.theta[s.off[p]])
	}
	for g := range t.id {
		sum := 0.0
		for i := t.first[g]; i < t.first[g+1]; i++ {
			sum += t.y[i] * k[t.pos[i]]
		}
		s.j[g] = sum / float64(t.first[g+1]-t.first[g])
	}
}

// ownDF counts, by position, observations beyond the first of each reflection.
func (t *table) ownDF() []int {
	df := make([]int, len(t.curve))
	seen := make([]int, len(t.curve))
	for g := range t.id {
		for i := t.first[g]; i < t.first[g+1]; i++ {
			p := t.pos[i]
			if seen[p] == g+1 {
				df[p]++
			}
			seen[p] = g + 1
		}
	}
	return df
}
