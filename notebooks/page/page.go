package page

import (
	"bytes"
	"crypto/sha256"
	_ "embed" // the style sheet and the script
	"encoding/base64"
	"encoding/json"
	"fmt"
	"html"
	"strings"

	"thinward/analysis"
	"thinward/io/result"
	"thinward/notebooks/runner"
)

// Options say what a page shows besides the notebook. Zero fields are left out.
type Options struct {
	Title   string // of the browser window; empty: the first heading of the notebook
	Series  string // title of the series
	Source  string // path of the manifest or notebook, as shown
	Command string // command that makes the page again
	Version string // of Thinward
	Failure *Failure
	// Trusted says that the notebook is ours: its HTML and SVG outputs stand in the
	// page as they are. Others stand in frames that can run no script.
	Trusted bool
}

// Failure is what stopped the run.
type Failure struct {
	Cell   int    // which code cell, from 1; 0 when none
	Step   string // what it was doing
	Text   string // what went wrong
	Remedy string // what to do about it
}

//go:embed style.css
var styleSource string

//go:embed script.js
var script string

// style is the style sheet on one line, with the rules that let radio buttons choose.
var style = withPicks(strings.ReplaceAll(styleSource, "}\n", "}"))

// picks is the number of alternatives a figure can offer.
const picks = 12

func withPicks(css string) string {
	var rules []string
	for i := 1; i <= picks; i++ {
		rules = append(rules, fmt.Sprintf(`.plot:has([data-pick="%d"]:checked)>[data-choice="%d"]`, i, i))
	}
	return strings.Replace(css, "/*picks*/", strings.Join(rules, ",")+"{display:block}", 1)
}

// Build writes the page. r may be nil when no numbers exist. Texts of the
// notebook and of the options are escaped; raw HTML in Markdown is dropped.
func Build(nb *runner.Notebook, r *analysis.Result, o Options) ([]byte, error) {
	if nb == nil {
		return nil, fmt.Errorf("no notebook to make a page of")
	}
	d, err := outline(nb, &o)
	if err != nil {
		return nil, err
	}
	numbers, err := embedded(r)
	if err != nil {
		return nil, err
	}
	var b strings.Builder
	d.head(&b, &o)
	d.top(&b, r, &o)
	b.WriteString(`<div class="frame"><nav aria-label="Sections"><ol>`)
	for _, s := range d.sections {
		fmt.Fprintf(&b, `<li><a href="#%s">%s</a></li>`, s.id, html.EscapeString(s.title))
	}
	b.WriteString(`</ol></nav><main id="main">`)
	banner(&b, o.Failure)
	for _, s := range d.sections {
		fmt.Fprintf(&b, "\n<section id=\"%s\">%s</section>", s.id, s.body.String())
	}
	d.foot(&b, &o)
	b.WriteString(`</main></div><div id="live" class="hide" role="status" aria-live="polite"></div>`)
	if numbers != "" {
		b.WriteString("\n" + `<script type="application/json" id="result">` + numbers + "</script>")
	}
	b.WriteString("\n<script>" + script + "</script>\n</body></html>\n")
	return []byte(b.String()), nil
}

// embedded is result.json in one line, safe inside a script element.
func embedded(r *analysis.Result) (string, error) {
	if r == nil {
		return "", nil
	}
	data, err := result.Encode(r)
	if err != nil {
		return "", fmt.Errorf("numbers of the page: %w", err)
	}
	var b bytes.Buffer
	if err := json.Compact(&b, data); err != nil {
		return "", fmt.Errorf("numbers of the page: %w", err)
	}
	return strings.ReplaceAll(b.String(), "<", `\u003c`), nil
}

func hashOf(text string) string {
	sum := sha256.Sum256([]byte(text))
	return "'sha256-" + base64.StdEncoding.EncodeToString(sum[:]) + "'"
}

