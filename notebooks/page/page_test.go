package page

import (
	"bytes"
	"encoding/json"
	"strings"
	"testing"

	"golang.org/x/net/html"

	"thinward/notebooks/runner"
)

// visit calls f on every element of a page.
func visit(t *testing.T, page []byte, f func(n *html.Node)) {
	t.Helper()
	root, err := html.Parse(bytes.NewReader(page))
	if err != nil {
		t.Fatal(err)
	}
	var walk func(*html.Node)
	walk = func(n *html.Node) {
		if n.Type == html.ElementNode {
			f(n)
		}
		for c := n.FirstChild; c != nil; c = c.NextSibling {
			walk(c)
		}
	}
	walk(root)
}

func attribute(n *html.Node, key string) string {
	for _, a := range n.Attr {
		if a.Key == key {
			return a.Val
		}
	}
	return ""
}

func has(n *html.Node, tag string) bool {
	for c := n.FirstChild; c != nil; c = c.NextSibling {
		if c.Type == html.ElementNode && c.Data == tag && c.FirstChild != nil {
			return true
		}
	}
	return false
}

// check holds what every page must have.
func check(t *testing.T, page []byte) {
	t.Helper()
	ids, level, h1 := map[string]bool{}, 0, 0
	var targets []string
	visit(t, page, func(n *html.Node) {
		if id := attribute(n, "id"); id != "" {
			if ids[id] {
				t.Errorf("id %q twice", id)
			}
			ids[id] = true
		}
		switch n.Data {
		case "h1", "h2", "h3", "h4":
			l := int(n.Data[1] - '0')
			if l > level+1 {
				t.Errorf("heading %s after level %d", n.Data, level)
			}
			if level = l; l == 1 {
				h1++
			}
		case "svg":
			if !has(n, "title") || !has(n, "desc") || attribute(n, "role") != "img" {
				t.Error("an svg without title, desc or role")
			}
			targets = append(targets, attribute(n, "aria-labelledby"), attribute(n, "aria-describedby"))
		case "a":
			if to := attribute(n, "href"); strings.HasPrefix(to, "#") {
				targets = append(targets, to[1:])
			}
		case "link", "object", "embed", "base":
			t.Errorf("a %s element", n.Data)
		}
		for _, key := range []string{"src", "xlink:href", "action", "poster", "srcset"} {
			if v := attribute(n, key); v != "" && !strings.HasPrefix(v, "data:") {
				t.Errorf("%s=%q fetches something", key, v)
			}
		}
		if attribute(n, "style") != "" {
			t.Errorf("a style attribute on %s, which the policy forbids", n.Data)
		}
		for _, a := range n.Attr {
			if strings.HasPrefix(a.Key, "on") {
				t.Errorf("a handler %s", a.Key)
			}
		}
	})
	if h1 != 1 {
		t.Errorf("%d headings of level 1", h1)
	}
	for _, to := range targets {
		if !ids[to] {
			t.Errorf("nothing has the id %q", to)
		}
	}
}

func TestDemoPage(t *testing.T) {
	d := demoPage(t)
	check(t, d.page)
	if n := len(d.page); n > 3_000_000 {
		t.Errorf("the page takes %d bytes", n)
	}
	svgs, answer := 0, false
	var order []string
	visit(t, d.page, func(n *html.Node) {
		switch {
		case n.Data == "svg":
			svgs++
		case n.Data == "section":
			order = append(order, attribute(n, "id"))
		case n.Data == "article":
			answer = true
		}
	})
	if svgs < 12 || !answer {
		t.Errorf("%d figures, answer cards: %v", svgs, answer)
	}
	if len(order) < 10 || order[0] != "answer" || order[1] != "cautions" || order[2] != "strength" {
		t.Errorf("sections %q", order)
	}
	again, err := Build(d.nb, d.r, Options{Title: d.r.Series, Series: d.r.Series, Source: "fixtures/tarn/series.toml", Command: "thinward examine fixtures/tarn/series.toml", Version: "0", Trusted: true})
	if err != nil || !bytes.Equal(again, d.page) {
		t.Errorf("the same notebook gave another page (%v)", err)
	}
}

