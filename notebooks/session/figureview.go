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
	wide                 map[int]bool // figures that take the whole width
	extra                []string     // HTML that belongs to the parts, parallel to parts
	summary              *grid
	empty                string // what to say without a figure
}

// Figures of one plot are drawn no wider than this, so that on paper, where they
// are scaled down, their letters stay legible.
const (
	singleWide = 600.0
	singleHigh = 330.0
	forestWide = 640.0
)

func (v *figureView) add(name string, d drawable) {
	switch one := d.(type) {
	case *figure.Panels:
		if len(one.Panel) == 0 {
			return
		}
		if len(one.Panel) == 1 && one.Width == 0 {
			one.Width, one.Height = singleWide, singleHigh
		}
	case *figure.Shares:
		one.Width, one.Height = singleWide, singleHigh
	case *figure.Forest:
		one.Width = forestWide
	}
	f, err := d.Draw()
	if err != nil {
		panic(&Error{Step: "figure", Err: err, Inside: true})
	}
	parts := []*figure.Figure{f}
	switch d := d.(type) {
	case *figure.Panels:
		if len(d.Panel) > 1 {
			q := *d
			q.Columns = min(3, len(d.Panel))
			parts, err = q.Each()
		}
	case *figure.Cumulative:
		parts, err = d.Each()
	case *figure.ForestColumns:
		if len(d.Columns) > 1 {
			if v.wide == nil {
				v.wide = map[int]bool{}
			}
			v.wide[len(v.names)] = true
		}
	}
	if err != nil {
		panic(&Error{Step: "figure", Err: err, Inside: true})
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
		wide := ""
		if v.wide[i] {
			wide = " wide"
		}
		fmt.Fprintf(&b, `<div class="multiples of-%d%s">`, min(3, len(v.parts[i])), wide)
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

// sides are the names of both positions where all crystals give them the same ones,
// else "thinner" and "thicker".
func (p *pairing) sides() (thin, thick string) {
	for i, c := range p.list {
		a, b := c.Thin, c.Thick
		if c.ThickCrystal != "" {
			a, b = c.Crystal+"/"+c.Thin, c.ThickCrystal+"/"+c.Thick
		}
		if i > 0 && (a != thin || b != thick) {
			return "thinner", "thicker"
		}
		thin, thick = a, b
	}
	return thin, thick
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
			key := "primary"
			if !primary {
				key = "other " + (&pairing{list: []*analysis.ContrastResult{c}}).difference()
			}
			k, ok := at[key]
			if !ok {
				k = len(out)
				at[key] = k
				out = append(out, pairing{})
			}
			out[k].list = append(out[k].list, c)
		}
	}
	for i := range out {
		out[i].name = out[i].difference()
		if out[i].list[0].Primary {
			out[i].name += " (primary)"
		}
	}
	return out
}

// difference names the contrast, "thin \u2212 mid".
func (p *pairing) difference() string {
	thin, thick := p.sides()
	return thin + " \u2212 " + thick
}
