package tests

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"net"
	"net/http"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"sync"
	"syscall"
	"testing"
	"time"

	"github.com/chromedp/cdproto/runtime"
	"github.com/chromedp/chromedp"
)

// TestJupyterBrowserNotebook opens a notebook in a real Jupyter page, runs its
// cells with the buttons of the page, looks at table and figure, interrupts a cell
// that never ends, and sees that the kernel still knows what it knew.
func TestJupyterBrowserNotebook(t *testing.T) {
	server, err := exec.LookPath("jupyter-notebook")
	if err != nil {
		missing(t, "jupyter-notebook", err)
	}
	chromium, err := browserPath()
	if err != nil {
		missing(t, "chromium", err)
	}
	home, env := jupyterHome(t)
	placed(t, "03-differences.ipynb", home)
	base := serve(t, server, home, env)

	ctx, cancel := chromedp.NewExecAllocator(context.Background(), append(chromedp.DefaultExecAllocatorOptions[:], chromedp.ExecPath(chromium), chromedp.NoSandbox,
		chromedp.DisableGPU, chromedp.Flag("disable-quic", true), chromedp.Flag("disable-background-networking", true), chromedp.Flag("disable-component-update", true), chromedp.UserDataDir(filepath.Join(home, "browser")))...)
	defer cancel()
	ctx, cancel = chromedp.NewContext(ctx)
	defer cancel()
	// The first step must not carry the time limit, which would end the browser.
	if err := chromedp.Do(ctx, chromedp.EmulateViewport(1280, 1000)); err != nil {
		t.Fatal(err)
	}
	faults := listen(t, ctx)
	ctx, cancel = context.WithTimeout(ctx, 90*time.Second)
	defer cancel()

	p := &jupyterPage{t: t, ctx: ctx}
	p.do("open the page", chromedp.Navigate(base+"/notebooks/03-differences.ipynb?token="+pass))
	p.until("the kernel answers", `window.Jupyter && Jupyter.notebook && Jupyter.notebook.kernel && Jupyter.notebook.kernel.is_connected() && Jupyter.notebook.get_cells().length > 10 && Jupyter.notebook.kernel_busy !== true`)
	if got := p.text(`Jupyter.notebook.kernel.name`); got != "thinward" {
		t.Fatalf("the page chose the kernel %q", got)
	}

	// Cells run by the button as by hand, from the top.
	p.do("select the first cell", script(`Jupyter.notebook.select(0)`))
	for range 5 {
		p.do("press Run", chromedp.Click(chromedp.CSS(`button[data-jupyter-action="jupyter-notebook:run-cell-and-select-next"]`)))
	}
	p.until("the table of the series is shown", `[...document.querySelectorAll("div.output_html table caption")].some(c => c.textContent.includes("Crystals and positions"))`)
	p.cell("d07", "s.ByStrength()")
	p.until("the figure is shown", `(() => { const s = document.querySelector("div.output_area figure.plot svg, div.output_svg svg"); return !!s && s.getBoundingClientRect().width > 200 && s.getBoundingClientRect().height > 100 })()`)
	p.shot("figure")
	p.do("choose another contrast", script(`document.querySelector('.pick input[data-pick="2"]').click()`))
	p.until("the other contrast is shown", `document.querySelector('.choice[data-choice="2"]').offsetHeight > 100 && document.querySelector('.choice[data-choice="1"]').offsetHeight === 0`)
	p.wide()

	// A loop without end, interrupted by the button of the page.
	p.cell("", "for {\n}")
	p.until("the cell runs", `Jupyter.notebook.kernel_busy === true || document.querySelector(".code_cell.running") !== null`)
	p.do("press Interrupt", chromedp.Click(chromedp.CSS(`button[data-jupyter-action="jupyter-notebook:interrupt-kernel"]`)))
	p.until("the cell says that it was interrupted", `[...document.querySelectorAll("div.output_error")].some(e => e.textContent.includes("Interrupted"))`)
	p.cell("", "s.Title")
	p.until("the kernel still has the session", `(() => { const c = Jupyter.notebook.get_cells(); return c[c.length-1].output_area.outputs.some(o => o.data && String(o.data["text/plain"]).includes("Tarn")) })()`)

	// A mistake is an error output with words one can act on.
	p.cell("", "s.ByStrenght()")
	p.until("the mistake is named", `[...document.querySelectorAll("div.output_error")].some(e => e.textContent.includes("has no ByStrenght"))`)

	// Completion, asked of the kernel as the page does on Tab.
	p.do("ask for completion", script(`window.completed = ""; Jupyter.notebook.kernel.complete("s.ByStr", 7, r => { window.completed = r.content.matches.join(" ") })`))
	p.until("completion answers", `window.completed.includes("ByStrength")`)
	p.shot("end")
	for _, f := range faults() {
		t.Errorf("the page threw: %s", f)
	}
}

