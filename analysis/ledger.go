package analysis

import (
	"fmt"
	"math"
	"sort"
)

// ledger lists the confounders that the numbers so far can speak of.
func (s *Study) ledger() []LedgerEntry {
	var out []LedgerEntry
	add := func(check, where string, value float64, unit, verdict, why string) {
		out = append(out, LedgerEntry{Check: check, Where: where, Value: value, Unit: unit, Verdict: verdict, Why: why})
	}
	s.ledgerIntake(add)
	s.ledgerIndexing(add)
	s.ledgerScale(add)
	for _, c := range s.list {
		if x := s.compared[c]; x != nil && c.Primary {
			s.ledgerContrast(x, add)
		}
	}
	if s.scaled != nil {
		s.ledgerSeries(add)
	}
	return out
}

type addEntry func(check, where string, value float64, unit, verdict, why string)

func (s *Study) ledgerIntake(add addEntry) {
	for _, r := range s.table {
		where := r.Crystal + "/" + r.Position
		share := float64(r.Rows) / float64(r.Observations+r.Excluded)
		switch {
		case share > 1.001:
			add("rows against observations", where, share, "rows an observation", VerdictCaution,
				fmt.Sprintf("%d rows are %d observations: rows were taken as %s", r.Rows, r.Observations+r.Excluded, r.RowsAs))
		default:
			add("rows against observations", where, share, "rows an observation", VerdictFine, "every row is an observation of its own")
		}
		step := float64(r.NearZero[0]) / float64(r.NearZero[1])
		switch {
		case r.NearZero[1] < 20:
			add("negatives removed", where, step, "below over above zero, within half a sigma", VerdictFine, fmt.Sprintf("%d observations just above zero: too few to tell, and too few to matter", r.NearZero[1]))
		case negativesGone(r.NearZero):
			add("negatives removed", where, step, "below over above zero, within half a sigma", VerdictFails, "the density of I/sigma has a step at zero: weak intensities were cut off or set to zero, which alone makes an exchange")
		case step < 0.5:
			add("negatives removed", where, step, "below over above zero, within half a sigma", VerdictCaution, "fewer observations lie just below zero than noise leads one to expect")
		default:
			add("negatives removed", where, step, "below over above zero, within half a sigma", VerdictFine, "the density of I/sigma is smooth at zero, as noise makes it")
		}
		if r.Truncated != "" {
			add("cut or clipped list", where, math.NaN(), "", VerdictCaution, r.Truncated)
		}
		if r.Overlap < 0.5 {
			add("common reflections", where, r.Overlap, "of its reflections are in the thinnest position", VerdictCaution, "fewer than half are common: they may not represent the rest")
		}
	}
}

func (s *Study) ledgerIndexing(add addEntry) {
	for _, x := range s.indexing {
		verdict := VerdictFine
		if x.Ambiguous {
			verdict = VerdictFails
		} else if x.Proposal != "" {
			verdict = VerdictCaution
		}
		add("indexing margin", x.Where, x.Z, "z of the best way over the second", verdict, x.Text)
	}
}

