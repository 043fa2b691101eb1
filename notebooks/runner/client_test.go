package runner

import (
	"context"
	"encoding/json"
	"errors"
	"os"
	"slices"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	"github.com/go-zeromq/zmq4"
)

// openKernel starts a kernel to which a test speaks cell by cell.
func openKernel(t *testing.T) *run {
	t.Helper()
	o := &Options{KernelPath: kernelPath, Timeout: time.Minute}
	r, err := newRun(o, &Result{}, time.Now())
	if err != nil {
		t.Fatal(err)
	}
	if r.client, err = connect(context.Background(), &r.o); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(r.client.close)
	return r
}

func (r *run) try(source string) (string, error) {
	c := &Cell{Type: "code", Source: source}
	err := r.cell(context.Background(), c, 1)
	return texts(&Notebook{Cells: []*Cell{c}})[0], err
}

func TestInterruptsLeaveTheState(t *testing.T) {
	r := openKernel(t)
	if _, err := r.try("import (\"time\"; \"thinward/notebooks/session\")\nx := 41"); err != nil {
		t.Fatal(err)
	}
	signal := func() { _ = r.client.proc.cmd.Process.Signal(os.Interrupt) }
	for _, c := range []struct {
		name, cell string
		how        func()
	}{
		{"signal", "for {}", signal},
		{"control channel", "for {}", r.client.interrupt},
		{"context", "<-session.Context().Done()\nsession.Check(session.Context().Err())", r.client.interrupt},
		{"compiled call", "time.Sleep(600 * time.Millisecond)\nx = 0", r.client.interrupt},
	} {
		t.Run(c.name, func(t *testing.T) {
			time.AfterFunc(200*time.Millisecond, c.how)
			_, err := r.try(c.cell)
			var failed *CellError
			if !errors.As(err, &failed) || failed.Name != "Interrupted" {
				t.Fatalf("error %v", err)
			}
			if got, err := r.try("x + 1"); err != nil || got != "42" {
				t.Errorf("afterwards x+1 is %q, %v", got, err)
			}
			if got, err := r.try("session.Context().Err() == nil"); err != nil || got != "true" {
				t.Errorf("afterwards the context is live: %q, %v", got, err)
			}
		})
	}
	t.Run("between cells", func(t *testing.T) {
		r.client.interrupt()
		signal()
		time.Sleep(100 * time.Millisecond)
		if got, err := r.try("n := 0\nfor i := 0; i < 1000; i++ { n += i }\nn"); err != nil || got != "499500" {
			t.Errorf("%q, %v", got, err)
		}
	})
}

func TestUnknownImportInTheKernel(t *testing.T) {
	r := openKernel(t)
	_, err := r.try("import \"example.org/x/nosuch\"")
	var failed *CellError
	if !errors.As(err, &failed) || !strings.Contains(failed.Text, "package example.org/x/nosuch is not in this kernel; available: github.com/go-gota/gota/dataframe") {
		t.Errorf("error %v", err)
	}
	if tail := r.client.proc.tail.last(); slices.ContainsFunc(tail, func(l string) bool { return strings.Contains(l, "go get") }) {
		t.Errorf("the kernel said %q", tail)
	}
}

// ask sends a request on a channel and waits for its reply.
func (r *run) ask(t *testing.T, s zmq4.Socket, typ string, content any) map[string]any {
	t.Helper()
	id := newID()
	if err := r.client.send(s, id, typ, content); err != nil {
		t.Fatal(err)
	}
	limit := time.After(10 * time.Second)
	for {
		select {
		case m := <-r.client.in:
			if m.parent != id || m.iopub {
				continue
			}
			if want := strings.Replace(typ, "request", "reply", 1); m.typ != want {
				t.Fatalf("%s is answered by %s", typ, m.typ)
			}
			var reply map[string]any
			if err := json.Unmarshal(m.content, &reply); err != nil {
				t.Fatal(err)
			}
			return reply
		case <-limit:
			t.Fatalf("%s is not answered", typ)
		}
	}
}

