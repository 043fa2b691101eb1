package analysis

import (
	"fmt"
	"math"

	"thinward/analysis/evidence"
	"thinward/analysis/intensity"
)

// ledger lists the confounders that the numbers so far can speak of: for each
// position or crystal where they differ, else once for all that are fine.
func (s *Study) ledger() []LedgerEntry {
	b := &ledgerBook{}
	s.ledgerIntake(b)
	s.ledgerIndexing(b)
	s.ledgerScale(b)
	s.ledgerContrasts(b)
	s.ledgerFound(b)
	s.ledgerChoices(b)
	s.ledgerSeries(b)
	return b.entries
}

// ledgerBook collects entries.
type ledgerBook struct{ entries []LedgerEntry }

// placed is a finding at one place.
type placed struct {
	where string
	evidence.Finding
}

func (b *ledgerBook) add(check, where string, f evidence.Finding) {
	mustBeCheck(check)
	b.entries = append(b.entries, LedgerEntry{Check: check, Where: where, Value: f.Value, Unit: f.Unit, Verdict: f.Verdict.String(), Why: f.Why})
}

// fold adds one entry for all places of one verdict, the gravest first: its figure
// is the one farthest from ideal, its place their names, or of many their number and
// what they are (positions, crystals).
func (b *ledgerBook) fold(check, what string, ideal float64, list []placed) {
	for _, v := range []evidence.Verdict{evidence.Fails, evidence.Caution, evidence.Fine, evidence.NotKnown} {
		var same []placed
		for _, p := range list {
			if p.Verdict == v {
				same = append(same, p)
			}
		}
		if len(same) > 0 {
			b.foldAlike(check, what, ideal, len(list), same)
		}
	}
}

// mostNamed is the number of places that an entry names.
const mostNamed = 3

func (b *ledgerBook) foldAlike(check, what string, ideal float64, of int, list []placed) {
	far, names := list[0], ""
	for k, p := range list {
		if k > 0 {
			names += ", "
		}
		names += p.where
		if math.IsNaN(far.Value) || math.Abs(p.Value-ideal) > math.Abs(far.Value-ideal) {
			far = p
		}
	}
	where := names
	switch {
	case len(list) == 1:
	case len(list) == of:
		where = fmt.Sprintf("all %d %s", of, what)
	case len(list) > mostNamed:
		where = fmt.Sprintf("%d of %d %s", len(list), of, what)
	}
	if len(list) > 1 && !math.IsNaN(far.Value) {
		far.Why = fmt.Sprintf("farthest in %s: %s", far.where, far.Why)
	}
	b.add(check, where, far.Finding)
}

func (s *Study) ledgerIntake(b *ledgerBook) {
	if s.table == nil {
		return
	}
	var near [][3]int
	for i := range s.intake.Positions {
		for j := range s.intake.Positions[i] {
			near = append(near, nearZero(s.intake.Positions[i][j].Observations))
		}
	}
	var rows, negatives, cut []placed
	for k, r := range s.table {
		where := r.Crystal + "/" + r.Position
		rows = append(rows, placed{where, evidence.Rows(r.Rows, r.Observations+r.Excluded, r.RowsAs)})
		negatives = append(negatives, placed{where, evidence.Negatives(near[k], r.Negative, r.NegativeExp)})
		f := evidence.Finding{Value: math.NaN(), Verdict: evidence.Fine, Why: "no sharp cut in I/sigma and no ceiling"}
		if r.Truncated != "" {
			f.Verdict, f.Why = evidence.Caution, r.Truncated
		}
		cut = append(cut, placed{where, f})
	}
	b.fold(checkRows, "positions", 1, rows)
	from := len(b.entries)
	b.fold(checkNegatives, "positions", 1, negatives)
	for i := from; i < len(b.entries); i++ {
		b.entries[i].Why += fewNegatives(s.table)
	}
	b.fold(checkCut, "positions", 0, cut)
	b.add(checkLaue, "", s.laueFinding)
}

