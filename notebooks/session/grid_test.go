package session

import (
	"strings"
	"testing"

	"thinward/analysis"
)

func TestGridHTML(t *testing.T) {
	long := "a sentence that no column of forty characters could hold on one line"
	g := newGrid("Things <&", "what", "value", "file", "remark", "none").words(2, 3, 4).verbatim(2)
	g.add("L1: thin - mid", "1", "a - 2_1.cif", long, "")
	g.add("L2", "2", "", long, "")
	got := g.html()
	for _, want := range []string{
		`<div class="scroll" tabindex="0" role="region" aria-label="Things &lt;&amp;">`,
		`<table class="sortable stack" role="table"><caption><span>Things &lt;&amp;</span></caption>`,
		"<th scope=\"row\" role=\"rowheader\">L1:\u00a0thin\u00a0\u2212\u00a0mid</th>",
		`<td role="cell" class="number" data-label="value">1</td>`, `data-label="file">a - 2_1.cif</td>`,
		`<td role="cell" class="long" data-label="remark">` + long,
	} {
		if !strings.Contains(got, want) {
			t.Errorf("%q is not in %s", want, got)
		}
	}
	if strings.Contains(got, "none") {
		t.Error("a column without an entry is shown")
	}
	if plain := g.plain(); !strings.Contains(plain, "none") || !strings.Contains(plain, "L1: thin \u2212 mid  ") {
		t.Errorf("plain text %s", plain)
	}

	g = newGrid("Numbers", strings.Split("abcdefghijkl", "")...)
	g.add(strings.Split("1 2 3 4 5 6 7 8 9 10 11 12", " ")...)
	if got := g.html(); !strings.Contains(got, `<table class="sortable dense"><caption>`) || strings.Contains(got, "role=\"cell\"") {
		t.Errorf("twelve columns of numbers: %s", got)
	}
}

func ledger() *analysis.Result {
	r := made()
	r.Ledger = []analysis.LedgerEntry{
		{Check: "rows", Where: "all 4 positions", Value: 1, Unit: "rows for each observation", Verdict: "fine", Why: "every row is one"},
		{Check: "deviations", Where: "all 2 contrasts", Value: -0.5, Verdict: "caution", Why: "farthest in " + strings.ReplaceAll(contrastName(&r.Contrasts[0]), "\u2212", "-") + ": r = -0.5"},
		{Check: "replicate", Verdict: "not known", Why: "none was measured"},
	}
	return r
}

func TestCautionsFoldWhatIsFine(t *testing.T) {
	r := ledger()
	v := cautions(r)
	open, folded, ok := strings.Cut(v.HTML, `<details class="fine"><summary>1 check that is fine</summary>`)
	if !ok || !strings.Contains(open, "deviations") || !strings.Contains(open, "replicate") || strings.Contains(open, "rows for") || !strings.Contains(folded, ">rows<") {
		t.Errorf("cautions %s", v.HTML)
	}
	if want := "all 2 contrasts, farthest in " + bound(contrastName(&r.Contrasts[0])) + "</td>"; !strings.Contains(open, want) || !strings.Contains(open, ">r = \u22120.5</td>") {
		t.Errorf("%q is not in %s", want, open)
	}
	if !strings.Contains(v.Plain, "rows") || !strings.Contains(v.Plain, "deviations") || strings.Index(v.Plain, "deviations") > strings.Index(v.Plain, "every row") {
		t.Errorf("plain text %s", v.Plain)
	}
	r.Ledger = r.Ledger[:1]
	if v := cautions(r); strings.Contains(v.HTML, "<details>") || !strings.Contains(v.HTML, "every row is one") {
		t.Error("a ledger of fine checks alone is folded")
	}
}

func TestControlsOfOneKindStandTogether(t *testing.T) {
	r := made()
	r.Controls = []analysis.ControlResult{
		{Control: "halves", Crystal: "L1", Verdict: "fine", Can: "noise", Cannot: "offset"}, {Control: "swap", Crystal: "L1", Verdict: "fine", Can: "sign", Cannot: "cause"},
		{Control: "halves", Crystal: "L2", Verdict: "fine", Can: "noise", Cannot: "offset"}, {Control: "swap", Verdict: "fine", Can: "chance", Cannot: "cause"},
	}
	v := controls(r)
	if n := strings.Count(v.HTML, "noise"); n != 1 {
		t.Errorf("what halves can see is said %d times", n)
	}
	if n := strings.Count(v.HTML, "<td role=\"cell\">cause") + strings.Count(v.HTML, "<td>cause"); n != 2 {
		t.Errorf("two reaches of the swap stand %d times", n)
	}
	if !strings.Contains(v.HTML, "all crystals") {
		t.Error("a control of all crystals has no name")
	}
	svg := controlsFigure(r).SVG
	if n := strings.Count(svg, ">halves</text>"); n != 1 {
		t.Errorf("the figure heads halves %d times", n)
	}
}

func TestContrastsNameTheirPositions(t *testing.T) {
	r := made()
	v := byStrength(r)
	for _, want := range []string{">thin \u2212 thick, in local means (root scale)</text>", ">thin \u2212 mid, in local means (root scale)</text>"} {
		if !strings.Contains(v.HTML, want) {
			t.Errorf("no axis says %q", want)
		}
	}
	if text := byResolution(r).HTML; !strings.Contains(text, "ln(\u27e8I mid\u27e9 / \u27e8I thin\u27e9)") {
		t.Error("the ratio of thin and mid does not name them")
	}
	r.Contrasts[1].Thin, r.Contrasts[1].Primary = "edge", true
	for _, set := range pairings(r) {
		if set.list[0].Primary && set.name != "thinner \u2212 thicker (primary)" {
			t.Errorf("positions of several names are called %q", set.name)
		}
	}
}