// endKernels asks the server to end its kernels, which it may leave running when it
// is told to stop.
func endKernels(t *testing.T, base string) {
	t.Helper()
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Second)
	defer cancel()
	ask := func(method, path string) ([]byte, error) {
		r, err := http.NewRequestWithContext(ctx, method, base+path, nil)
		if err != nil {
			return nil, err
		}
		r.Header.Set("Authorization", "token "+pass)
		answer, err := http.DefaultClient.Do(r)
		if err != nil {
			return nil, err
		}
		defer answer.Body.Close()
		return io.ReadAll(answer.Body)
	}
	data, err := ask(http.MethodGet, "/api/kernels")
	if err != nil {
		t.Logf("kernels of the server: %v", err)
		return
	}
	var kernels []struct{ ID string }
	if err := json.Unmarshal(data, &kernels); err != nil {
		t.Logf("kernels of the server: %v: %s", err, data)
		return
	}
	for _, k := range kernels {
		if _, err := ask(http.MethodDelete, "/api/kernels/"+k.ID); err != nil {
			t.Logf("kernel %s: %v", k.ID, err)
		}
	}
}

// pass opens the server of this test to its browser only.
const pass = "c0ffee"

type jupyterPage struct {
	t   *testing.T
	ctx context.Context
}

func (p *jupyterPage) do(what string, a ...chromedp.Action[chromedp.Void]) {
	p.t.Helper()
	if err := chromedp.Do(p.ctx, a...); err != nil {
		p.shot("failed")
		p.t.Fatalf("%s: %v", what, err)
	}
}

// until waits for an expression to become true.
func (p *jupyterPage) until(what, expression string) {
	p.t.Helper()
	limit := time.Now().Add(40 * time.Second)
	for {
		ok, err := chromedp.Run(p.ctx, chromedp.Evaluate[bool]("!!("+expression+")"))
		if ok {
			return
		}
		if time.Now().After(limit) || p.ctx.Err() != nil {
			p.shot("failed")
			p.t.Fatalf("waited in vain: %s (%v)", what, err)
		}
		time.Sleep(100 * time.Millisecond)
	}
}

func (p *jupyterPage) text(expression string) string {
	p.t.Helper()
	s, err := chromedp.Run(p.ctx, chromedp.Evaluate[string]("String("+expression+")"))
	if err != nil {
		p.t.Fatalf("%s: %v", expression, err)
	}
	return s
}

// cell selects the cell with an id, or adds one at the end, and runs it by the
// button.
func (p *jupyterPage) cell(id, source string) {
	p.t.Helper()
	find := `Jupyter.notebook.insert_cell_at_bottom("code").set_text(` + quote(source) + `); Jupyter.notebook.select(Jupyter.notebook.get_cells().length-1)`
	if id != "" {
		find = `(() => { const c = Jupyter.notebook.get_cells(); const i = c.findIndex(x => x.get_text() === ` + quote(source) + `); Jupyter.notebook.select(i) })()`
	}
	p.do("select "+source, script(find))
	p.do("run "+source, chromedp.Click(chromedp.CSS(`button[data-jupyter-action="jupyter-notebook:run-cell-and-select-next"]`)))
	if id == "" {
		// Running the last cell adds an empty one below it.
		p.do("remove the empty cell", script(`(() => { const c = Jupyter.notebook.get_cells(); if (c[c.length-1].get_text() === "") Jupyter.notebook.delete_cell(c.length-1) })()`))
	}
}

