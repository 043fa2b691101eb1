package figure

import (
	"strings"
	"testing"
)

func forestColumns() *ForestColumns {
	return &ForestColumns{Title: "Choices", Desc: "m by choice.", X: Axis{Label: "exchange m", Zero: true}, Columns: []ForestColumn{
		{"L1", []Row{{Group: "leading", Name: "all", Value: 0.08, Lo: 0.05, Hi: 0.11, Lead: true}, {Group: "axis", Name: "third", Value: 0.04, Lo: 0.01, Hi: 0.07}, {Group: "axis", Name: "thin", Value: nan, Lo: -inf, Hi: inf, Note: "none"}}},
		{"L2", []Row{{Group: "leading", Name: "all", Value: 0.09, Lo: 0.06, Hi: inf, Lead: true}, {Group: "axis", Name: "thin", Value: 0.1, Lo: 0.07, Hi: 0.13}, {Group: "model", Name: "(m)", Value: 0.1, Lo: 0.08, Hi: 0.12}}},
	}}
}

func TestForestColumnsShareLines(t *testing.T) {
	lines := forestColumns().lines()
	var got []string
	for _, l := range lines {
		got = append(got, l.group+"/"+l.name)
	}
	if text := strings.Join(got, " "); text != "leading/all axis/third axis/thin model/(m)" {
		t.Errorf("lines %s", text)
	}
	if at := lines[2].at; at[0] != 2 || at[1] != 1 {
		t.Errorf("thin stands at %v", at)
	}
	if at := lines[1].at; at[1] != -1 || !lines[0].lead || lines[1].lead {
		t.Errorf("third stands at %v, leading %v and %v", at, lines[0].lead, lines[1].lead)
	}
	// A name twice in one column takes two lines.
	f := forestColumns()
	f.Columns[0].Rows = append(f.Columns[0].Rows, Row{Group: "axis", Name: "third", Value: 1})
	if n := len(f.lines()); n != 5 {
		t.Errorf("%d lines", n)
	}
}

func TestForestColumnsWords(t *testing.T) {
	f := drawn(t, forestColumns())
	if n := strings.Count(f.SVG, ">thin</text>"); n != 1 {
		t.Errorf("a shared name stands %d times", n)
	}
	for _, want := range []string{">L1</text>", ">L2</text>", ">0.080</text>", ">\u2013</text>"} {
		if !strings.Contains(f.SVG, want) {
			t.Errorf("%q is not written", want)
		}
	}
	if got := strings.Join(f.Table.Rows[5], "|"); len(f.Table.Rows) != 6 || got != "L2|model|(m)|0.1|0.08|0.12|" {
		t.Errorf("last of %d rows %q", len(f.Table.Rows), got)
	}
	if _, err := (&ForestColumns{Title: "Choices", Columns: []ForestColumn{{Name: "L1"}}}).Draw(); err == nil || err.Error() != `figure: "Choices" has no row` {
		t.Errorf("error %v", err)
	}
	many := forestColumns()
	for i := 0; i < forestRows; i++ {
		many.Columns[1].Rows = append(many.Columns[1].Rows, Row{Group: "more", Name: "x", Value: float64(i)})
	}
	if f := drawn(t, many); len(f.Notes) != 1 || f.Notes[0] != "Rows not drawn, only in the table: 4." {
		t.Errorf("notes %q", f.Notes)
	}
}
