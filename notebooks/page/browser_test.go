package page

import (
	"context"
	"os"
	"os/exec"
	"regexp"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/chromedp/cdproto/cdp"
	"github.com/chromedp/cdproto/emulation"
	"github.com/chromedp/cdproto/log"
	"github.com/chromedp/cdproto/network"
	cdppage "github.com/chromedp/cdproto/page"
	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
	"github.com/chromedp/chromedp/kb"
)

// browser starts Chromium, or skips the test where there is none; with CI set it
// fails instead, so that these tests cannot be lost unseen.
func browser(t *testing.T) context.Context {
	t.Helper()
	if testing.Short() {
		t.Skip("browser tests are left out with -short")
	}
	path := ""
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		if p, err := exec.LookPath(name); err == nil {
			path = p
			break
		}
	}
	if path == "" {
		if os.Getenv("CI") != "" {
			t.Fatal("CI is set and no Chromium is found")
		}
		t.Skip("no Chromium found (apt-get install chromium)")
	}
	opts := append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(path), chromedp.NoSandbox, chromedp.DisableGPU,
		chromedp.Flag("disable-quic", true), chromedp.Flag("disable-background-networking", true), chromedp.Flag("disable-component-update", true), chromedp.Flag("disable-sync", true), chromedp.UserDataDir(t.TempDir()))
	ctx, stopAll := chromedp.NewExecAllocator(context.Background(), opts...)
	t.Cleanup(stopAll)
	ctx, stopTab := chromedp.NewContext(ctx)
	t.Cleanup(stopTab)
	do(t, ctx, chromedp.EmulateViewport(1280, 800))
	ctx, stop := context.WithTimeout(ctx, 240*time.Second)
	t.Cleanup(stop)
	return ctx
}

// watch collects what a page must not do: complain, or ask the network.
func watch(t *testing.T, ctx context.Context) func() []string {
	t.Helper()
	var mu sync.Mutex
	var seen []string
	add := func(s string) { mu.Lock(); seen = append(seen, s); mu.Unlock() }
	err := chromedp.Listen(ctx, func(e any) {
		switch e := e.(type) {
		case *runtime.EventConsoleAPICalled:
			add("console: " + string(e.Type))
		case *runtime.EventExceptionThrown:
			add("exception: " + e.ExceptionDetails.Text)
		case *log.EventEntryAdded:
			add("log: " + e.Entry.Text)
		case *network.EventRequestWillBeSent:
			if !strings.HasPrefix(e.Request.URL, "file:") && !strings.HasPrefix(e.Request.URL, "data:") {
				add("request: " + e.Request.URL)
			}
		}
	})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := chromedp.Call(ctx, network.Enable, network.EnableParams{}); err != nil {
		t.Fatal(err)
	}
	if _, err := chromedp.Call(ctx, log.Enable, cdp.Empty{}); err != nil {
		t.Fatal(err)
	}
	return func() []string { mu.Lock(); defer mu.Unlock(); return seen }
}

func do(t *testing.T, ctx context.Context, steps ...chromedp.Action[chromedp.Void]) {
	t.Helper()
	if err := chromedp.Do(ctx, steps...); err != nil {
		t.Fatal(err)
	}
}

// ask evaluates an expression in the page.
func ask[T any](t *testing.T, ctx context.Context, expression string) T {
	t.Helper()
	v, err := chromedp.Run(ctx, chromedp.Evaluate[T](expression))
	if err != nil {
		t.Fatalf("%s: %v", expression, err)
	}
	return v
}

func TestTheWatchSees(t *testing.T) {
	ctx := browser(t)
	seen := watch(t, ctx)
	do(t, ctx, chromedp.Navigate(written(t, []byte(`<!DOCTYPE html><title>t</title><img src="http://127.0.0.1:9/a.png"><script>console.log("x"); undefined.y</script>`))))
	all := strings.Join(seen(), "; ")
	for _, want := range []string{"console: log", "exception: ", "request: http://127.0.0.1:9/a.png"} {
		if !strings.Contains(all, want) {
			t.Errorf("%q was not seen among %q", want, all)
		}
	}
}

