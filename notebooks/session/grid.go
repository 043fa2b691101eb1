package session

import (
	"fmt"
	"html"
	"strings"
	"unicode/utf8"
)

// grid is a table on its way to HTML and to plain text. The first cell of a row
// is its heading; numeric columns are set to the right.
type grid struct {
	caption string
	head    []string
	rows    [][]string
	left    map[int]bool // columns of words
	exact   map[int]bool // columns whose words are no prose, such as names of files
	verdict int          // column that holds a verdict, -1 for none
}

func newGrid(caption string, head ...string) *grid {
	return &grid{caption: caption, head: head, left: map[int]bool{0: true}, exact: map[int]bool{}, verdict: -1}
}

func (g *grid) words(columns ...int) *grid {
	for _, c := range columns {
		g.left[c] = true
	}
	return g
}

// verbatim names columns that are shown letter by letter.
func (g *grid) verbatim(columns ...int) *grid {
	for _, c := range columns {
		g.exact[c] = true
	}
	return g
}

func (g *grid) add(cells ...string) {
	row := append([]string(nil), cells...)
	for c := range row {
		if g.left[c] && !g.exact[c] {
			row[c] = prose(row[c])
		}
	}
	g.rows = append(g.rows, row)
}

// Cells of more than longWords characters are sentences. A table that holds a column
// of sentences becomes a list of cards on a narrow screen, with the heads as labels;
// one of more than denseColumns columns is set closer, one of more than tallRows rows
// scrolls, and the heading of a row stays on one line up to shortHeading characters.
const (
	longWords    = 40
	denseColumns = 10
	tallRows     = 30
	shortHeading = 26
)

// shape is what the cells of a grid ask of its setting.
type shape struct {
	empty, long []bool // by column
	cards       bool
	columns     int
}

func (g *grid) shape() shape {
	s := shape{empty: make([]bool, len(g.head)), long: make([]bool, len(g.head))}
	for c := range g.head {
		filled, sentences := 0, 0
		for _, row := range g.rows {
			if c < len(row) && row[c] != "" {
				filled++
			}
			if c < len(row) && g.left[c] && utf8.RuneCountInString(row[c]) > longWords {
				sentences++
			}
		}
		s.empty[c] = c > 0 && filled == 0 && len(g.rows) > 0
		s.long[c] = sentences > 0
		s.cards = s.cards || c > 0 && !g.exact[c] && 3*sentences >= len(g.rows) && sentences > 0
		if !s.empty[c] {
			s.columns++
		}
	}
	return s
}

// html writes the table in a region of its own that scrolls, by the keys too. Columns
// without any entry are left out.
func (g *grid) html() string {
	s := g.shape()
	name := html.EscapeString(g.caption)
	class := "sortable"
	// A table that is laid out as cards loses its meaning to some readers of the
	// screen unless its parts say what they are.
	role := func(string) string { return "" }
	if s.cards {
		class += " stack"
		role = func(r string) string { return ` role="` + r + `"` }
	}
	if s.columns > denseColumns {
		class += " dense"
	}
	region := "scroll"
	if len(g.rows) > tallRows {
		region += " tall"
	}
	var b strings.Builder
	fmt.Fprintf(&b, `<div class="%s" tabindex="0" role="region" aria-label="%s"><table class="%s"%s><caption><span>%s</span></caption><thead%s><tr%s>`, region, name, class, role("table"), name, role("rowgroup"), role("row"))
	for c, h := range g.head {
		if !s.empty[c] {
			fmt.Fprintf(&b, `<th scope="col"%s%s>%s</th>`, role("columnheader"), g.class(c, ""), html.EscapeString(h))
		}
	}
	fmt.Fprintf(&b, "</tr></thead><tbody%s>", role("rowgroup"))
	for _, row := range g.rows {
		fmt.Fprintf(&b, "<tr%s>", role("row"))
		for c, cell := range row {
			if s.empty[c] {
				continue
			}
			text := html.EscapeString(bound(cell))
			if c == 0 {
				if utf8.RuneCountInString(cell) <= shortHeading {
					text = strings.ReplaceAll(text, " ", "\u00a0")
				}
				fmt.Fprintf(&b, `<th scope="row"%s>%s</th>`, role("rowheader"), text)
				continue
			}
			extra := ""
			if s.long[c] {
				extra = "long"
			}
			if c == g.verdict {
				extra = "verdict-" + strings.ReplaceAll(cell, " ", "-")
				text = mark(cell) + text
			}
			label := ""
			if s.cards {
				label = fmt.Sprintf(` data-label="%s"`, html.EscapeString(g.head[c]))
			}
			fmt.Fprintf(&b, "<td%s%s%s>%s</td>", role("cell"), g.class(c, extra), label, text)
		}
		b.WriteString("</tr>")
	}
	b.WriteString("</tbody></table></div>")
	return b.String()
}

func (g *grid) class(c int, extra string) string {
	var names []string
	if !g.left[c] {
		names = append(names, "number")
	}
	if extra != "" {
		names = append(names, extra)
	}
	if len(names) == 0 {
		return ""
	}
	return ` class="` + strings.Join(names, " ") + `"`
}

func (g *grid) plain() string {
	width := make([]int, len(g.head))
	for _, row := range append([][]string{g.head}, g.rows...) {
		for c, cell := range row {
			width[c] = max(width[c], utf8.RuneCountInString(cell))
		}
	}
	var b strings.Builder
	if g.caption != "" {
		b.WriteString(g.caption + "\n")
	}
	for _, row := range append([][]string{g.head}, g.rows...) {
		var line strings.Builder
		for c, cell := range row {
			pad := strings.Repeat(" ", width[c]-utf8.RuneCountInString(cell))
			if c > 0 {
				line.WriteString("  ")
			}
			if g.left[c] {
				line.WriteString(cell + pad)
			} else {
				line.WriteString(pad + cell)
			}
		}
		b.WriteString(strings.TrimRight(line.String(), " ") + "\n")
	}
	return b.String()
}

func (g *grid) view(title string) *View { return &View{Title: title, HTML: g.html(), Plain: g.plain()} }