// fewNegatives names the position with the fewest observations below zero against Wilson's
// law, where they are under half of 20 or more that it expects, and says what that means
// when no cut is seen.
func fewNegatives(table []IntakeResult) string {
	worst, least := -1, 0.5
	for i := range table {
		r := &table[i]
		if len(r.Negative) == 0 || len(r.NegativeExp) == 0 || r.NegativeExp[0] < 20 {
			continue
		}
		if share := float64(r.Negative[0]) / r.NegativeExp[0]; share < least {
			worst, least = i, share
		}
	}
	if worst < 0 {
		return ""
	}
	r := &table[worst]
	return fmt.Sprintf(". Fewest below zero in %s/%s: %d, and Wilson's law expects %.0f. That law is of a kinematic crystal: an exchange or an offset lifts the weak and so empties the negatives too, without a step at zero", r.Crystal, r.Position, r.Negative[0], r.NegativeExp[0])
}

// nearZero counts observations with I/sigma from -0.5 to 0, to 0.5 and to 1.
func nearZero(c *intensity.Columns) (n [3]int) {
	for r := range c.I {
		if k := math.Floor(2*c.I[r]/c.Sigma[r]) + 1; k >= 0 && k < 3 {
			n[int(k)]++
		}
	}
	return n
}

func (s *Study) ledgerIndexing(b *ledgerBook) {
	var list []placed
	for _, x := range s.indexing {
		list = append(list, placed{x.Where, evidence.Indexing(x.Z, x.Ambiguous, x.Proposal != "", x.Text)})
	}
	b.fold(checkIndexing, "positions", math.Inf(1), list)
	if s.intake != nil && len(s.indexing) == 0 {
		b.add(checkIndexing, "", evidence.Finding{Value: math.NaN(), Verdict: evidence.Fine, Why: "the lattice allows one way to index only"})
	}
}

func (s *Study) ledgerScale(b *ledgerBook) {
	if s.scaled == nil {
		return
	}
	var sigmas, curves, ratios, scatter []placed
	for _, r := range s.scalingResults() {
		where := r.Crystal + "/" + r.Position
		f := evidence.Sigmas(r.A, r.ALo, r.AHi)
		if r.Why != "" {
			f = evidence.Finding{Value: math.NaN(), Verdict: evidence.NotKnown, Why: r.Why}
		}
		if s.laueFails() {
			f = notEquivalent()
		}
		sigmas = append(sigmas, placed{where, f})
		f = evidence.Finding{Value: r.LnK, Unit: "mean ln K", Verdict: evidence.Fine, Why: "the data fix the scale as a curve in the rotation angle"}
		if r.Constant {
			f.Verdict, f.Why = evidence.Caution, "equivalents do not fix how the common scale changes with the rotation angle, so that it is one constant; what changes between the positions is fitted all the same where they were matched by angle"
		}
		curves = append(curves, placed{where, f})
	}
	for i, sc := range s.scaled {
		c := &s.Series.Crystals[i]
		order := c.byThickness()
		if len(order) < 2 {
			continue
		}
		first, last := order[0], order[len(order)-1]
		k := math.Exp(sc.Fit.LnKMean[sc.slot[last]] - sc.Fit.LnKMean[sc.slot[first]])
		ratios = append(ratios, placed{c.Name, evidence.ScaleRatio(k, c.Positions[last].ThicknessNM/c.Positions[first].ThicknessNM)})
		thin, thick := sc.Noise.Position[sc.slot[first]], sc.Noise.Position[sc.slot[last]]
		f := evidence.Finding{Value: math.NaN(), Verdict: evidence.NotKnown, Why: "equivalents are too few in one of the positions"}
		if thin.Estimable && thick.Estimable {
			f = evidence.Scatter(thin.B, thin.BLo, thin.BHi, thick.B, thick.BLo, thick.BHi)
		}
		if s.laueFails() {
			f = notEquivalent()
		}
		scatter = append(scatter, placed{c.Name, f})
	}
	b.fold(checkSigmas, "positions", 1, sigmas)
	b.fold(checkScaleCurve, "positions", 0, curves)
	b.fold(checkScaleRatio, "crystals", 1, ratios)
	b.fold(checkScatter, "crystals", 0, scatter)
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