func TestReportInABrowser(t *testing.T) {
	ctx := browser(t)
	seen := watch(t, ctx)
	do(t, ctx, chromedp.Navigate(written(t, demoPage(t).page)))

	t.Run("answer without scrolling", func(t *testing.T) {
		if bottom := ask[float64](t, ctx, `document.querySelectorAll("#answer .card")[1].getBoundingClientRect().bottom`); bottom > 800 {
			t.Errorf("the second card ends at %g of 800", bottom)
		}
	})
	t.Run("keys move the crosshair", func(t *testing.T) {
		ask[bool](t, ctx, `document.querySelector("#strength .panel").focus(), true`)
		do(t, ctx, chromedp.KeyEvent(kb.ArrowRight))
		first := ask[string](t, ctx, `document.getElementById("live").textContent`)
		do(t, ctx, chromedp.KeyEvent(kb.ArrowRight), chromedp.KeyEvent(kb.ArrowRight))
		second := ask[string](t, ctx, `document.getElementById("live").textContent`)
		cross := ask[string](t, ctx, `document.querySelector("#strength .panel .cross line").getAttribute("x1")`)
		if !strings.Contains(first, "strength") || !strings.Contains(first, " to ") || first == second || cross == "" {
			t.Errorf("read %q, then %q, line at %q", first, second, cross)
		}
		if n := ask[int](t, ctx, `[...document.querySelectorAll("#strength .readout")].filter(p => p.textContent).length`); n < 2 {
			t.Errorf("%d panels read together", n)
		}
		do(t, ctx, chromedp.KeyEvent(kb.Escape))
		if n := ask[int](t, ctx, `document.querySelectorAll(".cross line").length`); n != 0 {
			t.Errorf("%d lines are left after Escape", n)
		}
	})
	t.Run("radio buttons choose", func(t *testing.T) {
		const visible = `[...document.querySelector("#strength .plot").querySelectorAll(".choice")].filter(c => c.offsetHeight > 0).map(c => c.dataset.choice).join()`
		before := ask[string](t, ctx, visible)
		ask[bool](t, ctx, `document.querySelector('#strength [data-pick="2"]').click(), true`)
		if after := ask[string](t, ctx, visible); before != "1" || after != "2" {
			t.Errorf("shown %q, then %q", before, after)
		}
	})
	t.Run("tables sort", func(t *testing.T) {
		const number = `[...document.querySelector("#forbidden main, #forbidden").querySelectorAll("table.sortable")].pop()`
		ask[bool](t, ctx, number+`.querySelectorAll("th button")[2].click(), true`)
		up := ask[bool](t, ctx, `(t => [...t.tBodies[0].rows].map(r => parseFloat(r.cells[2].textContent)).every((v, i, a) => i === 0 || a[i-1] <= v) && t.querySelectorAll("thead th")[2].getAttribute("aria-sort") === "ascending")(`+number+`)`)
		ask[bool](t, ctx, number+`.querySelectorAll("th button")[2].click(), true`)
		down := ask[bool](t, ctx, `(t => [...t.tBodies[0].rows].map(r => parseFloat(r.cells[2].textContent)).every((v, i, a) => i === 0 || a[i-1] >= v))(`+number+`)`)
		if !up || !down {
			t.Errorf("sorted upward %v, then downward %v", up, down)
		}
	})
	t.Run("a frame lists reflections", func(t *testing.T) {
		n := ask[int](t, ctx, `(() => {
			const s = document.querySelector("svg.brushed"), b = s.getBoundingClientRect();
			const at = (x, y, type) => s.dispatchEvent(new PointerEvent(type, {clientX: b.left + x*b.width, clientY: b.top + y*b.height, pointerId: 1, bubbles: true}));
			s.setPointerCapture = () => {};
			at(.05, .05, "pointerdown"); at(.5, .5, "pointermove"); at(.95, .95, "pointerup");
			return s.closest(".choice").querySelectorAll("[aria-label='Reflections under the frame'] tbody tr").length;
		})()`)
		if n != 40 {
			t.Errorf("%d reflections listed, the most is 40", n)
		}
	})
	t.Run("theme in the hash", func(t *testing.T) {
		const colour = `getComputedStyle(document.body).backgroundColor`
		if _, err := chromedp.Call(ctx, emulation.SetEmulatedMedia, emulation.SetEmulatedMediaParams{Features: []*emulation.MediaFeature{{Name: "prefers-color-scheme", Value: "light"}}}); err != nil {
			t.Fatal(err)
		}
		light := ask[string](t, ctx, colour)
		ask[bool](t, ctx, `document.getElementById("theme").click(), true`)
		dark, where := ask[string](t, ctx, colour), ask[string](t, ctx, `location.hash`)
		if !strings.Contains(where, "theme=dark") || light == dark {
			t.Errorf("hash %q, colours %s and %s", where, light, dark)
		}
		ask[bool](t, ctx, `document.querySelector("nav a[href='#sizes']").click(), true`)
		do(t, ctx, chromedp.Sleep(200*time.Millisecond))
		if where := ask[string](t, ctx, `location.hash`); where != "#sizes&theme=dark" {
			t.Errorf("hash %q after a jump", where)
		}
	})
	t.Run("what is fine, numbers and code stay folded on paper, other parts open", func(t *testing.T) {
		const folded = `[document.querySelectorAll("details:not([open]):not(.numbers):not(.cell):not(.fine)").length, document.querySelectorAll(".numbers[open], .cell[open], .fine[open]").length, document.querySelectorAll(".numbers:not([open])").length].join()`
		if n := ask[int](t, ctx, `document.querySelectorAll(".fine:not([open])").length`); n != 1 {
			t.Errorf("%d folded tables of what is fine", n)
		}
		ask[bool](t, ctx, `document.querySelector("main").appendChild(document.createElement("details")) != null`)
		before := ask[string](t, ctx, folded)
		paper := ask[string](t, ctx, `dispatchEvent(new Event("beforeprint")), `+folded)
		after := ask[string](t, ctx, `dispatchEvent(new Event("afterprint")), `+folded)
		_, figures, _ := strings.Cut(before, ",0,")
		if before == paper || before != after || paper != "0,0,"+figures || len(figures) < 2 {
			t.Errorf("folded parts, unfolded numbers, folded numbers: %s; on paper %s; after %s", before, paper, after)
		}
	})
	t.Run("narrow", func(t *testing.T) {
		do(t, ctx, chromedp.EmulateViewport(360, 740))
		if over := ask[float64](t, ctx, `document.documentElement.scrollWidth - document.documentElement.clientWidth`); over > 0 {
			t.Errorf("the page is %g pixels too wide at 360", over)
		}
		// Sentences are read without moving sideways; wider tables move in a region of
		// their own, which the keys reach.
		if words := ask[string](t, ctx, `[...document.querySelectorAll("td.long")].filter(d => d.offsetParent && d.closest("table").matches(".stack") && (d.getBoundingClientRect().right > 360 || d.getBoundingClientRect().left < 0)).map(d => d.textContent).join("; ")`); words != "" {
			t.Errorf("words off the screen: %s", words)
		}
		if why := ask[float64](t, ctx, `document.querySelector("#cautions td.long").getBoundingClientRect().width`); why < 200 {
			t.Errorf("the why of a caution is %g pixels wide", why)
		}
		if lost := ask[string](t, ctx, `[...document.querySelectorAll("table")].filter(t => !t.parentNode.matches(".scroll[tabindex='0'][role=region][aria-label]")).map(t => t.caption && t.caption.textContent).join("; ")`); lost != "" {
			t.Errorf("tables without a region of their own: %s", lost)
		}
		if wide := ask[int](t, ctx, `[...document.querySelectorAll(".scroll")].filter(s => s.offsetParent && s.scrollWidth > s.clientWidth && getComputedStyle(s).overflowX !== "auto").length`); wide != 0 {
			t.Errorf("%d wide tables do not scroll", wide)
		}
	})
	if complaints := seen(); len(complaints) > 0 {
		t.Errorf("the page did: %q", complaints)
	}
}

