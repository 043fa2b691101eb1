package page

import (
	"encoding/base64"
	"fmt"
	"html"
	"regexp"
	"strings"

	xhtml "golang.org/x/net/html"

	"thinward/notebooks/runner"
)

// output writes one output. Ours stand in the page; HTML and SVG of others stand
// in a frame without any right.
func (d *document) output(out *runner.Output, o *Options) string {
	switch out.Type {
	case "stream":
		return "<pre tabindex=\"0\">" + html.EscapeString(plain(out.Text)) + "</pre>"
	case "error":
		trace := strings.Join(out.Traceback, "\n")
		more := ""
		if strings.TrimSpace(trace) != "" {
			more = `<details><summary>Trace</summary><pre tabindex="0">` + html.EscapeString(plain(trace)) + "</pre></details>"
		}
		return fmt.Sprintf(`<div class="failed"><p><strong>%s</strong></p><p>%s</p>%s</div>`, html.EscapeString(out.Name), html.EscapeString(plain(out.Value)), more)
	}
	for _, mime := range []string{"text/html", "image/svg+xml"} {
		if !present(out, mime) {
			continue
		}
		text := out.TextOf(mime)
		if o.Trusted {
			return d.distinct(text)
		}
		return framed(text)
	}
	for _, mime := range []string{"image/png", "image/jpeg"} {
		if data := strings.Join(strings.Fields(out.TextOf(mime)), ""); data != "" {
			if _, err := base64.StdEncoding.DecodeString(data); err == nil {
				return fmt.Sprintf(`<p><img alt="%s" src="data:%s;base64,%s"></p>`, html.EscapeString(out.TextOf("text/plain")), mime, data)
			}
		}
	}
	if text := out.TextOf("text/markdown"); text != "" {
		if m, err := markdown(text); err == nil {
			return d.distinct(m.html)
		}
	}
	if text := out.TextOf("text/plain"); text != "" {
		return "<pre tabindex=\"0\">" + html.EscapeString(plain(text)) + "</pre>"
	}
	return ""
}

// framed puts foreign HTML where it can reach nothing: no script, no origin, and
// the policy of the page, which a frame of this kind inherits.
func framed(text string) string {
	return `<iframe sandbox title="Output of a notebook that is not ours" srcdoc="` + html.EscapeString(text) + `"></iframe>`
}

var escapes = regexp.MustCompile("\x1b\\[[0-9;]*[A-Za-z]")

// plain drops the colours of a terminal.
func plain(s string) string { return escapes.ReplaceAllString(s, "") }

// distinct renames the ids and the names of radio groups that the page has
// already, in the whole of this piece.
func (d *document) distinct(piece string) string {
	var twice []string
	mine := map[string]bool{}
	z := xhtml.NewTokenizer(strings.NewReader(piece))
	for {
		kind := z.Next()
		if kind == xhtml.ErrorToken {
			break
		}
		if kind != xhtml.StartTagToken && kind != xhtml.SelfClosingTagToken {
			continue
		}
		t := z.Token()
		for _, a := range t.Attr {
			if (a.Key != "id" && (a.Key != "name" || t.Data != "input")) || mine[a.Val] {
				continue
			}
			mine[a.Val] = true
			if d.ids[a.Val] > 0 {
				twice = append(twice, a.Val)
			} else {
				d.ids[a.Val] = 1
			}
		}
	}
	for _, id := range twice {
		name := d.unique(id)
		piece = strings.ReplaceAll(piece, `"`+id+`"`, `"`+name+`"`)
		piece = strings.ReplaceAll(piece, `"#`+id+`"`, `"#`+name+`"`)
	}
	return piece
}
