package analysis

import (
	"math"
	"sort"

	"thinward/analysis/evidence"
)

// ledgerSeries judges what belongs to the series as a whole.
func (s *Study) ledgerSeries(b *ledgerBook) {
	if s.scaled == nil {
		return
	}
	growth, se := s.damage()
	together, known := s.doseOrder()
	b.add("dose order", "", evidence.DoseOrder(together, known, growth, se))
	b.add("growth of B with dose", "", evidence.DoseGrowth(growth, se))
	b.add("number of crystals", "", evidence.Crystals(len(s.primaryContrasts())))
	if s.forbidden != nil {
		n := 0
		for _, f := range s.forbidden {
			if f.Element == "all" {
				n += f.N
			}
		}
		b.add("forbidden reflections", "", evidence.Recorded(n))
	}
	measured, failed := 0, 0
	for i := range s.Series.Crystals {
		for j := range s.Series.Crystals[i].Positions {
			if s.Series.Crystals[i].Positions[j].ReplicateOf != "" {
				measured++
			}
		}
	}
	for _, c := range s.controls {
		if c.Control == controlReplicate && c.Verdict == VerdictFails {
			failed++
		}
	}
	b.add("replicate position", "", evidence.ReplicateOf(measured, failed))
}

// doseOrder counts the crystals whose dose, or order of measurement, rises with
// thickness throughout, of those where it is known and varies.
func (s *Study) doseOrder() (together, known int) {
	for i := range s.Series.Crystals {
		c := &s.Series.Crystals[i]
		order := c.byThickness()
		if len(order) < 2 {
			continue
		}
		var time []float64
		for _, j := range order {
			v := c.Positions[j].DosePerA2
			if v == 0 {
				v = float64(c.Positions[j].Order)
			}
			if v == 0 {
				time = nil
				break
			}
			time = append(time, v)
		}
		if time == nil {
			continue
		}
		known++
		if sort.Float64sAreSorted(time) && time[len(time)-1] > time[0] {
			together++
		}
	}
	return together, known
}

// damage is the slope of B against dose within crystals, pooled, with its
// standard error; NaN where dose or B is missing. The B of a crystal are against
// its thinnest position, so their errors are taken as those of differences, half on
// either side.
func (s *Study) damage() (slope, se float64) {
	num, den, variance := 0.0, 0.0, 0.0
	for i, sc := range s.scaled {
		c := &s.Series.Crystals[i]
		var dose, b []float64
		worst := 0.0
		for j := range c.Positions {
			p := sc.slot[j]
			if c.Positions[j].DosePerA2 > 0 {
				dose, b = append(dose, c.Positions[j].DosePerA2), append(b, sc.Fit.B[p])
				worst = math.Max(worst, sc.Fit.BSE[p])
			}
		}
		md, mb := mean(dose), mean(b)
		for k := range dose {
			num += (dose[k] - md) * (b[k] - mb)
			den += (dose[k] - md) * (dose[k] - md)
			variance += (dose[k] - md) * (dose[k] - md) * worst * worst / 2
		}
	}
	if den == 0 || variance == 0 {
		return math.NaN(), math.NaN()
	}
	return num / den, math.Sqrt(variance) / den
}

func mean(v []float64) float64 {
	sum := 0.0
	for _, x := range v {
		sum += x / float64(len(v))
	}
	return sum
}
