package figure

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/xml"
	"errors"
	"fmt"
	"html"
	"io"
	"math"
	"strconv"
	"strings"
)

// fontStack is set once on the root: the page's own face, then common ones.
const fontStack = "var(--face,ui-sans-serif,system-ui,'Segoe UI','Noto Sans','Liberation Sans',Arial,sans-serif)"

// reader is what a pointer or the arrow keys can read off one plot.
type reader struct {
	frame  *frame
	name   string
	xLabel string
	yLabel string
	curves []Curve
}

// finish turns the drawing into the svg element: colours to variables, styles to
// attributes (so that a strict Content-Security-Policy can forbid style
// attributes), title and description, ids from the content.
func (s *sheet) finish(title, desc string) (string, error) {
	var raw bytes.Buffer
	if _, err := s.canvas.WriteTo(&raw); err != nil {
		return "", err
	}
	body, err := s.tokens(&raw)
	if err != nil {
		return "", err
	}
	var readers strings.Builder
	for i := range s.readers {
		s.readers[i].write(&readers)
	}
	sum := sha256.Sum256([]byte(title + "\x00" + desc + "\x00" + body + readers.String()))
	id := "fig-" + hex.EncodeToString(sum[:5])
	var b strings.Builder
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" class="figure" role="img" aria-labelledby="%s-t" aria-describedby="%s-d" width="%g" height="%g" viewBox="0 0 %g %g" font-family="%s" color="%s">`,
		id, id, s.w, s.h, s.w, s.h, fontStack, tokens[ink].css())
	fmt.Fprintf(&b, `<title id="%s-t">%s</title><desc id="%s-d">%s</desc>`, id, html.EscapeString(title), id, html.EscapeString(desc))
	b.WriteString(body)
	b.WriteString(readers.String())
	b.WriteString("</svg>")
	if b.Len() > MaxBytes {
		return "", fmt.Errorf("figure: %q takes %d bytes, more than %d", title, b.Len(), MaxBytes)
	}
	return b.String(), nil
}

// tokens copies the drawing token by token, without its root.
func (s *sheet) tokens(r io.Reader) (string, error) {
	d := xml.NewDecoder(r)
	var b strings.Builder
	depth, texts, inText := 0, 0, false
	pending := false // an opened element that may still close at once
	seal := func() {
		if pending {
			b.WriteString(">")
			pending = false
		}
	}
	for {
		t, err := d.RawToken()
		if errors.Is(err, io.EOF) {
			return b.String(), nil
		}
		if err != nil {
			return "", err
		}
		switch t := t.(type) {
		case xml.StartElement:
			if depth++; depth == 1 {
				continue
			}
			seal()
			anchor := ""
			if inText = t.Name.Local == "text"; inText {
				anchor = s.anchors[texts]
				texts++
			}
			b.WriteString("<" + t.Name.Local)
			attributes(&b, t.Attr, anchor)
			pending = true
		case xml.EndElement:
			if depth--; depth == 0 {
				continue
			}
			inText = false
			if pending {
				b.WriteString("/>")
				pending = false
			} else {
				b.WriteString("</" + t.Name.Local + ">")
			}
		case xml.CharData:
			if inText {
				seal()
				b.WriteString(html.EscapeString(string(t)))
			}
		}
	}
}

func attributes(b *strings.Builder, list []xml.Attr, anchor string) {
	put := func(name, value string) { fmt.Fprintf(b, ` %s="%s"`, name, html.EscapeString(value)) }
	for _, a := range list {
		if a.Name.Local != "style" {
			put(a.Name.Local, a.Value)
			continue
		}
		for _, part := range strings.Split(a.Value, ";") {
			name, value, _ := strings.Cut(part, ":")
			name, value = strings.TrimSpace(name), strings.TrimSpace(value)
			switch {
			case name == "" || name == "font-family" || name == "font-variant" || name == "font-style" || value == "normal":
			case name == "fill" || name == "stroke":
				put(name, colour(value))
			default:
				put(name, value)
			}
		}
	}
	if anchor != "" && anchor != "start" {
		put("text-anchor", anchor)
	}
}

// colour turns a stand-in into the variable it stands for; ink is the colour of
// the root.
func colour(v string) string {
	if len(v) != 7 || !strings.HasPrefix(strings.ToLower(v), "#fe01") {
		return v
	}
	n, err := strconv.ParseUint(v[5:], 16, 8)
	if err != nil || int(n) >= len(tokens) {
		return v
	}
	if n == ink {
		return "currentColor"
	}
	return tokens[n].css()
}

// readerPoints bounds the points that a reader holds.
const readerPoints = 220

func (r *reader) write(b *strings.Builder) {
	fmt.Fprintf(b, `<g class="reader" data-frame="%s %s %s %s" data-name="%s" data-x-label="%s" data-y-label="%s">`,
		short(r.frame.x0), short(r.frame.y0), short(r.frame.x1), short(r.frame.y1), html.EscapeString(r.name), html.EscapeString(r.xLabel), html.EscapeString(r.yLabel))
	for _, c := range r.curves {
		keep := r.kept(&c)
		fmt.Fprintf(b, `<g data-name="%s"`, html.EscapeString(c.Name))
		list(b, "px", keep, c.X, func(v float64) string { return short(r.frame.px(v)) })
		list(b, "py", keep, c.Y, func(v float64) string { return short(r.frame.py(v)) })
		for _, col := range []struct {
			name string
			v    []float64
		}{{"x", c.X}, {"y", c.Y}, {"lo", c.Lo}, {"hi", c.Hi}, {"lo-sim", c.LoSim}, {"hi-sim", c.HiSim}} {
			list(b, col.name, keep, col.v, Number)
		}
		b.WriteString("/>")
	}
	b.WriteString("</g>")
}

// kept lists the points inside the frame, each place once, in order of x.
func (r *reader) kept(c *Curve) []int {
	var keep []int
	for i := range c.X {
		p, ok := r.frame.place(c.X[i], c.Y[i])
		if !ok || !r.frame.holds(p) {
			continue
		}
		if n := len(keep); n > 0 && c.X[keep[n-1]] == c.X[i] {
			continue
		}
		keep = append(keep, i)
	}
	if every := (len(keep) + readerPoints - 1) / readerPoints; every > 1 {
		var some []int
		for i := 0; i < len(keep); i += every {
			some = append(some, keep[i])
		}
		keep = some
	}
	return keep
}

func list(b *strings.Builder, name string, keep []int, v []float64, write func(float64) string) {
	if v == nil || len(keep) == 0 {
		return
	}
	fmt.Fprintf(b, ` data-%s="`, name)
	for i, k := range keep {
		if i > 0 {
			b.WriteByte(' ')
		}
		b.WriteString(write(v[k]))
	}
	b.WriteByte('"')
}

func short(v float64) string { return strconv.FormatFloat(math.Round(v*10)/10, 'f', -1, 64) }