func TestNumbersAreEmbedded(t *testing.T) {
	d := demoPage(t)
	found := false
	visit(t, d.page, func(n *html.Node) {
		if attribute(n, "id") != "result" {
			return
		}
		found = true
		var r struct {
			Schema    string
			Contrasts []json.RawMessage
		}
		if err := json.Unmarshal([]byte(n.FirstChild.Data), &r); err != nil || r.Schema != d.r.Schema || len(r.Contrasts) != len(d.r.Contrasts) {
			t.Errorf("schema %q, %d contrasts, %v", r.Schema, len(r.Contrasts), err)
		}
	})
	if !found {
		t.Error("no element result")
	}
}

func TestBudgets(t *testing.T) {
	if n := len(style); n > 13_000 {
		t.Errorf("the style sheet takes %d bytes", n)
	}
	if n := len(script); n > 12_000 {
		t.Errorf("the script takes %d bytes", n)
	}
}

func cellOf(kind, source string, outputs ...runner.Output) *runner.Cell {
	return &runner.Cell{Type: kind, Source: source, Outputs: outputs}
}

func shown(mime, text string) runner.Output {
	return runner.Output{Type: "display_data", Data: map[string]json.RawMessage{mime: quoted(text)}}
}

const attack = `<img src=x onerror="alert(1)"><script>alert(2)</script>`

func TestTextsAreEscaped(t *testing.T) {
	nb := &runner.Notebook{Cells: []*runner.Cell{
		cellOf("markdown", "# Title "+attack+"\n\n"+attack+"\n\n[link](javascript:alert(3))"),
		cellOf("markdown", "## A & B "+attack),
		cellOf("code", "x := `"+attack+"`", runner.Output{Type: "stream", Text: attack}, shown("text/plain", attack), runner.Output{Type: "error", Name: attack, Value: attack, Traceback: []string{"\x1b[31m" + attack}}),
	}}
	page, err := Build(nb, nil, Options{Title: attack, Series: attack, Source: attack, Command: attack, Version: attack, Failure: &Failure{Cell: 1, Step: attack, Text: attack, Remedy: attack}})
	if err != nil {
		t.Fatal(err)
	}
	check(t, page)
	scripts := 0
	visit(t, page, func(n *html.Node) {
		switch n.Data {
		case "script":
			scripts++
		case "img":
			t.Error("an image came through")
		case "a":
			if strings.HasPrefix(attribute(n, "href"), "javascript") {
				t.Error("a script address came through")
			}
		}
	})
	if scripts != 1 {
		t.Errorf("%d scripts, ours is one", scripts)
	}
	if bytes.Contains(page, []byte("\x1b")) {
		t.Error("a colour of the terminal came through")
	}
}

func TestForeignHTMLStandsInAFrame(t *testing.T) {
	nb := &runner.Notebook{Cells: []*runner.Cell{cellOf("markdown", "# Title"), cellOf("code", "x", shown("text/html", attack), shown("image/svg+xml", "<svg><script>alert(1)</script></svg>"))}}
	page, err := Build(nb, nil, Options{})
	if err != nil {
		t.Fatal(err)
	}
	check(t, page)
	frames, scripts := 0, 0
	visit(t, page, func(n *html.Node) {
		switch n.Data {
		case "iframe":
			frames++
			sandbox := false
			for _, a := range n.Attr {
				sandbox = sandbox || a.Key == "sandbox" && a.Val == ""
			}
			if !sandbox || attribute(n, "title") == "" {
				t.Error("a frame with rights or without a title")
			}
		case "script":
			scripts++
		}
	})
	if frames != 2 || scripts != 1 {
		t.Errorf("%d frames, %d scripts", frames, scripts)
	}
}

