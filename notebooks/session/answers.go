package session

import (
	"fmt"
	"html"
	"strings"

	"thinward/analysis"
)

// Answer runs what has not run and shows one card a question.
func (s *Session) Answer() *View {
	r := s.Result()
	var b, p strings.Builder
	b.WriteString(`<div class="cards">`)
	for _, a := range r.Answers {
		fmt.Fprintf(&b, `<article class="card verdict-%s"><h3>%s</h3><p class="verdict">%s%s</p><p>%s</p>%s<p class="more"><a href="#%s">Where this comes from</a></p></article>`,
			strings.ReplaceAll(a.Verdict, " ", "-"), html.EscapeString(a.Question), mark(a.Verdict), html.EscapeString(a.Verdict), html.EscapeString(a.Text), bullets(a.Detail), a.Section)
		fmt.Fprintf(&p, "%s [%s]\n  %s\n", a.Question, a.Verdict, a.Text)
		for _, d := range a.Detail {
			fmt.Fprintf(&p, "  - %s\n", d)
		}
	}
	b.WriteString("</div>")
	return &View{Title: "The answer", HTML: b.String(), Plain: p.String()}
}

// Cautions shows the ledger: every confounder with a figure, a verdict and why.
func (s *Session) Cautions() *View {
	r := s.Result()
	g := newGrid("The ledger of confounders", "check", "where", "value", "unit", "verdict", "why").words(1, 3, 4, 5)
	g.verdict = 4
	for _, verdict := range []string{analysis.VerdictFails, analysis.VerdictCaution, analysis.VerdictUnknown, analysis.VerdictFine} {
		for _, e := range r.Ledger {
			if e.Verdict == verdict {
				g.add(e.Check, e.Where, auto(e.Value), e.Unit, e.Verdict, e.Why)
			}
		}
	}
	return g.view("Cautions")
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
	return g.view("Warnings")
}

func bullets(list []string) string {
	if len(list) == 0 {
		return ""
	}
	var b strings.Builder
	b.WriteString(`<ul class="detail">`)
	for _, s := range list {
		b.WriteString("<li>" + html.EscapeString(s) + "</li>")
	}
	return b.String() + "</ul>"
}