func TestEveryRequestIsAnswered(t *testing.T) {
	r := openKernel(t)
	for _, typ := range []string{"inspect_request", "history_request", "comm_info_request", "kernel_info_request"} {
		if got := r.ask(t, r.client.shell, typ, map[string]any{"code": "x", "cursor_pos": 1}); got["status"] != "ok" {
			t.Errorf("%s: %v", typ, got)
		}
	}
	for _, typ := range []string{"kernel_info_request", "interrupt_request"} {
		if got := r.ask(t, r.client.control, typ, map[string]any{}); got["status"] != "ok" {
			t.Errorf("%s on control: %v", typ, got)
		}
	}
	if got := r.ask(t, r.client.control, "shutdown_request", map[string]any{"restart": false}); got["status"] != "ok" {
		t.Errorf("shutdown: %v", got)
	}
	select {
	case <-r.client.proc.done:
	case <-time.After(5 * time.Second):
		t.Error("the kernel still runs after a shutdown request")
	}
}

// TestQueuedCellsAreStopped sends three cells at once, as a front end does that
// runs all; after a failure the rest is passed over, if the requests say so.
func TestQueuedCellsAreStopped(t *testing.T) {
	r := openKernel(t)
	for _, stop := range []bool{true, false} {
		var ids []string
		for _, source := range []string{"reached := 1", "unknownName", "reached = 2"} {
			ids = append(ids, newID())
			if err := r.client.send(r.client.shell, ids[len(ids)-1], "execute_request", map[string]any{"code": source, "silent": false, "stop_on_error": stop}); err != nil {
				t.Fatal(err)
			}
		}
		var got []string
		limit := time.After(10 * time.Second)
		for len(got) < len(ids) {
			select {
			case m := <-r.client.in:
				if m.typ != "execute_reply" {
					continue
				}
				var reply struct{ Status string }
				if err := json.Unmarshal(m.content, &reply); err != nil {
					t.Fatal(err)
				}
				got = append(got, reply.Status)
			case <-limit:
				t.Fatalf("only %q", got)
			}
		}
		want := []string{"ok", "error", "ok"}
		if stop {
			want[2] = "aborted"
		}
		if !slices.Equal(got, want) {
			t.Errorf("stop %v: %q, want %q", stop, got, want)
		}
		time.Sleep(200 * time.Millisecond)
		if shown, err := r.try("reached"); err != nil || shown != map[bool]string{true: "1", false: "2"}[stop] {
			t.Errorf("stop %v: reached is %q, %v", stop, shown, err)
		}
	}
}

func TestCompletion(t *testing.T) {
	r := openKernel(t)
	if _, err := r.try("import \"strings\""); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		code       string
		cursor     int
		start, end float64
		match      string
	}{
		{"strings.Repl", 12, 8, 12, "Replace"},
		{"s := \"häß→\"; strings.Repl", 25, 21, 25, "Replace"},
		{"nothingLikeThis", 15, 15, 15, ""},
	} {
		got := r.ask(t, r.client.shell, "complete_request", map[string]any{"code": c.code, "cursor_pos": c.cursor})
		matches, _ := got["matches"].([]any)
		if got["status"] != "ok" || got["cursor_start"] != c.start || got["cursor_end"] != c.end || c.match != "" && !slices.Contains(matches, any(c.match)) || c.match == "" && len(matches) > 0 {
			t.Errorf("%q: %v", c.code, got)
		}
	}
}

// TestFirstCellIsHeard runs one short cell in fresh kernels: the published channel
// joins later than the others, and what the first cell shows must not be lost.
func TestFirstCellIsHeard(t *testing.T) {
	for range 5 {
		if got := must(t, Options{}, "40 + 2"); got[0] != "42" {
			t.Fatalf("the first cell shows %q", got)
		}
	}
}

