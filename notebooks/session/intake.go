package session

import (
	"fmt"
	"math"
	"strings"

	"thinward/analysis"
)

func (s *Session) intake() *analysis.IntakeDetails {
	d, err := s.study.IntakeDetails(Context())
	if err != nil {
		panic(&Error{Step: stepIntake, Err: err, Inside: FaultOf(err) == FaultInside})
	}
	return d
}

// Intake shows the rows and observations of every position, and what they cover, before
// scaling.
func (s *Session) Intake() *View {
	d := s.intake()
	rows := newGrid("Rows and observations", "position", "rows", "observations", "taken as", "unique", "multiplicity", "excluded", "R_meas", "CC1/2").words(3)
	for _, r := range d.Positions {
		rows.add(place(&r), count(r.Rows), count(r.Observations), r.RowsAs, count(r.Unique), number(r.Multiplicity, 1), count(r.Excluded), number(r.RMeas, 3), number(r.CCHalf, 3))
	}
	common := math.NaN()
	if len(d.Positions) > 0 {
		common = d.Positions[0].CommonDMin
	}
	covered := newGrid("What they cover; all positions reach "+number(common, 2)+" \u00c5", "position", "d (\u00c5)", "complete", "to the common limit", "angles (\u00b0)", "widest gap", "cell off (%)", "angles of the cell off (\u00b0)")
	for _, r := range d.Positions {
		length, angle := number(r.Cell.LengthPercent, 2), number(r.Cell.AngleDeg, 2)
		if r.Cell.Given && r.Cell.LengthPercent > 0 {
			length += " in " + r.Cell.Length
		}
		covered.add(place(&r), number(r.DMax, 1)+"\u2013"+number(r.DMin, 2), percent(r.Completeness, 0), percent(r.CompletenessCommon, 0), angles(r.AngleLo, r.AngleHi), number(r.AngleGap, 1), length, angle)
	}
	v := Together(rows.view("Intake"), covered.view("Coverage"))
	if len(d.Positions) > 0 {
		c := d.Positions[0].Cell
		v.note(fmt.Sprintf("A cell that is off by more than %s %% or %s\u00b0 is refused.", number(c.TolerancePercent, 1), number(c.ToleranceDeg, 2)))
	}
	return v
}

func place(r *analysis.IntakeResult) string { return r.Crystal + "/" + r.Position }

// note adds a line of text below a view.
func (v *View) note(text string) {
	v.HTML += "<p>" + text + "</p>"
	v.Plain += text + "\n"
}

// Intensities shows, before scaling, whether intensities and sigmas look as measured.
func (s *Session) Intensities() *View {
	d := s.intake()
	negatives := newGrid("Observations below zero: seen, and expected by Wilson's law with the reported sigmas; far fewer than expected mean that negatives were cut or set to zero, far more that background was taken off too freely or sigmas are too small", "position", "I/\u03c3", "below 0", "expected", "below \u22121\u03c3", "expected", "below \u22122\u03c3", "expected", "below \u22123\u03c3", "expected", "cut or clipped").words(10)
	for _, r := range d.Positions {
		cells := []string{place(&r), number(r.MeanISigma, 1)}
		for k := range r.Negative {
			cells = append(cells, count(r.Negative[k]), number(r.NegativeExp[k], 0))
		}
		cut := "no"
		if r.Truncated != "" {
			cut = r.Truncated
		}
		negatives.add(append(cells, cut)...)
	}
	sigmas := newGrid("Sigmas as reported", "position", "share of one value", "share in proportion to I", "I/\u03c3 of the highest hundredth", "\u03c7\u00b2 of near equivalents", "s.u.", "pairs", "remark").words(7)
	for _, r := range d.Positions {
		c := &r.Sigmas
		remark := c.Why
		if c.AnyAngle && !math.IsNaN(c.Chi2) {
			remark = strings.TrimPrefix(remark+"; at any angle: holds changes of the scale too", "; ")
		}
		sigmas.add(place(&r), percent(c.Same, 1), percent(c.Proportional, 1), number(c.Ceiling, 0), number(c.Chi2, 2), number(c.Chi2SE, 2), count(c.Pairs), remark)
	}
	return Together(negatives.view("Negatives"), sigmas.view("Sigmas"))
}

