package session

import (
	"math"
	"strings"
	"testing"

	"thinward/analysis"
)

// The card of what else could have done it leads to the warnings when there are any.
func TestLastCardLeadsToWarnings(t *testing.T) {
	r := &analysis.Result{Answers: []analysis.Answer{{Question: "Moved?", Section: "sizes"}, {Question: "Something else?", Section: "cautions"}}}
	if got := answerCards(r).HTML; strings.Contains(got, "#warnings") {
		t.Errorf("a link to no warnings: %s", got)
	}
	r.Warnings = make([]analysis.WarningResult, 2)
	got := answerCards(r).HTML
	if strings.Count(got, "</a> \u00b7 <a href=\"#warnings\">2 warnings</a>") != 1 || strings.Index(got, "#warnings") < strings.Index(got, "Something else?") {
		t.Errorf("no link to the warnings: %s", got)
	}
}

func TestWhatHasNoEndIsNotDrawnAsAnInterval(t *testing.T) {
	inf := math.Inf(1)
	if got := withInterval(bounded(analysis.Interval{Value: 0.087, Lo: -inf, Hi: inf}), 3); got != "0.087 (\u2013)" {
		t.Errorf("open on both sides: %q", got)
	}
	if got := withInterval(bounded(analysis.Interval{Value: 0.087, Lo: 0.01, Hi: inf}), 3); got != "0.087 (0.010 to \u221e)" {
		t.Errorf("open on one side: %q", got)
	}
	for _, c := range []struct {
		e    analysis.LedgerEntry
		want string
	}{
		{analysis.LedgerEntry{Check: "tipping ratio", Value: inf}, "> 3"},
		{analysis.LedgerEntry{Check: "tipping ratio", Value: 1.25}, "1.25"},
		{analysis.LedgerEntry{Check: "other", Value: inf}, "\u221e"},
	} {
		if got := figureOf(&c.e); got != c.want {
			t.Errorf("%s %g: %q, want %q", c.e.Check, c.e.Value, got, c.want)
		}
	}
}

func TestSizesFigureSaysHowThePrimaryWasChosen(t *testing.T) {
	for want, p := range map[string]analysis.Primary{"by default, thinnest against thickest": {}, "named in the manifest": {Thick: "thick"}} {
		if got := chosen(p); got != want {
			t.Errorf("%+v: %q, want %q", p, got, want)
		}
	}
	r := &analysis.Result{Contrasts: []analysis.ContrastResult{{Crystal: "L1", Thin: "a", Thick: "b", Primary: true}}}
	if got := sizesFigure(r, "by draw").HTML; !strings.Contains(got, "primary contrasts (by draw)") {
		t.Errorf("not said: %s", got)
	}
}
