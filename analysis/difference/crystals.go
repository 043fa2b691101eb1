package difference

import (
	"fmt"
	"math"

	"thinward/analysis/intensity"
)

// OtherCrystal holds the merged positions, on their own common scale, of a
// crystal that the pairs are not from.
type OtherCrystal struct {
	Name      string
	Positions []*intensity.Merged
}

// LeastCorrelation is the correlation with the pairs below which the axis
// crystals is refused: two crystals of one structure, indexed alike, agree
// better.
const LeastCorrelation = 0.5

// RefusedError says that the other crystals do not agree with the pairs well
// enough to say how strong a reflection is.
type RefusedError struct {
	Correlation float64
	N           int
}

// Error names the correlation, the limit and the usual cause.
func (e *RefusedError) Error() string {
	return fmt.Sprintf("strengths in the other crystals correlate by %.3f with those of the pair (%d reflections), less than %g: look at their indexing", e.Correlation, e.N, LeastCorrelation)
}

// deviationScatter is the reproducible relative scatter of one crystal's
// intensities about the mean law, 20 to 40 % in real and many-beam data. Means
// over positions are weighted with it beside the variances, so that a position
// with much counting does not speak alone.
const deviationScatter = 0.3

// giant is the strength beyond which correlations clip, so that a few
// reflections do not decide.
const giant = 6

// Crystals returns the strength of each pair's reflection in the other
// crystals: each position divided by its own shell means, the positions of a
// crystal averaged, then the crystals, each time with weights
// 1/(v + (0.3 e)^2), e the strength and v its variance. Var is what the given
// variances make of that. A reflection that no other crystal has is NaN.
// Correlations are with the mean strength of the pair, both clipped at 6; below
// LeastCorrelation the error is a *RefusedError. Indices of all crystals must
// have been brought to one setting. Other errors: no other crystal, a position
// that is not dense over the catalogue, no reflection in common.
func (p *Pairs) Crystals(others []OtherCrystal) (*Strengths, error) {
	if len(others) == 0 {
		return nil, fmt.Errorf("no other crystal to take strengths from")
	}
	perCrystal := make([]relative, 0, len(others))
	for _, c := range others {
		positions := make([]relative, 0, len(c.Positions))
		for _, m := range c.Positions {
			r, err := p.ownShells(m)
			if err != nil {
				return nil, fmt.Errorf("crystal %s: %w", c.Name, err)
			}
			positions = append(positions, r)
		}
		perCrystal = append(perCrystal, combine(positions, p.Len()))
	}
	all := combine(perCrystal, p.Len())
	s := &Strengths{Axis: AxisCrystals, Z: all.e, Var: all.v}
	p.correlate(s)
	if s.N == 0 {
		return nil, fmt.Errorf("no reflection of the pairs was measured in another crystal")
	}
	if s.N < p.Len() {
		s.Warnings = append(s.Warnings, intensity.Warning{Code: "axis-incomplete", Text: fmt.Sprintf(
			"%d of %d pairs have no strength in another crystal and are left out of what uses this axis", p.Len()-s.N, p.Len())})
	}
	if !(s.Correlation >= LeastCorrelation) {
		return nil, &RefusedError{s.Correlation, s.N}
	}
	return s, nil
}

// Third returns the strength in another position of the same crystal, divided
// by its own shell means; correlations as in Crystals. It shares the crystal's
// own deviations with the pair, which no counting removes. Errors: a position
// that is not dense over the catalogue, no reflection in common.
func (p *Pairs) Third(m *intensity.Merged) (*Strengths, error) {
	r, err := p.ownShells(m)
	if err != nil {
		return nil, err
	}
	s := &Strengths{Axis: AxisThird, Z: r.e, Var: r.v}
	p.correlate(s)
	if s.N == 0 {
		return nil, fmt.Errorf("no reflection of the pairs was measured in the third position")
	}
	return s, nil
}

// relative is a set of strengths parallel to the pairs, NaN where missing.
type relative struct{ e, v []float64 }

