package session

import (
	"fmt"
	"html"
	"math"
	"strings"

	"thinward/analysis"
)

// Answer runs what has not run and shows one card a question.
func (s *Session) Answer() *View { return answerCards(s.Result()) }

func answerCards(r *analysis.Result) *View {
	var b, p strings.Builder
	b.WriteString(`<div class="cards">`)
	for _, a := range r.Answers {
		also := ""
		if n := r.WarningCount(); n > 0 && a.Section == "cautions" {
			also = " \u00b7 " + fmt.Sprintf(`<a href="#%s">%s</a>`, warningsID, plural(n, "warning"))
		}
		fmt.Fprintf(&b, `<article class="card verdict-%s"><h3>%s</h3><p class="verdict">%s%s</p><p>%s</p>%s<p class="more"><a href="#%s">Where this comes from</a>%s</p></article>`,
			strings.ReplaceAll(a.Verdict, " ", "-"), html.EscapeString(a.Question), mark(a.Verdict), html.EscapeString(a.Verdict), html.EscapeString(prose(a.Text)), bullets(a.Detail), a.Section, also)
		fmt.Fprintf(&p, "%s [%s]\n  %s\n", a.Question, a.Verdict, prose(a.Text))
		for _, d := range a.Detail {
			fmt.Fprintf(&p, "  - %s\n", prose(d))
		}
	}
	b.WriteString("</div>")
	return &View{Title: "The answer", HTML: b.String(), Plain: p.String()}
}

// Cautions shows the ledger: every confounder with a figure, a verdict and why; what
// asks for care first, what is fine folded below it.
func (s *Session) Cautions() *View { return cautions(s.Result()) }

func cautions(r *analysis.Result) *View {
	table := func(caption string) *grid {
		g := newGrid(caption, "check", "where", "value", "unit", "verdict", "why").words(1, 3, 4, 5)
		g.verdict = 4
		return g
	}
	all, care, fine := table("The ledger of confounders"), table("The ledger of confounders: what asks for care"), table("The ledger of confounders: what is fine")
	names := places(r)
	for _, verdict := range []string{analysis.VerdictFails, analysis.VerdictCaution, analysis.VerdictUnknown, analysis.VerdictFine} {
		for _, e := range r.Ledger {
			if e.Verdict != verdict {
				continue
			}
			place, why := farthest(e.Why, names)
			where := e.Where
			if place != "" {
				where += ", farthest in " + place
			}
			row := []string{e.Check, where, figureOf(&e), e.Unit, e.Verdict, why}
			all.add(row...)
			if verdict == analysis.VerdictFine {
				fine.add(row...)
			} else {
				care.add(row...)
			}
		}
	}
	v := all.view("Cautions")
	switch {
	case len(care.rows) == 0:
	case len(fine.rows) == 0:
		v.HTML = care.html()
	default:
		checks := "checks that are"
		if len(fine.rows) == 1 {
			checks = "check that is"
		}
		v.HTML = care.html() + fmt.Sprintf("<details class=\"fine\"><summary>%d %s fine</summary>%s</details>", len(fine.rows), checks, fine.html())
	}
	return v
}

// figureOf writes the figure of an entry. A tipping ratio without end was looked for up to 3.
func figureOf(e *analysis.LedgerEntry) string {
	if math.IsInf(e.Value, 1) && e.Check == "tipping ratio" {
		return "> 3"
	}
	return auto(e.Value)
}

// warningsID is the place of the warnings on the page.
const warningsID = "warnings"

// places lists the names that an entry of the ledger can be about.
func places(r *analysis.Result) []string {
	out := crystalsOf(r)
	for i := range r.Intake {
		out = append(out, r.Intake[i].Crystal+"/"+r.Intake[i].Position)
	}
	for i := range r.Contrasts {
		out = append(out, strings.ReplaceAll(contrastName(&r.Contrasts[i]), "\u2212", "-"))
	}
	return out
}

// Warnings shows what the steps had to say about the data.
func (s *Session) Warnings() *View {
	r := s.Result()
	g := newGrid("Warnings", "where", "what").words(1)
	for _, w := range r.Warnings {
		g.add(w.Where, w.Text)
	}
	for i := range r.Contrasts {
		for _, w := range r.Contrasts[i].Warnings {
			g.add(contrastName(&r.Contrasts[i]), w.Text)
		}
	}
	if len(g.rows) == 0 {
		g.add("everywhere", "nothing to warn of")
	}
	v := g.view("Warnings")
	v.HTML = `<div id="` + warningsID + `">` + v.HTML + "</div>"
	return v
}

func bullets(list []string) string {
	if len(list) == 0 {
		return ""
	}
	var b strings.Builder
	b.WriteString(`<ul class="detail">`)
	for _, s := range list {
		b.WriteString("<li>" + html.EscapeString(bound(prose(s))) + "</li>")
	}
	return b.String() + "</ul>"
}