func TestInspection(t *testing.T) {
	r := openKernel(t)
	if _, err := r.try("import (\n\"strings\"\n\"thinward/analysis/crystal\"\n\"thinward/notebooks/session\"\n\"gonum.org/v1/gonum/stat\"\n\"display\"\n)\n_ = display.HTML\nvar s *session.Session\nc := crystal.Cell{}\nn := 3"); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name, code, at string // the cursor stands behind the first at
		want           []string
	}{
		{"function", "session.OpenWith", "OpenWith", []string{"func OpenWith(path string, o Options) *Session", "OpenWith is Open with options."}},
		{"among the arguments", "t := session.NewTable(\"a\", ", "\"a\", ", []string{"func NewTable(", "*Table"}},
		{"inside a name", "session.OpenWith(x)", "session.Op", []string{"func OpenWith("}},
		{"behind letters of two bytes", "m := \"häß→\"; strings.Repeat", "Repeat", []string{"func Repeat(s string, count int) string", "Repeat returns a new string"}},
		{"method of a variable", "s.Result()", "Result", []string{"func (s *Session) Result() *analysis.Result", "Result runs every step"}},
		{"method of what a call gives", "x := s.Study().Find", "Find", []string{"func (s *Study) Find("}},
		{"field", "c.Alpha", "Alpha", []string{"field Alpha float64"}},
		{"field of an element", "s.Result().Contrasts[0].Pairs", "Pairs", []string{"field Pairs"}},
		{"type", "crystal.Cell", "Cell", []string{"type Cell struct"}},
		{"variable", "s", "s", []string{"s *session.Session", "type Session struct", "Session is one series on its way"}},
		{"variable of no package", "n + 1", "n", []string{"n int"}},
		{"package", "session.", "session", []string{"package session // import \"thinward/notebooks/session\"", "OpenWith"}},
		{"another's function", "stat.Mean", "Mean", []string{"func Mean(x, weights []float64) float64"}},
		{"constant", "session.OutEnv", "OutEnv", []string{"const OutEnv"}},
		{"half a cell", "if x := session.Open(", "Open(", []string{"func Open(path string) *Session"}},
		{"no name", "1 + 2", "1", nil},
		{"unknown name", "nothingLikeThis", "This", nil},
		{"unknown member", "s.Nope", "Nope", nil},
		{"not run yet", "later := 3\nlater", "later", nil},
	} {
		t.Run(c.name, func(t *testing.T) {
			head := c.code[:strings.Index(c.code, c.at)+len(c.at)]
			got := r.ask(t, r.client.shell, "inspect_request", map[string]any{"code": c.code, "cursor_pos": utf8.RuneCountInString(head), "detail_level": 0})
			data, _ := got["data"].(map[string]any)
			text, _ := data["text/plain"].(string)
			if got["status"] != "ok" || got["found"] != (c.want != nil) || (text == "") != (c.want == nil) {
				t.Fatalf("%v", got)
			}
			for _, w := range c.want {
				if !strings.Contains(text, w) {
					t.Errorf("%q is not in\n%s", w, text)
				}
			}
		})
	}
}

func TestKernelEndsWithItsStarter(t *testing.T) {
	r := openKernel(t)
	_ = r.client.proc.stdin.Close()
	select {
	case <-r.client.proc.done:
	case <-time.After(5 * time.Second):
		t.Error("the kernel outlives its starter")
	}
	if _, err := os.Stat(r.client.dir); err != nil {
		t.Fatal(err)
	}
	r.client.close()
	if _, err := os.Stat(r.client.dir); !os.IsNotExist(err) {
		t.Errorf("the connection file is left behind: %v", err)
	}
}

func TestSignatures(t *testing.T) {
	parts, err := frames([]byte("key"), "s", "id", "execute_request", map[string]any{"code": "1"})
	if err != nil {
		t.Fatal(err)
	}
	m, err := parseFrames([]byte("key"), append([][]byte{[]byte("address")}, parts...))
	if err != nil || m.typ != "execute_request" || m.id != "id" || string(m.content) != `{"code":"1"}` {
		t.Errorf("%+v, %v", m, err)
	}
	if _, err := parseFrames([]byte("other"), parts); !errors.Is(err, errSignature) {
		t.Errorf("a wrong key gives %v", err)
	}
	if _, err := parseFrames([]byte("key"), parts[:4]); !errors.Is(err, errFrames) {
		t.Errorf("missing frames give %v", err)
	}
}

func TestTail(t *testing.T) {
	var out tail
	write := func(s string) { _, _ = out.Write([]byte(s)) }
	write("panic: why\n")
	for range 60 {
		write("li")
		write("ne\n")
	}
	write("open")
	got := out.last()
	if len(got) != tailLines+1 || got[0] != "panic: why" || got[1] != "..." || got[2] != "line" || got[len(got)-1] != "open" {
		t.Errorf("%d lines: %q", len(got), got)
	}
}