// wide tells of shown tables that push the page sideways.
func (p *jupyterPage) wide() {
	p.t.Helper()
	if got := p.text(`document.documentElement.scrollWidth <= window.innerWidth + 2`); got != "true" {
		p.t.Error("the page scrolls sideways")
	}
}

// shot keeps a picture of the page where THINWARD_SHOTS says, if it does.
func (p *jupyterPage) shot(name string) {
	dir := os.Getenv("THINWARD_SHOTS")
	if dir == "" {
		return
	}
	if png, err := chromedp.Run(p.ctx, chromedp.CaptureScreenshot()); err == nil {
		_ = os.WriteFile(filepath.Join(dir, "jupyter-"+name+".png"), png, 0o644)
	}
}

// script is a statement whose value nobody wants.
func script(statement string) chromedp.Action[chromedp.Void] {
	return chromedp.Evaluate[chromedp.Void]("(() => { " + statement + " })()")
}

func quote(s string) string { return fmt.Sprintf("%q", s) }

// listen gathers what the page throws.
func listen(t *testing.T, ctx context.Context) func() []string {
	var mu sync.Mutex
	var list []string
	err := chromedp.Listen(ctx, func(ev any) {
		if e, ok := ev.(*runtime.EventExceptionThrown); ok {
			mu.Lock()
			defer mu.Unlock()
			list = append(list, e.ExceptionDetails.Text)
		}
	})
	if err != nil {
		t.Fatal(err)
	}
	return func() []string {
		mu.Lock()
		defer mu.Unlock()
		return list
	}
}

func browserPath() (string, error) {
	var err error
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome"} {
		var path string
		if path, err = exec.LookPath(name); err == nil {
			return path, nil
		}
	}
	return "", err
}

// serve starts a Jupyter server on the loopback for one folder and gives its
// address.
func serve(t *testing.T, program, folder string, env []string) string {
	t.Helper()
	l, err := net.Listen("tcp", "127.0.0.1:0")
	if err != nil {
		t.Fatal(err)
	}
	port := l.Addr().(*net.TCPAddr).Port
	l.Close()
	cmd := exec.Command(program, "--no-browser", "--allow-root", "--ip=127.0.0.1", fmt.Sprintf("--port=%d", port), "--port-retries=0",
		"--NotebookApp.token="+pass, "--notebook-dir="+folder)
	cmd.Dir, cmd.Env = folder, env
	var log bytes.Buffer
	cmd.Stdout, cmd.Stderr = &log, &log
	// A kernel that outlives the server holds its output open; do not wait for it.
	cmd.WaitDelay = 2 * time.Second
	if err := cmd.Start(); err != nil {
		t.Fatal(err)
	}
	over := make(chan struct{})
	go func() {
		_ = cmd.Wait()
		close(over)
	}()
	base := fmt.Sprintf("http://127.0.0.1:%d", port)
	t.Cleanup(func() {
		endKernels(t, base)
		_ = cmd.Process.Signal(syscall.SIGTERM)
		select {
		case <-over:
		case <-time.After(5 * time.Second):
			_ = cmd.Process.Kill()
			<-over
		}
		if t.Failed() {
			t.Logf("Jupyter's log:\n%s", strings.TrimSpace(log.String()))
		}
	})
	for range 200 {
		if r, err := http.Get(base + "/api"); err == nil {
			r.Body.Close()
			return base
		}
		select {
		case <-over:
			t.Fatalf("Jupyter's server ended:\n%s", log.String())
		case <-time.After(100 * time.Millisecond):
		}
	}
	t.Fatal("Jupyter's server does not answer")
	return ""
}
