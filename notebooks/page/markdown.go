package page

import (
	"fmt"
	"strings"

	"github.com/yuin/goldmark"
	"github.com/yuin/goldmark/ast"
	"github.com/yuin/goldmark/extension"
	"github.com/yuin/goldmark/text"
)

// prose is one Markdown cell: its headings of level one and two taken out, the
// rest as HTML.
type prose struct {
	title, section string
	html           string
}

// markdown renders without raw HTML. The first heading of level one becomes the
// title, the first of level two names a section; further ones of both levels
// become level three, so that headings never skip a level.
func markdown(source string) (*prose, error) {
	md := goldmark.New(goldmark.WithExtensions(extension.Table))
	src := []byte(source)
	root := md.Parser().Parse(text.NewReader(src))
	out := &prose{}
	var drop []ast.Node
	for n := root.FirstChild(); n != nil; n = n.NextSibling() {
		h, ok := n.(*ast.Heading)
		if !ok {
			continue
		}
		words := strings.TrimSpace(string(words(h, src)))
		switch {
		case h.Level == 1 && out.title == "" && out.section == "":
			out.title = words
			drop = append(drop, n)
		case h.Level == 2 && out.section == "":
			out.section = words
			drop = append(drop, n)
		default:
			h.Level = min(max(h.Level, 3), 3)
		}
	}
	for _, n := range drop {
		root.RemoveChild(root, n)
	}
	var b strings.Builder
	if err := md.Renderer().Render(&b, src, root); err != nil {
		return nil, fmt.Errorf("a Markdown cell: %w", err)
	}
	out.html = b.String()
	return out, nil
}

// words is the text of a heading without its marks.
func words(n ast.Node, src []byte) []byte {
	var out []byte
	for c := n.FirstChild(); c != nil; c = c.NextSibling() {
		if t, ok := c.(*ast.Text); ok {
			out = append(out, t.Segment.Value(src)...)
			if t.SoftLineBreak() {
				out = append(out, ' ')
			}
			continue
		}
		out = append(out, words(c, src)...)
	}
	return out
}