// Common shows how much of each position the others have too, and whether what is
// common stands for the rest.
func (s *Session) Common() *View {
	d := s.intake()
	names := s.crystalNames()
	head := []string{"position", "in other crystals"}
	for _, n := range names {
		head = append(head, "with "+n)
	}
	overlap := newGrid("Share of a position's reflections that the positions of a crystal have too, least to most", head...)
	for _, r := range d.Positions {
		cells := []string{place(&r), percent(r.InOthers, 0)}
		for _, n := range names {
			lo, hi := shares(d.Common, &r, n)
			cells = append(cells, shareRange(lo, hi))
		}
		overlap.add(cells...)
	}
	stand := newGrid("Do the common reflections stand for the rest", "positions", "common", "strength in the first", "in the second", "median d (\u00c5)", "of all (\u00c5)", "remark").words(6)
	for i := range d.Common {
		c := &d.Common[i]
		within := c.Crystal == c.WithCrystal
		if !within && c.Why == "" {
			continue
		}
		pair := c.Crystal + ": " + c.Position + ", " + c.WithPosition
		if !within {
			pair = c.Crystal + "/" + c.Position + ", " + c.WithCrystal + "/" + c.WithPosition
		}
		stand.add(pair, count(c.Common), number(c.Strength, 2)+" \u00b1 "+number(c.StrengthSE, 2), number(c.With, 2)+" \u00b1 "+number(c.WithSE, 2), number(c.DCommon, 2), number(c.DAll, 2), c.Why)
	}
	v := Together(overlap.view("Overlap"), stand.view("Common reflections"))
	v.note("Strength is I over its local mean in a position, 1 where the common reflections are like all. Pairs across crystals are listed only where something is to be said.")
	return v
}

func (s *Session) crystalNames() []string {
	var out []string
	for i := range s.study.Series.Crystals {
		out = append(out, s.study.Series.Crystals[i].Name)
	}
	return out
}

// shares is the least and the greatest share of r that positions of one crystal have; NaN
// where there is no other.
func shares(list []analysis.CommonResult, r *analysis.IntakeResult, crystal string) (lo, hi float64) {
	lo, hi = math.NaN(), math.NaN()
	for i := range list {
		c := &list[i]
		v := math.NaN()
		switch {
		case c.Crystal == r.Crystal && c.Position == r.Position && c.WithCrystal == crystal:
			v = c.Share
		case c.WithCrystal == r.Crystal && c.WithPosition == r.Position && c.Crystal == crystal:
			v = c.WithShare
		default:
			continue
		}
		if !(v >= lo) {
			lo = v
		}
		if !(v <= hi) {
			hi = v
		}
	}
	return lo, hi
}

func shareRange(lo, hi float64) string {
	a, b := percent(lo, 0), percent(hi, 0)
	if a == b {
		return a
	}
	return number(100*lo, 0) + "\u2013" + b
}

// Lattice shows whether centring and angles go with the indices.
func (s *Session) Lattice() *View {
	d := s.intake()
	g := newGrid("Lattice centring: what each kind would forbid", "kind", "allows", "of the group", "measured", "expected", "over the local mean", "s.u.", "verdict", "why").words(1, 2, 7, 8)
	g.verdict = 7
	for _, c := range d.Centring {
		stated := "no"
		if c.Stated {
			stated = "yes"
		}
		g.add(c.Centring, c.Condition, stated, count(c.N), number(c.Expected, 0), number(c.Ratio, 3), number(c.SU, 3), c.Verdict, c.Why)
	}
	t := newGrid("Do angles and indices go together, and alike in the positions of a crystal", "position", "misfit (\u00b0)", "axis off (\u00b0)", "zero off (\u00b0)", "verdict", "why").words(4, 5)
	t.verdict = 4
	for _, x := range d.Turns {
		t.add(x.Crystal+"/"+x.Position, number(x.MisfitDeg, 2), number(x.AxisDeg, 1), number(x.ZeroDeg, 1), x.Verdict, x.Why)
	}
	return Together(g.view("Centring"), t.view("Angles"))
}

// SetAside counts what did not come through as it was read.
func (s *Session) SetAside() *View {
	g := newGrid("Set aside, joined or merged", "position", "what", "count", "why", "file").words(1, 3, 4)
	for _, m := range s.intake().Remarks {
		file := m.File
		if m.FirstLine > 0 {
			file = fmt.Sprintf("%s, first on line %d", m.File, m.FirstLine)
		}
		g.add(m.Crystal+"/"+m.Position, m.Kind, count(m.Count), m.Why, file)
	}
	if len(g.rows) == 0 {
		g.add("every position", "nothing", "0", "every row read is an observation used", "")
	}
	return g.view("Set aside")
}