var pdfPage = regexp.MustCompile(`/Type\s*/Page\b`)

// TestReportOnPaperInABrowser bounds the length of a printed report: it grew to 45
// pages when the numbers of every figure were printed.
func TestReportOnPaperInABrowser(t *testing.T) {
	ctx := browser(t)
	do(t, ctx, chromedp.Navigate(written(t, demoPage(t).page)))
	media(t, ctx, "print", "dark")
	if shown := ask[string](t, ctx, `[getComputedStyle(document.body).backgroundColor, document.querySelector(".paper").offsetHeight > 0, document.querySelector(".cell").offsetHeight, document.querySelector(".numbers").offsetHeight, [...document.querySelectorAll(".choice")].every(c => c.offsetHeight > 0)].join()`); shown != "rgb(255, 255, 255),true,0,0,true" {
		t.Errorf("paper, its note, code, numbers, all choices: %s", shown)
	}
	media(t, ctx, "", "light")
	r, err := chromedp.Call(ctx, cdppage.PrintToPDF, cdppage.PrintToPDFParams{PrintBackground: new(true)})
	if err != nil {
		t.Fatal(err)
	}
	n := len(pdfPage.FindAll(r.Data, -1))
	t.Logf("%d pages", n)
	if n < 6 || n > 18 {
		t.Errorf("%d pages on paper", n)
	}
}

func TestReportWithoutScript(t *testing.T) {
	ctx := browser(t)
	if _, err := chromedp.Call(ctx, emulation.SetScriptExecutionDisabled, emulation.SetScriptExecutionDisabledParams{Value: true}); err != nil {
		t.Fatal(err)
	}
	do(t, ctx, chromedp.Navigate(written(t, demoPage(t).page)))
	got := ask[struct {
		Tools, Classes string
		Cards, Figure  bool
		Picked         string
	}](t, ctx, `(() => {
		document.querySelector('#strength [data-pick="2"]').checked = true;
		return {Tools: getComputedStyle(document.querySelector(".tools")).display, Cards: document.querySelector(".card").offsetHeight > 0,
			Figure: document.querySelectorAll("#strength .plot .choice")[1].querySelector("svg").getBoundingClientRect().width > 100, Classes: document.documentElement.className,
			Picked: [...document.querySelector("#strength .plot").querySelectorAll(".choice")].filter(c => c.offsetHeight > 0).map(c => c.dataset.choice).join()};
	})()`)
	if got.Classes != "" || got.Tools != "none" || !got.Cards || !got.Figure || got.Picked != "2" {
		t.Errorf("without script: %+v", got)
	}
}
