package session

import (
	"thinward/analysis"
	"thinward/analysis/figure"
)

// ScaleVariants shows how sizes and classes of the primary contrasts move with
// the model of the scale and with the reflections that anchor it.
func (s *Session) ScaleVariants() *View {
	s.upTo(stepDifferences)
	s.step, s.index, s.steps = "scale variants", 0, 0
	Report(Progress{Step: s.step})
	list, err := s.study.ScaleVariants(Context())
	if err != nil {
		s.fail(&analysis.StepError{Step: s.step, Err: err})
	}
	fv := &figureView{title: "Other scales", pick: "Crystal", empty: "No contrast lies within one crystal.",
		caption: "The same contrast under other models and anchors of the scale, the square as the report uses it. An exchange that holds under all of them is not made by the scale; anchors on the weak or the strong half divide the same change otherwise between scale and effect, so that their contrasts of a class move while m does not."}
	g := newGrid("Sizes and classes under other scales", "crystal", "scale", "anchor", "m", "q", "o", "floor", "middle", "top").words(1, 2)
	at := map[string]*figure.Forest{}
	var order []string
	for i := range list {
		v := &list[i]
		f := at[v.Crystal]
		if f == nil {
			f = &figure.Forest{Title: "m under other scales, crystal " + v.Crystal, Desc: "Estimate and interval of m, one model or anchor of the scale changed at a time.", X: figure.Axis{Label: "exchange m", Zero: true}}
			at[v.Crystal] = f
			order = append(order, v.Crystal)
		}
		f.Rows = append(f.Rows, figure.Row{Group: "scale and anchor", Name: v.Model + ", " + v.Anchor, Value: v.M.Value, Lo: v.M.Lo, Hi: v.M.Hi, Lead: v.Leading, Note: v.M.Why})
		model := v.Model
		if v.Leading {
			model += " (leading)"
		}
		g.add(v.Crystal, model, v.Anchor, withInterval(v.M, 3), number(v.Q.Value, 3), number(v.O.Value, 4), number(v.Floor.Value, 3), number(v.Middle.Value, 3), number(v.Top.Value, 3))
	}
	for _, name := range order {
		fv.add(name, at[name])
	}
	fv.summary = g
	out := fv.view()
	out.HTML = g.html() + out.HTML
	return out
}

// Split shows m of every primary contrast from the pairs that keep takes beside
// m from those it leaves: a check of one's own. name says in words which pairs
// keep takes.
func (s *Session) Split(name string, keep func(*analysis.PairRow) bool) *View {
	s.upTo(stepDifferences)
	list, err := s.study.Split(Context(), keep)
	if err != nil {
		s.fail(&analysis.StepError{Step: "split", Err: err})
	}
	g := newGrid("m from two parts of the pairs: "+name+", and the rest", "contrast", "pairs", "m", "pairs of the rest", "m of the rest", "difference")
	for _, r := range list {
		g.add(r.Crystal+": "+r.Thin+" \u2212 "+r.Thick, count(r.Kept), withInterval(r.MKept, 3), count(r.Left), withInterval(r.MLeft, 3), withInterval(r.Difference, 3))
	}
	return g.view("Split")
}
