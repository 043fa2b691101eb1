package analysis

import (
	"fmt"
	"strings"
)

// WarningCount is the number of warnings of all steps and contrasts.
func (r *Result) WarningCount() int {
	n := len(r.Warnings)
	for i := range r.Contrasts {
		n += len(r.Contrasts[i].Warnings)
	}
	return n
}

// FailingControls names the controls that fail in some crystal, each once.
func (r *Result) FailingControls() []string {
	var out []string
	seen := map[string]bool{}
	for i := range r.Controls {
		c := &r.Controls[i]
		if c.Verdict == VerdictFails && !seen[c.Control] {
			seen[c.Control] = true
			out = append(out, c.Control)
		}
	}
	return out
}

// checksOf names the checks of the ledger with a verdict, each once.
func (r *Result) checksOf(verdict string) []string {
	var out []string
	seen := map[string]bool{}
	for _, e := range r.Ledger {
		if e.Verdict == verdict && !seen[e.Check] {
			seen[e.Check] = true
			out = append(out, e.Check)
		}
	}
	return out
}

// answerElse says what of the ledger, of the controls and of the steps speaks against
// the answers before it.
func answerElse(r *Result) Answer {
	a := Answer{Question: "Could something else have done it?", Section: "cautions", Verdict: VerdictFine}
	cautions, fails, controls := r.checksOf(VerdictCaution), r.checksOf(VerdictFails), r.FailingControls()
	give := ""
	if len(cautions) > 0 {
		a.Verdict = VerdictCaution
		give = fmt.Sprintf("; %d %s a caution", len(cautions), verb(len(cautions), "give"))
	}
	switch {
	case len(fails) > 0 && len(controls) > 0:
		a.Text = fmt.Sprintf("%s of the ledger and %s fail%s: read among the controls by how much the pipeline errs on these data.", plural(len(fails), "check"), plural(len(controls), "control"), give)
	case len(fails) > 0:
		a.Text = fmt.Sprintf("%s of the ledger %s%s.", plural(len(fails), "check"), verb(len(fails), "fail"), give)
	case len(controls) > 0:
		a.Text = fmt.Sprintf("No check of the ledger fails%s, but %s %s: read there by how much the pipeline errs on these data.", give, plural(len(controls), "control"), verb(len(controls), "fail"))
	case len(cautions) > 0:
		a.Text = "No check fails" + give + "."
	default:
		a.Text = "No check of the ledger gives a caution. That does not exclude what no check can see."
	}
	if len(fails)+len(controls) > 0 {
		a.Verdict = VerdictFails
	}
	if n := r.WarningCount(); n > 0 {
		a.Text += fmt.Sprintf(" The steps left %s beside the ledger, at the end of the intake.", plural(n, "warning"))
	}
	for _, list := range []struct {
		name  string
		names []string
	}{{"fails", fails}, {"caution", cautions}, {"controls that fail", controls}} {
		if len(list.names) > 0 {
			a.Detail = append(a.Detail, list.name+": "+strings.Join(list.names, ", "))
		}
	}
	a.Text += " What the numbers mean for a structure needs a practitioner's judgement."
	return a
}

// verb puts a verb behind n things.
func verb(n int, plural string) string {
	if n == 1 {
		return plural + "s"
	}
	return plural
}