func (d *document) head(b *strings.Builder, o *Options) {
	title := d.title
	if o.Title != "" && o.Title != title {
		title = o.Title + " \u2013 " + title
	}
	policy := "default-src 'none'; style-src " + hashOf(style) + "; script-src " + hashOf(script) + "; img-src data:; base-uri 'none'; form-action 'none'"
	fmt.Fprintf(b, `<!DOCTYPE html>
<html lang="en"><head><meta charset="utf-8"><meta name="viewport" content="width=device-width, initial-scale=1"><meta name="color-scheme" content="light dark"><meta http-equiv="Content-Security-Policy" content="%s"><title>%s</title>
<style>%s</style></head>
<body>`, policy, html.EscapeString(title), style)
}

func (d *document) top(b *strings.Builder, r *analysis.Result, o *Options) {
	first := "main"
	name := "report"
	for _, s := range d.sections {
		if s.id == "answer" {
			first, name = s.id, "answer"
		}
	}
	fmt.Fprintf(b, `<a class="skip" href="#%s">Skip to the %s</a><header><div class="top"><div>`, first, name)
	series := o.Series
	if series == "" && r != nil {
		series = r.Series
	}
	if series == "" {
		series = o.Title
	}
	if series != "" {
		fmt.Fprintf(b, `<p class="kicker">%s</p>`, html.EscapeString(series))
	}
	fmt.Fprintf(b, "<h1>%s</h1>", html.EscapeString(d.title))
	var facts []string
	if r != nil {
		facts = append(facts, extent(r)...)
		facts = append(facts, fmt.Sprintf("seed %d", r.Seed))
	}
	if o.Source != "" {
		facts = append(facts, o.Source)
	}
	if o.Version != "" {
		facts = append(facts, "Thinward "+o.Version)
	}
	if len(facts) > 0 {
		b.WriteString(`<p class="facts">`)
		for _, f := range facts {
			b.WriteString("<span>" + html.EscapeString(f) + "</span>")
		}
		b.WriteString("</p>")
	}
	numbers := ""
	if r != nil {
		numbers = " and, with all others, in result.json"
	}
	b.WriteString(`<p class="paper">On paper the numbers under each figure, the checks that are fine and the code of the cells are left out; they are in the page` + numbers + `. What is unfolded there before printing is printed.</p>`)
	b.WriteString(`</div><div class="tools"><button type="button" id="theme">Light or dark</button><button type="button" id="print">Print</button><button type="button" id="link">Copy link</button></div></div><div class="wedge"></div></header>`)
}

// extent says how much was measured.
func extent(r *analysis.Result) []string {
	crystals, rows := map[string]bool{}, 0
	for i := range r.Intake {
		crystals[r.Intake[i].Crystal] = true
		rows += r.Intake[i].Observations
	}
	if len(crystals) == 0 {
		return nil
	}
	return []string{plural(len(crystals), "crystal"), plural(len(r.Intake), "position"), plural(rows, "observation")}
}

func plural(n int, word string) string {
	if n == 1 {
		return "1 " + word
	}
	return fmt.Sprintf("%d %ss", n, word)
}

func banner(b *strings.Builder, f *Failure) {
	if f == nil {
		return
	}
	where := ""
	if f.Cell > 0 {
		where = fmt.Sprintf(` in <a href="#cell-%d">code cell %d</a>`, f.Cell, f.Cell)
	}
	if f.Step != "" {
		where += " while it was at: " + html.EscapeString(f.Step)
	}
	fmt.Fprintf(b, `<div class="banner" role="alert"><h2>This report is not complete</h2><p>The run stopped%s.</p><p>%s</p>`, where, html.EscapeString(f.Text))
	if f.Remedy != "" {
		b.WriteString("<p><strong>What to do:</strong> " + html.EscapeString(f.Remedy) + "</p>")
	}
	b.WriteString("<p>What stands below was computed before that; sections without figures were not reached.</p></div>")
}

func (d *document) foot(b *strings.Builder, o *Options) {
	if o.Command == "" && o.Source == "" {
		return
	}
	b.WriteString("<footer>")
	if o.Command != "" {
		b.WriteString("<p>Run again: <code>" + html.EscapeString(o.Command) + "</code></p>")
	}
	b.WriteString("<p>This page holds its numbers (element <code>result</code>) and needs no network.</p></footer>")
}
