package page

import (
	"context"
	"encoding/json"
	"fmt"
	"os"
	"strings"
	"testing"

	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/chromedp"
)

// engineEnv names the environment variable that holds the path of axe.min.js of the
// npm package axe-core. The engine is not ours and is not committed.
const engineEnv = "THINWARD_AXE"

// engine reads the accessibility engine, or skips the test where none is named; where
// everything has to be there it fails.
func engine(t *testing.T) string {
	t.Helper()
	path := os.Getenv(engineEnv)
	if path == "" {
		if os.Getenv("THINWARD_NEED_ALL") != "" {
			t.Fatalf("%s is needed here: the path of axe.min.js of the npm package axe-core", engineEnv)
		}
		t.Skipf("%s does not name an accessibility engine (axe.min.js of the npm package axe-core)", engineEnv)
	}
	source, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(source)
}

// finding is one rule that a page breaks.
type finding struct {
	ID, Impact, Help string
	Nodes            []struct {
		Target         json.RawMessage
		FailureSummary string
	}
}

func (f *finding) String() string {
	s := fmt.Sprintf("%s: %s (%s), %d places", f.Impact, f.Help, f.ID, len(f.Nodes))
	for i, n := range f.Nodes {
		if i == 3 {
			break
		}
		s += fmt.Sprintf("\n  %s %s", n.Target, strings.ReplaceAll(n.FailureSummary, "\n", " "))
	}
	return s
}

// examine runs the named rules of the engine, all when none is named, on the page as
// it stands. The engine comes in by the debugger, which the policy of the page does
// not bind.
func examine(t *testing.T, ctx context.Context, source string, rules ...string) (broken []finding, passed int) {
	t.Helper()
	ask[bool](t, ctx, source+"\n;true")
	type outcome struct {
		Violations []finding
		Passes     []struct{ ID string }
	}
	only := ""
	if len(rules) > 0 {
		only = `, runOnly: ["` + strings.Join(rules, `", "`) + `"]`
	}
	r, err := chromedp.Run(ctx, chromedp.Evaluate[outcome](`axe.run(document, {resultTypes: ["violations"]`+only+`}).then(r => ({Violations: r.violations.map(v => ({ID: v.id, Impact: v.impact, Help: v.help, Nodes: v.nodes.map(n => ({Target: n.target, FailureSummary: n.failureSummary}))})), Passes: r.passes.map(p => ({ID: p.id}))}))`, chromedp.EvalAwaitPromise))
	if err != nil {
		t.Fatal(err)
	}
	return r.Violations, len(r.Passes)
}

func media(t *testing.T, ctx context.Context, kind, scheme string) {
	t.Helper()
	if _, err := chromedp.Call(ctx, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Media: kind, Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: scheme}}}); err != nil {
		t.Fatal(err)
	}
}

func TestTheEngineSeesInABrowser(t *testing.T) {
	source := engine(t)
	ctx := browser(t)
	do(t, ctx, chromedp.Navigate(written(t, []byte(`<!DOCTYPE html><html><title>t</title><main><h1>t</h1><img src="data:,"><p style="color:#999;background:#fff">pale</p><div style="overflow:auto;height:40px"><p>a<p>b<p>c<p>d</div></main>`))))
	broken, _ := examine(t, ctx, source)
	found := ""
	for _, f := range broken {
		found += f.ID + " "
	}
	for _, want := range []string{"image-alt", "color-contrast", "html-has-lang", "scrollable-region-focusable"} {
		if !strings.Contains(found, want) {
			t.Errorf("%s was not found among %s", want, found)
		}
	}
}

// TestReportAccessibilityInABrowser runs the engine on the report in every form that
// a reader meets, in the dark the rules of colour: all else is as in the light. Folded
// parts are opened once, since a rule sees only what is shown.
func TestReportAccessibilityInABrowser(t *testing.T) {
	source := engine(t)
	page := written(t, demoPage(t).page)
	for _, form := range []struct {
		name, media, scheme string
		width               int64
		open                bool
	}{
		{"light wide", "screen", "light", 1280, true}, {"dark wide", "screen", "dark", 1280, false},
		{"light narrow", "screen", "light", 360, false}, {"dark narrow", "screen", "dark", 360, false},
		{"print", "print", "light", 794, false},
	} {
		t.Run(form.name, func(t *testing.T) {
			ctx := browser(t)
			media(t, ctx, form.media, form.scheme)
			do(t, ctx, chromedp.EmulateViewport(form.width, 900), chromedp.Navigate(page))
			if form.open {
				ask[bool](t, ctx, `document.querySelectorAll("details").forEach(d => { d.open = true; }), true`)
			}
			var rules []string
			least := 20
			if form.scheme == "dark" {
				rules, least = []string{"color-contrast", "link-in-text-block"}, 1
			}
			broken, passed := examine(t, ctx, source, rules...)
			if passed < least {
				t.Errorf("only %d rules passed: was the page there?", passed)
			}
			for i := range broken {
				if impact := broken[i].Impact; impact == "serious" || impact == "critical" {
					t.Error(broken[i].String())
				} else {
					t.Log(broken[i].String())
				}
			}
		})
	}
}