func (s *Study) ledgerScale(add addEntry) {
	if s.scaled == nil {
		return
	}
	for _, r := range s.scalingResults() {
		where := r.Crystal + "/" + r.Position
		switch {
		case r.Why != "":
			add("sigma calibration", where, math.NaN(), "", VerdictUnknown, r.Why)
		case r.AHi < 0.67 || r.ALo > 1.5:
			add("sigma calibration", where, r.A, "times the reported sigma", VerdictCaution, "reported sigmas do not fit the scatter of equivalents; weights use the corrected ones, and no axis of the report leans on their ratio except the inverse-variance mean")
		default:
			add("sigma calibration", where, r.A, "times the reported sigma", VerdictFine, "reported sigmas fit the scatter of equivalents")
		}
		if r.Constant {
			add("scale curve", where, r.LnK, "ln K", VerdictCaution, "the scale is one constant: the data cannot fix a curve in the rotation angle")
		}
	}
	for i, sc := range s.scaled {
		c := &s.Series.Crystals[i]
		order := c.byThickness()
		if len(order) < 2 {
			continue
		}
		first, last := order[0], order[len(order)-1]
		k := math.Exp(sc.Fit.LnKMean[sc.slot[last]] - sc.Fit.LnKMean[sc.slot[first]])
		t := c.Positions[last].ThicknessNM / c.Positions[first].ThicknessNM
		why, verdict := fmt.Sprintf("scale ratio %.2f, thickness ratio %.2f: illuminated volume and inelastic loss lie between", k, t), VerdictFine
		if k > 2*t || k < t/4 {
			verdict = VerdictCaution
			why = fmt.Sprintf("scale ratio %.2f does not go with the thickness ratio %.2f: another exposure, strong inelastic loss, or a wrong thickness", k, t)
		}
		add("scale ratio against thickness ratio", c.Name, k/t, "ratio of ratios", verdict, why)
		s.ledgerNoise(i, sc, first, last, add)
	}
}

func (s *Study) ledgerNoise(i int, sc *ScaledCrystal, thin, thick int, add addEntry) {
	a, b := sc.Noise.Position[sc.slot[thin]], sc.Noise.Position[sc.slot[thick]]
	name := s.Series.Crystals[i].Name
	if !a.Estimable || !b.Estimable {
		add("scatter of equivalents", name, math.NaN(), "", VerdictUnknown, "equivalents are too few in one of the positions")
		return
	}
	why := fmt.Sprintf("equivalents scatter by b = %.3f in the thin and %.3f in the thick position beyond counting", a.B, b.B)
	verdict := VerdictFine
	if b.BLo > a.BHi || a.BLo > b.BHi {
		verdict = VerdictCaution
		why += ": the positions differ in mosaicity, bending or excitation, or by dynamical scattering itself"
	}
	add("scatter of equivalents", name, b.B-a.B, "b thick minus thin", verdict, why)
}

func (s *Study) ledgerContrast(x *Compared, add addEntry) {
	r, where := &x.Result, s.Name(x.Contrast)
	switch {
	case x.Leading == leadCrystals:
		add("strength axis", where, r.AxisAgreement, "correlation with the other crystals", VerdictFine, "strength comes from the other crystals, which share neither noise nor geometry with the difference")
	default:
		add("strength axis", where, r.AxisAgreement, "correlation with the other crystals", VerdictCaution, "no independent strength: m is a bracket from halves of the same positions")
	}
	if o := r.Offset; !math.IsNaN(o.O) {
		verdict, why := VerdictFine, "no additive offset between the positions is seen; the fitted m allows for one"
		if o.Lo > 0 || o.Hi < 0 {
			verdict, why = VerdictCaution, "an additive offset is seen (background, readout); the fitted m allows for it, a model without it would not"
		}
		add("additive offset", where, o.O, "of the mean of the strong third", verdict, why)
	}
	if r.OverIdent.DF > 0 && !math.IsNaN(r.OverIdent.P) {
		verdict, why := VerdictFine, "the fitted numbers describe the curve"
		if r.OverIdent.P < 0.01 {
			verdict, why = VerdictCaution, "the fitted numbers do not describe the curve: look at it"
		}
		add("model against curve", where, r.OverIdent.P, "p of the over-identification", verdict, why)
	}
	for _, a := range r.Axes {
		if a.Axis != "third" && a.Axis != "inverse-variance" || math.IsNaN(a.Delta.Value) {
			continue
		}
		verdict, why := VerdictFine, "agrees with the leading axis"
		if a.Delta.Lo > 0 || a.Delta.Hi < 0 {
			verdict = VerdictCaution
			why = "differs from the leading axis: position-specific deviations of this crystal (third), or a wrong ratio of sigmas (inverse variance)"
		}
		add("axis "+a.Axis+" against leading", where, a.Delta.Value, "difference of m", verdict, why)
	}
	s.ledgerNaive(x, add)
	if len(r.Giants) > 1 && !math.IsNaN(r.Exchange.M) {
		lo, hi := math.Inf(1), math.Inf(-1)
		for _, g := range r.Giants {
			if !math.IsNaN(g.M.Value) {
				lo, hi = math.Min(lo, g.M.Value), math.Max(hi, g.M.Value)
			}
		}
		verdict, why := VerdictFine, "leaving out the strongest reflections changes little"
		if hi-lo > 2*r.Exchange.SE {
			verdict, why = VerdictCaution, "a few of the strongest reflections carry the result"
		}
		add("giants", where, hi-lo, "spread of m", verdict, why)
	}
}

