package page

import (
	"bytes"
	"encoding/json"
	"fmt"
	"html"
	"regexp"
	"strings"

	"thinward/notebooks/runner"
)

// section is one part of the page.
type section struct {
	id, title string
	body      strings.Builder
	cells     int // code cells in it
	shown     int // of which showed something
}

// document is the notebook on its way to a page.
type document struct {
	title    string
	sections []*section
	ids      map[string]int // ids and names in use
	cell     int            // code cells so far
}

// outline cuts the notebook into sections at its headings of level two. What
// comes before the first one stands last when the notebook has an answer, so
// that the answer is seen first.
func outline(nb *runner.Notebook, o *Options) (*document, error) {
	d := &document{ids: map[string]int{"main": 1, "live": 1, "result": 1, "theme": 1, "print": 1, "link": 1}}
	lead := &section{id: d.unique("series"), title: "The series"}
	now := lead
	for _, c := range nb.Cells {
		switch c.Type {
		case "markdown":
			m, err := markdown(c.Source)
			if err != nil {
				return nil, err
			}
			if m.title != "" && d.title == "" {
				d.title = m.title
			}
			if m.section != "" {
				now = &section{id: d.unique(sectionID(c, m.section)), title: m.section}
				d.sections = append(d.sections, now)
				fmt.Fprintf(&now.body, `<h2 id="%s-h">%s</h2>`, now.id, html.EscapeString(m.section))
			}
			now.body.WriteString(d.distinct(m.html))
		case "code":
			d.code(now, c, o)
		}
	}
	if d.title == "" {
		d.title = o.Title
	}
	if d.title == "" {
		d.title = "Notebook"
	}
	d.settle(lead, o)
	return d, nil
}

// settle places what stood before the first section, and says where a stopped
// run did not come to.
func (d *document) settle(lead *section, o *Options) {
	if lead.body.Len() > 0 {
		at := 0
		for i, s := range d.sections {
			if s.id == "answer" {
				at = len(d.sections)
			}
			if s.id == "intake" && at > 0 {
				at = i
				break
			}
		}
		text := lead.body.String()
		lead.body.Reset()
		if at == 0 && len(d.sections) == 0 {
			lead.title = "Notebook"
		}
		fmt.Fprintf(&lead.body, `<h2 id="%s-h">%s</h2>%s`, lead.id, lead.title, text)
		d.sections = append(d.sections[:at:at], append([]*section{lead}, d.sections[at:]...)...)
	}
	if o.Failure == nil {
		return
	}
	for _, s := range d.sections {
		if s.cells > 0 && s.shown == 0 {
			s.body.WriteString(`<p class="note">Not reached: the run stopped before this step.</p>`)
		}
	}
}

// sectionID is the id in the cell's metadata, thinward.section, else the heading
// in small letters.
func sectionID(c *runner.Cell, heading string) string {
	var meta struct {
		Section string `json:"section"`
	}
	if json.Unmarshal(c.Metadata["thinward"], &meta) == nil && slug(meta.Section) != "" {
		return slug(meta.Section)
	}
	if s := slug(heading); s != "" {
		return s
	}
	return "section"
}

var notSlug = regexp.MustCompile(`[^a-z0-9]+`)

func slug(s string) string {
	return strings.Trim(notSlug.ReplaceAllString(strings.ToLower(s), "-"), "-")
}

// unique gives an id that no other element has.
func (d *document) unique(id string) string {
	for n := d.ids[id]; ; n++ {
		name := id
		if n > 0 {
			name = fmt.Sprintf("%s-%d", id, n+1)
		}
		if n == 0 || d.ids[name] == 0 {
			d.ids[id] = n + 1
			if n > 0 {
				d.ids[name]++
			}
			return name
		}
	}
}

// code writes the outputs of a cell and, folded, its source.
func (d *document) code(s *section, c *runner.Cell, o *Options) {
	d.cell++
	s.cells++
	if len(c.Outputs) > 0 {
		s.shown++
	}
	for i := range c.Outputs {
		s.body.WriteString(d.output(&c.Outputs[i], o))
	}
	if strings.TrimSpace(c.Source) == "" {
		return
	}
	fmt.Fprintf(&s.body, `<details class="cell" id="%s"><summary>Code of cell %d</summary><pre tabindex="0"><code>%s</code></pre></details>`,
		d.unique(fmt.Sprintf("cell-%d", d.cell)), d.cell, highlight(c.Source))
}

var jsonNull = []byte("null")

// present tells whether an output holds a MIME type.
func present(out *runner.Output, mime string) bool {
	v, ok := out.Data[mime]
	return ok && !bytes.Equal(v, jsonNull)
}
