package analysis

import (
	"math"
	"sort"

	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
)

// ledgerSeries judges what belongs to the series as a whole.
func (s *Study) ledgerSeries(b *ledgerBook) {
	if s.scaled == nil {
		return
	}
	growth, se := s.damage()
	together, known := s.doseOrder()
	b.add(checkDoseOrder, "", evidence.DoseOrder(together, known, growth, se))
	b.add(checkDoseGrowth, "", evidence.DoseGrowth(growth, se))
	s.ledgerCrystals(b)
	s.ledgerForbidden(b)
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
	b.add(checkReplicates, "", evidence.ReplicateOf(measured, failed))
}

// ledgerCrystals counts the crystals, and names pairs of positions that lie on two.
func (s *Study) ledgerCrystals(b *ledgerBook) {
	within := len(s.primaryContrasts())
	var pairs []placed
	for _, c := range s.list {
		if c.Across() {
			pairs = append(pairs, placed{s.Name(c), evidence.TwoSpecimens()})
		}
	}
	b.fold(checkCrystals, "pairs", 2, pairs)
	if within > 0 || len(pairs) == 0 {
		b.add(checkCrystals, "", evidence.Crystals(within))
	}
}

// ledgerForbidden says whether forbidden reflections that can be filled were recorded, and
// judges those of the centring, which cannot.
func (s *Study) ledgerForbidden(b *ledgerBook) {
	if s.forbidden == nil {
		return
	}
	n, centring, why := 0, "", ""
	for i := range s.forbidden {
		f := &s.forbidden[i]
		switch {
		case f.Element == "all":
			n += f.N
			if f.Why == intensity.NoneForbidden || f.Why == intensity.OnlyCentring {
				why = f.Why
			}
		case f.Centring:
			centring = f.Element
		}
	}
	if why != "" {
		b.add(checkForbidden, "", evidence.Finding{Value: math.NaN(), Verdict: evidence.NotKnown, Why: why})
	} else {
		b.add(checkForbidden, "", evidence.Recorded(n))
	}
	if centring == "" {
		return
	}
	var nulls []placed
	for _, c := range s.list {
		if !c.Primary {
			continue
		}
		thin, thick := &s.Series.Crystals[c.Crystal], &s.Series.Crystals[c.ThickCrystal]
		one := forbiddenOf(s.forbidden, thin.Name, thin.Positions[c.Thin].Name, centring)
		two := forbiddenOf(s.forbidden, thick.Name, thick.Positions[c.Thick].Name, centring)
		if one != nil && two != nil {
			nulls = append(nulls, placed{s.Name(c), evidence.CentringNull(one.Ratio, one.SU, two.Ratio, two.SU)})
		}
	}
	b.fold(checkNull, "contrasts", 0, nulls)
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
		time := timesOf(c, order)
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

// timesOf gives the dose of the positions, or where that is not known of all the order
// in which they were measured; nil when neither is.
func timesOf(c *Specimen, positions []int) []float64 {
	var dose, order []float64
	for _, j := range positions {
		if v := c.Positions[j].DosePerA2; v > 0 {
			dose = append(dose, v)
		}
		if v := c.Positions[j].Order; v > 0 {
			order = append(order, float64(v))
		}
	}
	switch len(positions) {
	case len(dose):
		return dose
	case len(order):
		return order
	}
	return nil
}

// damage is the slope of B against dose within crystals, pooled, with its
// standard error; NaN where dose or B is missing. Thickness is a second predictor
// unless it goes with dose: an offset, or scattering itself, also moves B. The B of a
// crystal are against its thinnest position, so their errors are taken as those of
// differences, half on either side.
func (s *Study) damage() (slope, se float64) {
	var dose, thickness, b, v []float64
	for i, sc := range s.scaled {
		c := &s.Series.Crystals[i]
		var d, t, y []float64
		worst := 0.0
		for j := range c.Positions {
			p := sc.slot[j]
			if c.Positions[j].DosePerA2 > 0 {
				d, t, y = append(d, c.Positions[j].DosePerA2), append(t, c.Positions[j].ThicknessNM), append(y, sc.Fit.B[p])
				worst = math.Max(worst, sc.Fit.BSE[p])
			}
		}
		md, mt, my := mean(d), mean(t), mean(y)
		for k := range d {
			dose, thickness, b, v = append(dose, d[k]-md), append(thickness, t[k]-mt), append(b, y[k]-my), append(v, worst*worst/2)
		}
	}
	dd, tt, dt := inner(dose, dose), inner(thickness, thickness), inner(dose, thickness)
	if rest := dd - dt*dt/tt; rest > 0.1*dd {
		for k := range dose {
			dose[k] -= dt / tt * thickness[k]
		}
		dd = rest
	}
	variance := 0.0
	for k, x := range dose {
		variance += x * x * v[k]
	}
	if dd == 0 || variance == 0 {
		return math.NaN(), math.NaN()
	}
	return inner(dose, b) / dd, math.Sqrt(variance) / dd
}

func inner(a, b []float64) float64 {
	sum := 0.0
	for i := range a {
		sum += a[i] * b[i]
	}
	return sum
}

func mean(v []float64) float64 {
	sum := 0.0
	for _, x := range v {
		sum += x / float64(len(v))
	}
	return sum
}