func (s *Study) ledgerNaive(x *Compared, add addEntry) {
	worst := 0.0
	for _, name := range naiveNames(&x.Result) {
		worst = math.Max(worst, x.Result.Naive[name].GhostScore)
	}
	if worst > 2 {
		add("ghost of noise", s.Name(x.Contrast), worst, "score of the ghost on naive axes", VerdictCaution,
			"a plot against either intensity or their mean would show a pattern from noise alone; such plots stand in the report only beside their ghost")
	} else {
		add("ghost of noise", s.Name(x.Contrast), worst, "score of the ghost on naive axes", VerdictFine, "noise draws little on naive axes here")
	}
}

func (s *Study) ledgerSeries(add addEntry) {
	n := len(s.primaryContrasts())
	switch {
	case n == 1:
		add("number of crystals", "", 1, "crystal", VerdictCaution, "one crystal says nothing of others, however well it is measured")
	case n < 5:
		add("number of crystals", "", float64(n), "crystals", VerdictCaution, fmt.Sprintf("%d crystals that agree in sign reach p = %s at the smallest; spread between crystals is not estimable", n, short(2*math.Pow(0.5, float64(n)))))
	default:
		add("number of crystals", "", float64(n), "crystals", VerdictFine, "enough to estimate the spread between crystals")
	}
	replicate := false
	for i := range s.Series.Crystals {
		c := &s.Series.Crystals[i]
		for j := range c.Positions {
			replicate = replicate || c.Positions[j].ReplicateOf != ""
		}
		s.ledgerOrder(c, add)
	}
	if !replicate {
		add("replicate position", "", math.NaN(), "", VerdictUnknown, "no replicate was measured; differences between places of equal thickness are not known")
	}
}

// primaryContrasts lists the primary contrasts within crystals without needing them
// compared.
func (s *Study) primaryContrasts() []Contrast {
	var out []Contrast
	for _, c := range s.list {
		if c.Primary && !c.Across() {
			out = append(out, c)
		}
	}
	return out
}

// ledgerOrder asks whether thickness goes with dose or the order of
// measurement.
func (s *Study) ledgerOrder(c *Specimen, add addEntry) {
	order := c.byThickness()
	if len(order) < 2 {
		return
	}
	var time []float64
	for _, j := range order {
		p := &c.Positions[j]
		v := p.DosePerA2
		if v == 0 {
			v = float64(p.Order)
		}
		if v == 0 {
			add("dose order", c.Name, math.NaN(), "", VerdictUnknown, "neither order nor dose is given in the manifest")
			return
		}
		time = append(time, v)
	}
	rising := sort.Float64sAreSorted(time)
	flat := time[len(time)-1] == time[0]
	switch {
	case flat:
		add("dose order", c.Name, 0, "", VerdictFine, "all positions had the same dose before")
	case rising:
		add("dose order", c.Name, 1, "", VerdictCaution, "the thicker, the later: dose goes with thickness, and no analysis can tell them apart in this crystal")
	default:
		add("dose order", c.Name, 0, "", VerdictFine, "dose does not rise with thickness")
	}
}