func TestFailureIsSeenFirst(t *testing.T) {
	nb := &runner.Notebook{Cells: []*runner.Cell{
		cellOf("markdown", "# Title"), cellOf("markdown", "## One"), cellOf("code", "s.One()", runner.Output{Type: "error", Name: "error", Value: "no cell"}),
		cellOf("markdown", "## Two"), cellOf("code", "s.Two()"),
	}}
	page, err := Build(nb, nil, Options{Trusted: true, Failure: &Failure{Cell: 1, Step: "scaling", Text: "no cell is known", Remedy: "Give [cell]."}})
	if err != nil {
		t.Fatal(err)
	}
	check(t, page)
	text := string(page)
	alert, first := strings.Index(text, `role="alert"`), strings.Index(text, "<section")
	if alert < 0 || alert > first {
		t.Error("the banner does not stand first")
	}
	for _, want := range []string{`<a href="#cell-1">code cell 1</a>`, "scaling", "no cell is known", "Give [cell]."} {
		if !strings.Contains(text, want) {
			t.Errorf("the banner does not hold %q", want)
		}
	}
	if n := strings.Count(text, "Not reached"); n != 1 {
		t.Errorf("%d sections say that they were not reached, not 1", n)
	}
}

func TestRepeatedIDsAreTold(t *testing.T) {
	piece := `<fieldset><input type="radio" name="pick-1"></fieldset><svg role="img" aria-labelledby="f-t" aria-describedby="f-d"><title id="f-t">T</title><desc id="f-d">D</desc></svg>`
	nb := &runner.Notebook{Cells: []*runner.Cell{
		cellOf("markdown", "# Title"), cellOf("markdown", "## Same"), cellOf("code", "a", shown("text/html", piece)),
		cellOf("markdown", "## Same"), cellOf("code", "a", shown("text/html", piece)), cellOf("markdown", "## Same"), cellOf("code", "a", shown("text/html", piece)),
	}}
	page, err := Build(nb, nil, Options{Trusted: true})
	if err != nil {
		t.Fatal(err)
	}
	check(t, page)
	names := map[string]bool{}
	visit(t, page, func(n *html.Node) {
		if n.Data == "input" {
			names[attribute(n, "name")] = true
		}
	})
	if len(names) != 3 {
		t.Errorf("groups %v: radio buttons of two figures act on one another", names)
	}
}

func TestHeadings(t *testing.T) {
	for _, c := range []struct{ source, title, section, html string }{
		{"# A *b* `c`\n\ntext", "A b c", "", "<p>text</p>\n"},
		{"## Part\n### Below\n##### Far below", "", "Part", "<h3>Below</h3>\n<h3>Far below</h3>\n"},
		{"## One\n\n## Two", "", "One", "<h3>Two</h3>\n"},
		{"<b>raw</b>", "", "", "<p><!-- raw HTML omitted -->raw<!-- raw HTML omitted --></p>\n"},
	} {
		m, err := markdown(c.source)
		if err != nil {
			t.Fatal(err)
		}
		if m.title != c.title || m.section != c.section || m.html != c.html {
			t.Errorf("%q gave %q, %q, %q", c.source, m.title, m.section, m.html)
		}
	}
}

func TestNotebookOfNothing(t *testing.T) {
	if _, err := Build(nil, nil, Options{}); err == nil || err.Error() != "no notebook to make a page of" {
		t.Errorf("error %v", err)
	}
	page, err := Build(&runner.Notebook{}, nil, Options{})
	if err != nil {
		t.Fatal(err)
	}
	check(t, page)
	page, err = Build(&runner.Notebook{Cells: []*runner.Cell{cellOf("code", "1+1", shown("text/plain", "2"))}}, nil, Options{Source: "a.ipynb"})
	if err != nil {
		t.Fatal(err)
	}
	check(t, page)
	if !bytes.Contains(page, []byte(">2</pre>")) {
		t.Error("the output of a notebook without headings is lost")
	}
}

func TestHighlight(t *testing.T) {
	got := highlight("x := f(\"<a>\", 1.5) // c\nreturn")
	want := `x := f(<span class="s">&#34;&lt;a&gt;&#34;</span>, <span class="n">1.5</span>) <span class="c">// c</span>` + "\n" + `<span class="k">return</span>`
	if got != want {
		t.Errorf("%s", got)
	}
	for _, odd := range []string{"", "`open", "%matplotlib é\x00", "'"} {
		text, err := html.Parse(strings.NewReader("<pre>" + highlight(odd) + "</pre>"))
		if err != nil || text == nil {
			t.Errorf("%q: %v", odd, err)
		}
	}
}
