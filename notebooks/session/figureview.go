package session

import (
	"fmt"
	"hash/fnv"
	"html"
	"strings"

	"thinward/analysis"
	"thinward/analysis/figure"
)

// choices bounds the alternatives that one view shows; the rest are counted.
const choices = 12

// drawable is a figure or a set of small multiples.
type drawable interface {
	Draw() (*figure.Figure, error)
}

// figureView gathers what one view of figures shows: alternatives to choose
// from, of which the first is seen where no style sheet knows better.
type figureView struct {
	title, caption, pick string
	names                []string
	whole                []*figure.Figure
	parts                [][]*figure.Figure
	extra                []string // HTML that belongs to the parts, parallel to parts
	summary              *grid
	empty                string // what to say without a figure
}

func (v *figureView) add(name string, d drawable) {
	if p, ok := d.(*figure.Panels); ok && len(p.Panel) == 0 {
		return
	}
	f, err := d.Draw()
	if err != nil {
		panic(&Error{Step: "figure", Err: err, Inside: true})
	}
	parts := []*figure.Figure{f}
	if p, ok := d.(*figure.Panels); ok && len(p.Panel) > 1 {
		q := *p
		q.Columns = min(3, len(p.Panel))
		if parts, err = q.Each(); err != nil {
			panic(&Error{Step: "figure", Err: err, Inside: true})
		}
	}
	v.put(name, f, parts, "")
}

func (v *figureView) put(name string, whole *figure.Figure, parts []*figure.Figure, extra string) {
	v.names, v.whole, v.parts, v.extra = append(v.names, name), append(v.whole, whole), append(v.parts, parts), append(v.extra, extra)
}

func (v *figureView) view() *View {
	out := &View{Title: v.title}
	if v.summary != nil {
		out.Plain = v.summary.plain()
	}
	if len(v.whole) == 0 {
		text := v.empty
		if text == "" {
			text = "Nothing to draw."
		}
		out.Plain = v.title + ": " + text + "\n"
		out.HTML = `<p class="empty">` + html.EscapeString(text) + "</p>"
		return out
	}
	out.SVG = v.whole[0].SVG
	n := min(len(v.whole), choices)
	var b strings.Builder
	b.WriteString(`<figure class="plot"><figcaption>` + html.EscapeString(v.caption) + `</figcaption>`)
	if n > 1 {
		v.switches(&b, n)
	}
	for i := 0; i < n; i++ {
		hide := ""
		if i > 0 {
			hide = " hidden"
		}
		fmt.Fprintf(&b, `<div class="choice" data-choice="%d"%s>`, i+1, hide)
		if n > 1 {
			fmt.Fprintf(&b, `<p class="choice-name">%s</p>`, html.EscapeString(v.names[i]))
		}
		fmt.Fprintf(&b, `<div class="multiples of-%d">`, min(3, len(v.parts[i])))
		for _, f := range v.parts[i] {
			reach := ""
			if len(v.parts[i]) == 1 {
				// A wide figure scrolls on a narrow screen, also by the keys.
				reach = ` tabindex="0" role="group" aria-label="` + html.EscapeString(f.Title) + `"`
			}
			b.WriteString(`<div class="panel"` + reach + ">" + f.SVG + "</div>")
		}
		b.WriteString("</div>" + v.extra[i])
		for _, note := range v.whole[i].Notes {
			b.WriteString(`<p class="note">` + html.EscapeString(note) + "</p>")
		}
		b.WriteString(`<details class="numbers"><summary>Numbers of this figure</summary>` + tableOf(v.whole[i].Table).html() + "</details></div>")
	}
	if more := len(v.whole) - n; more > 0 {
		fmt.Fprintf(&b, `<p class="note">%d more are not drawn here; their numbers are in result.json.</p>`, more)
	}
	b.WriteString("</figure>")
	out.HTML = b.String()
	return out
}

// switches writes the radio buttons. They are hidden until a style sheet that
// knows how to act on them shows them.
func (v *figureView) switches(b *strings.Builder, n int) {
	h := fnv.New32a()
	h.Write([]byte(v.title + strings.Join(v.names, "|")))
	fmt.Fprintf(b, `<fieldset class="pick" hidden><legend>%s</legend>`, html.EscapeString(v.pick))
	for i := 0; i < n; i++ {
		checked := ""
		if i == 0 {
			checked = " checked"
		}
		fmt.Fprintf(b, `<label><input type="radio" name="pick-%x" data-pick="%d"%s> %s</label>`, h.Sum32(), i+1, checked, html.EscapeString(v.names[i]))
	}
	b.WriteString("</fieldset>")
}

func tableOf(t *figure.Table) *grid {
	g := newGrid(t.Caption, t.Head...)
	for c, words := range t.Words {
		g.left[c] = words
	}
	g.rows = t.Rows
	return g
}

// pairing is one pair of positions, by name, in all crystals that have it.
type pairing struct {
	name string
	list []*analysis.ContrastResult
}

// pairings groups the contrasts by the names of their positions; the primary
// ones of all crystals come first whatever they are called.
func pairings(r *analysis.Result) []pairing {
	var out []pairing
	at := map[string]int{}
	for _, primary := range []bool{true, false} {
		for i := range r.Contrasts {
			c := &r.Contrasts[i]
			if c.Primary != primary {
				continue
			}
			name := c.Thin + " \u2212 " + c.Thick
			if c.ThickCrystal != "" {
				name = contrastName(c)
			}
			key := fmt.Sprint(primary, name)
			if primary {
				key = "primary"
			}
			k, ok := at[key]
			if !ok {
				k = len(out)
				at[key] = k
				if primary {
					name += " (primary)"
				}
				out = append(out, pairing{name: name})
			}
			out[k].list = append(out[k].list, c)
		}
	}
	return out
}