// ownShells brings a merged position to its own local means at the pairs.
func (p *Pairs) ownShells(m *intensity.Merged) (relative, error) {
	cat := p.source.catalogue
	if len(m.J) != cat.Len() {
		return relative{}, fmt.Errorf("position has %d reflections where the catalogue has %d", len(m.J), cat.Len())
	}
	var j, epsilon, s2 []float64
	for u, n := range m.N {
		if n > 0 && !cat.Absent[u] {
			j = append(j, m.J[u])
			epsilon = append(epsilon, float64(cat.Epsilon[u]))
			s2 = append(s2, cat.S2[u])
		}
	}
	sh := intensity.EqualCountShells(s2, shellCount(len(s2)))
	mean, signal := shellMeans(j, epsilon, sh)
	r := relative{make([]float64, p.Len()), make([]float64, p.Len())}
	for i, u := range p.Unique {
		r.e[i], r.v[i] = math.NaN(), math.Inf(1)
		if shell := sh.Find(cat.S2[u]); m.N[u] > 0 && shell >= 0 && signal[shell] {
			local := mean[shell] * p.Epsilon[i]
			r.e[i], r.v[i] = m.J[u]/local, m.Var[u]/(local*local)
		}
	}
	return r, nil
}

func combine(sets []relative, n int) relative {
	out := relative{make([]float64, n), make([]float64, n)}
	for i := range out.e {
		first, w := 0.0, 0.0
		for _, r := range sets {
			if !math.IsNaN(r.e[i]) {
				first += r.e[i] / r.v[i]
				w += 1 / r.v[i]
			}
		}
		if w == 0 {
			out.e[i], out.v[i] = math.NaN(), math.Inf(1)
			continue
		}
		scatter := deviationScatter * math.Max(first/w, 0)
		sum, total, square := 0.0, 0.0, 0.0
		for _, r := range sets {
			if !math.IsNaN(r.e[i]) {
				x := 1 / (r.v[i] + scatter*scatter)
				sum += x * r.e[i]
				total += x
				square += x * x * r.v[i]
			}
		}
		out.e[i], out.v[i] = sum/total, square/(total*total)
	}
	return out
}

// correlate fills N and the correlations of s with the mean strength of the
// pair. The weight of a shell falls with the share of noise in both.
func (p *Pairs) correlate(s *Strengths) {
	noise, count := make([]float64, p.Shells), make([]float64, p.Shells)
	x, y, shell := []float64{}, []float64{}, []int32{}
	for i, z := range s.Z {
		if math.IsNaN(z) {
			continue
		}
		s.N++
		x = append(x, math.Min(z, giant))
		y = append(y, math.Min(0.5*(p.Thin[i]/p.MeanThin[i]+p.Thick[i]/p.MeanThick[i]), giant))
		shell = append(shell, p.Shell[i])
		noise[p.Shell[i]] += s.Var[i] + 0.25*(p.VarThin[i]/(p.MeanThin[i]*p.MeanThin[i])+p.VarThick[i]/(p.MeanThick[i]*p.MeanThick[i]))
		count[p.Shell[i]]++
	}
	w := make([]float64, len(x))
	for i, k := range shell {
		share := 1 / (1 + noise[k]/count[k])
		w[i] = share * share
	}
	s.Correlation = correlation(x, y, w)
	s.PlainCorrelation = correlation(x, y, nil)
}

// correlation is the weighted product-moment correlation, NaN when one side
// does not vary.
func correlation(x, y, w []float64) float64 {
	weight := func(i int) float64 {
		if w == nil {
			return 1
		}
		return w[i]
	}
	var sw, mx, my, xx, yy, xy float64
	for i := range x {
		sw += weight(i)
		mx += weight(i) * x[i]
		my += weight(i) * y[i]
	}
	mx, my = mx/sw, my/sw
	for i := range x {
		dx, dy := x[i]-mx, y[i]-my
		xx += weight(i) * dx * dx
		yy += weight(i) * dy * dy
		xy += weight(i) * dx * dy
	}
	if xx == 0 || yy == 0 {
		return math.NaN()
	}
	return xy / math.Sqrt(xx*yy)
}
