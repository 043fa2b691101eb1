package session

import (
	"fmt"
	"strings"
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
