package session

import (
	"fmt"
	"html"
	"strings"
	"unicode/utf8"
)

// View is what a cell shows: the same content as HTML, as plain text, and, when
// it is one figure, as SVG.
type View struct {
	Title string
	HTML  string
	Plain string
	SVG   string

	whole bool // Plain holds texts that were shortened already
}

// SimpleRender gives the kernel every form of the view by MIME type. A nil view
// renders as nothing.
func (v *View) SimpleRender() map[string]interface{} {
	if v == nil {
		return map[string]interface{}{"text/plain": ""}
	}
	out := map[string]interface{}{"text/plain": v.String()}
	if v.HTML != "" {
		out["text/html"] = styled(v.HTML)
	}
	if v.SVG != "" {
		out["image/svg+xml"] = v.SVG
	}
	return out
}

// Together shows several views as the value of one cell, one below the other. Nil
// views are left out.
func Together(views ...*View) *View {
	out := &View{whole: true}
	for _, v := range views {
		if v == nil {
			continue
		}
		if out.Title == "" {
			out.Title = v.Title
		}
		out.HTML += v.HTML
		if out.Plain != "" {
			out.Plain += "\n"
		}
		out.Plain += v.String() + "\n"
	}
	return out
}

// plainLines bounds what a view prints as text.
const plainLines = 40

// String is the plain text, at most 40 lines of it.
func (v *View) String() string {
	if v == nil {
		return ""
	}
	lines := strings.Split(strings.TrimRight(v.Plain, "\n"), "\n")
	if len(lines) > plainLines && !v.whole {
		more := len(lines) - plainLines + 1
		lines = append(lines[:plainLines-1], fmt.Sprintf("... %d lines more", more))
	}
	return strings.Join(lines, "\n")
}

// grid is a table on its way to HTML and to plain text. The first cell of a row
// is its heading; numeric columns are set to the right.
type grid struct {
	caption string
	head    []string
	rows    [][]string
	left    map[int]bool // columns of words
	verdict int          // column that holds a verdict, -1 for none
}

func newGrid(caption string, head ...string) *grid {
	return &grid{caption: caption, head: head, left: map[int]bool{0: true}, verdict: -1}
}

func (g *grid) words(columns ...int) *grid {
	for _, c := range columns {
		g.left[c] = true
	}
	return g
}

func (g *grid) add(cells ...string) { g.rows = append(g.rows, cells) }

func (g *grid) html() string {
	var b strings.Builder
	b.WriteString(`<div class="scroll" tabindex="0" role="region" aria-label="` + html.EscapeString(g.caption) + `"><table class="sortable"><caption>` + html.EscapeString(g.caption) + "</caption><thead><tr>")
	for c, h := range g.head {
		fmt.Fprintf(&b, `<th scope="col"%s>%s</th>`, g.class(c, ""), html.EscapeString(h))
	}
	b.WriteString("</tr></thead><tbody>")
	for _, row := range g.rows {
		b.WriteString("<tr>")
		for c, cell := range row {
			if c == 0 {
				fmt.Fprintf(&b, `<th scope="row">%s</th>`, html.EscapeString(cell))
				continue
			}
			text := html.EscapeString(cell)
			extra := ""
			if c == g.verdict {
				extra = "verdict-" + strings.ReplaceAll(cell, " ", "-")
				text = mark(cell) + text
			}
			fmt.Fprintf(&b, "<td%s>%s</td>", g.class(c, extra), text)
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

// mark is a shape for a verdict, so that colour is not needed to read it.
func mark(verdict string) string {
	shape := map[string]string{
		"fine": "\u25cf", "yes": "\u25cf", "caution": "\u25b2", "undecided": "\u25b2", "fails": "\u25a0", "not known": "\u25cb", "not seen": "\u25cb",
	}[verdict]
	if shape == "" {
		return ""
	}
	return `<span class="shape" aria-hidden="true">` + shape + `</span> `
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
