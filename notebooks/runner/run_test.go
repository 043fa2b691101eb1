package runner

import (
	"context"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"
)

func TestValuesAndState(t *testing.T) {
	res, err := do(t, Options{}, "1+1", "x := 20", "x+1", "import \"fmt\"\nfmt.Print(\"häß→\\n\")\nx", "var err error\nerr", "")
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff([]string{"2", "", "21", "häß→\n|20", "", ""}, texts(res.Notebook)); diff != "" {
		t.Errorf("outputs (-want +got):\n%s", diff)
	}
	if res.Ran != 6 || res.Cells != 6 {
		t.Errorf("ran %d of %d", res.Ran, res.Cells)
	}
	for i, c := range res.Notebook.Cells[:4] {
		if c.Count != i+1 {
			t.Errorf("cell %d has count %d", i+1, c.Count)
		}
	}
}

func TestInputIsNotChanged(t *testing.T) {
	nb := code("1+1", "2+2")
	nb.Cells[0].Tags = []string{"parameters"}
	nb.Cells[0].Source = "n := 3"
	before, err := nb.Bytes()
	if err != nil {
		t.Fatal(err)
	}
	if _, err := Run(context.Background(), nb, &Options{KernelPath: kernelPath, Set: map[string]string{"n": "4"}}); err != nil {
		t.Fatal(err)
	}
	after, err := nb.Bytes()
	if err != nil || string(after) != string(before) {
		t.Errorf("the notebook became (%v)\n%s", err, after)
	}
}

func TestErrorStopsTheRun(t *testing.T) {
	res, err := do(t, Options{}, "1+1", "y := 2\nundefinedName", "3")
	var failed *CellError
	if !errors.As(err, &failed) {
		t.Fatalf("error %v", err)
	}
	want := &CellError{Cell: 2, Code: "y := 2\nundefinedName", Name: "CodeError", Text: "line 2: undefined identifier: undefinedName",
		Traceback: []string{"CodeError: line 2: undefined identifier: undefinedName"}}
	if diff := cmp.Diff(want, failed); diff != "" {
		t.Errorf("error (-want +got):\n%s", diff)
	}
	if res == nil || res.Ran != 1 {
		t.Fatalf("result %+v", res)
	}
	if got := texts(res.Notebook); got[0] != "2" || !strings.Contains(got[1], "undefinedName") || got[2] != "" {
		t.Errorf("outputs %q", got)
	}
}

func TestFaults(t *testing.T) {
	const imports = "import \"errors\"\nimport \"thinward/notebooks/session\"\nimport \"thinward/analysis/crystal\"\nimport \"gonum.org/v1/gonum/floats\""
	for _, c := range []struct {
		name, cell, fault, text, step, remedy string
		inside                                bool
	}{
		{"check", `session.Check(errors.New("no rows"))`, "DataError", "no rows", "", "", false},
		{"step", `panic(&session.Error{Step: "scaling", Err: errors.New("no rows"), Remedy: "Give some."})`, "DataError", "scaling: no rows. Give some.", "scaling", "Give some.", false},
		{"inside", `panic(&session.Error{Step: "scaling", Err: errors.New("lost"), Inside: true})`, "InsideError", "scaling: lost", "scaling", "", true},
		{"our code", "var g *crystal.Group\ng.Number()", "InsideError", "runtime error: invalid memory address or nil pointer dereference", "", "", true},
		{"others' code", "floats.Add([]float64{1}, []float64{1, 2})", "CodeError", "floats: destination slice length does not match input", "", "", false},
		{"cell's panic", `panic("mine")`, "CodeError", "mine", "", "", false},
		{"division", "zero := 0\n1 / zero", "CodeError", "runtime error: integer divide by zero", "", "", false},
		{"member", "c := session.Context()\nvar e *session.Error\ne.Nope()", "CodeError", "e (*thinward/notebooks/session.Error) has no Nope; it has Err, Error, Inside, Remedy, Step, Unwrap", "", "", false},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			_, err := do(t, Options{}, imports, c.cell)
			var failed *CellError
			if !errors.As(err, &failed) {
				t.Fatalf("error %v", err)
			}
			if failed.Name != c.fault || failed.Text != c.text || failed.Step != c.step || failed.Remedy != c.remedy || failed.Inside != c.inside {
				t.Errorf("got %+v", failed)
			}
			if c.name == "our code" && !slices.ContainsFunc(failed.Traceback, func(l string) bool { return strings.Contains(l, "thinward/analysis/crystal.(*Group).Number") }) {
				t.Errorf("traceback %q", failed.Traceback)
			}
		})
	}
}

func TestRendering(t *testing.T) {
	got := must(t, Options{},
		"type bad struct{}\nfunc (b bad) HTML() string { panic(\"no picture\") }\nbad{}",
		"import \"bytes\"\nvar p *bytes.Buffer\np",
		"type good struct{}\nfunc (g good) SimpleRender() map[string]interface{} { return map[string]interface{}{\"text/html\": \"<b>\", \"text/plain\": \"bold\"} }\ngood{}",
		"type silent struct{}\nfunc (s silent) HTML() string { return \"<i>\" }\nfunc (s silent) String() string { return \"said\" }\nsilent{}",
		"1+1")
	if !strings.Contains(got[0], "cannot show this value: no picture") || got[2] != "bold" || got[4] != "2" {
		t.Errorf("outputs %q", got)
	}
	if got[3] == "" {
		t.Error("a value with HTML only has no plain text")
	}
}

func TestKernelDeaths(t *testing.T) {
	for _, c := range []struct{ name, cell, state, said string }{
		{"goroutine panic", "import \"time\"\ngo func() { panic(\"lost one\") }()\ntime.Sleep(time.Minute)", "exit status 2", "panic: lost one"},
		{"exit", "import \"os\"\nos.Exit(3)", "exit status 3", ""},
		{"stack", "func deep(n int) int { return deep(n+1) + 1 }\ndeep(0)", "exit status 2", "stack"},
	} {
		t.Run(c.name, func(t *testing.T) {
			if c.name == "stack" && testing.Short() {
				t.Skip("a stack overflow takes a gigabyte")
			}
			res, err := do(t, Options{}, "1", c.cell, "2")
			var died *DeathError
			if !errors.As(err, &died) {
				t.Fatalf("error %v", err)
			}
			if died.Cell != 2 || died.State != c.state || !strings.Contains(strings.Join(died.Stderr, "\n"), c.said) || len(died.Stderr) > tailLines+1 {
				t.Errorf("death %+v", died)
			}
			if res.Ran != 1 || texts(res.Notebook)[0] != "1" {
				t.Errorf("result %+v", res)
			}
		})
	}
}

func TestPrintedTextIsCapped(t *testing.T) {
	res, err := do(t, Options{}, "import \"fmt\"", "for i := 0; i < 60000; i++ { fmt.Println(\"forty bytes of text with a sign like →\", i%10) }", "1+1")
	if err != nil {
		t.Fatal(err)
	}
	out := res.Notebook.Cells[1].Outputs
	if len(out) != 2 || len(out[0].Text) > defaultCapStream || len(out[0].Text) < defaultCapStream-4 || !strings.Contains(out[1].Text, "left out") {
		t.Errorf("%d outputs, the first of %d bytes", len(out), len(out[0].Text))
	}
	if len(res.Cut) != 1 || res.Cut[0] != (Cut{2, "stdout", 60000 * len("forty bytes of text with a sign like → 7\n")}) {
		t.Errorf("cuts %+v", res.Cut)
	}
	if got := texts(res.Notebook)[2]; got != "2" {
		t.Errorf("the next cell gives %q", got)
	}
}

func TestShownValueIsCapped(t *testing.T) {
	res, err := do(t, Options{CapValue: 1000}, "import (\"strings\"; \"display\")", "display.HTML(strings.Repeat(\"x\", 2000))", "display.MakeData3(\"text/html\", \"short\", strings.Repeat(\"x\", 2000))")
	if err != nil {
		t.Fatal(err)
	}
	for _, i := range []int{1, 2} {
		if _, ok := res.Notebook.Cells[i].Outputs[0].Data["text/html"]; ok {
			t.Errorf("cell %d keeps its value", i+1)
		}
	}
	if got := texts(res.Notebook); !strings.Contains(got[1], "left out") || got[2] != "short" {
		t.Errorf("outputs %q", got)
	}
	if len(res.Cut) != 3 {
		t.Errorf("cuts %+v", res.Cut)
	}
}

func TestTwoKernelsAtOnce(t *testing.T) {
	var wg sync.WaitGroup
	for i := range 4 {
		wg.Add(1)
		go func() {
			defer wg.Done()
			want := []string{"", strings.Repeat("x", i+1)}
			res, err := do(t, Options{}, "import \"strings\"\nn := "+string(rune('1'+i)), "strings.Repeat(\"x\", n)")
			if err != nil {
				t.Error(err)
				return
			}
			if diff := cmp.Diff(want, texts(res.Notebook)); diff != "" {
				t.Error(diff)
			}
		}()
	}
	wg.Wait()
}

func TestTimeouts(t *testing.T) {
	for _, c := range []struct{ name, cell string }{
		{"interpreted loop", "for {}"},
		{"call with the context", "import \"thinward/notebooks/session\"\n<-session.Context().Done()\nfor {}"},
		{"call that hears nothing", "import \"time\"\ntime.Sleep(time.Hour)"},
	} {
		t.Run(c.name, func(t *testing.T) {
			t.Parallel()
			begin := time.Now()
			res, err := do(t, Options{Timeout: 300 * time.Millisecond, Grace: 400 * time.Millisecond}, "1+1", c.cell, "3")
			var late *TimeoutError
			if !errors.As(err, &late) || late.Cell != 2 || late.Limit != 300*time.Millisecond {
				t.Fatalf("error %v", err)
			}
			if took := time.Since(begin); took > 10*time.Second {
				t.Errorf("took %v", took)
			}
			if res.Ran != 1 {
				t.Errorf("ran %d", res.Ran)
			}
		})
	}
}

func TestCancelled(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	o := &Options{KernelPath: kernelPath, Progress: func(e Event) {
		if e.Kind == CellStarted && e.Cell == 2 {
			cancel()
		}
	}}
	res, err := Run(ctx, code("1+1", "for {}", "3"), o)
	var stopped *InterruptedError
	if !errors.As(err, &stopped) || stopped.Cell != 2 || !errors.Is(err, context.Canceled) {
		t.Fatalf("error %v", err)
	}
	if res.Ran != 1 || texts(res.Notebook)[0] != "2" {
		t.Errorf("result %+v", res)
	}
	_, err = Run(ctx, code("1+1"), o)
	if !errors.As(err, &stopped) || stopped.Cell != 0 {
		t.Errorf("cancelled before the start: %v", err)
	}
}

func TestKill(t *testing.T) {
	kill := make(chan struct{})
	begin := time.Now()
	_, err := do(t, Options{Grace: time.Minute, Kill: kill, Progress: func(e Event) {
		if e.Kind == CellStarted {
			close(kill)
		}
	}}, "import \"time\"\ntime.Sleep(time.Hour)")
	var stopped *InterruptedError
	if !errors.As(err, &stopped) || time.Since(begin) > 20*time.Second {
		t.Errorf("error %v after %v", err, time.Since(begin))
	}
}

func TestGOROOTInTheEnvironment(t *testing.T) {
	root, err := exec.Command("go", "env", "GOROOT").Output()
	if err != nil {
		t.Fatal(err)
	}
	got := must(t, Options{Env: []string{"GOROOT=" + strings.TrimSpace(string(root))}}, "import \"os\"\nos.Getenv(\"GOROOT\") != \"\"")
	if got[0] != "true" {
		t.Errorf("outputs %q", got)
	}
}

func TestWorkDirAndEnv(t *testing.T) {
	dir := t.TempDir()
	if err := os.WriteFile(filepath.Join(dir, "here.txt"), []byte("found"), 0o600); err != nil {
		t.Fatal(err)
	}
	got := must(t, Options{WorkDir: dir, Env: []string{"THINWARD_TEST=set"}}, "import \"os\"\nb, err := os.ReadFile(\"here.txt\")\nstring(b) + os.Getenv(\"THINWARD_TEST\")")
	if got[0] != "foundset" {
		t.Errorf("outputs %q", got)
	}
}

func TestProgress(t *testing.T) {
	var got []Event
	res, err := do(t, Options{Progress: func(e Event) { e.Elapsed = 0; got = append(got, e) }},
		"import \"thinward/notebooks/session\"",
		"session.Report(session.Progress{Step: \"scaling\", Index: 2, Steps: 12, Done: 1, Total: 3, Text: \"L1\"})\nsession.Check(session.Display(map[string]interface{}{\"text/plain\": \"shown\"}))\n7")
	if err != nil {
		t.Fatal(err)
	}
	want := []Event{
		{Kind: KernelStarted, Cells: 2},
		{Kind: CellStarted, Cell: 1, Cells: 2}, {Kind: CellFinished, Cell: 1, Cells: 2},
		{Kind: CellStarted, Cell: 2, Cells: 2},
		{Kind: CellProgress, Cell: 2, Cells: 2, Progress: &Progress{Step: "scaling", Index: 2, Steps: 12, Done: 1, Total: 3, Text: "L1"}},
		{Kind: CellFinished, Cell: 2, Cells: 2},
	}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Errorf("events (-want +got):\n%s", diff)
	}
	if out := texts(res.Notebook)[1]; out != "shown|7" {
		t.Errorf("outputs %q", out)
	}
}

func TestPackagesOfOthers(t *testing.T) {
	got := must(t, Options{}, "import (\n\"gonum.org/v1/gonum/stat\"\n\"gonum.org/v1/plot\"\n\"gonum.org/v1/plot/plotter\"\n\"github.com/go-gota/gota/dataframe\"\n\"github.com/go-gota/gota/series\"\n)",
		"stat.Mean([]float64{1, 2, 6}, nil)",
		"p := plot.New()\nl, err := plotter.NewLine(plotter.XYs{{X: 1, Y: 2}, {X: 2, Y: 3}})\np.Add(l)\nlen(l.XYs)",
		"d := dataframe.New(series.New([]int{1, 2}, series.Int, \"a\"))\nd.Nrow()")
	if diff := cmp.Diff([]string{"", "3", "2", "2"}, got); diff != "" {
		t.Error(diff)
	}
}

func TestKernelThatCannotStart(t *testing.T) {
	_, err := Run(context.Background(), code("1"), &Options{KernelPath: filepath.Join(t.TempDir(), "none")})
	if err == nil || !strings.Contains(err.Error(), "cannot be started") {
		t.Errorf("error %v", err)
	}
	if _, err := Run(context.Background(), code("1"), nil); err == nil {
		t.Error("no error without a kernel")
	}
	if runtime.GOOS == "windows" {
		return
	}
	dir := t.TempDir()
	script := filepath.Join(dir, "kernel")
	if err := os.WriteFile(script, []byte("#!/bin/sh\necho x >> "+dir+"/tries\necho port taken >&2\nexit 1\n"), 0o700); err != nil {
		t.Fatal(err)
	}
	_, err = Run(context.Background(), code("1"), &Options{KernelPath: script})
	var died *DeathError
	if !errors.As(err, &died) || died.Cell != 0 || !slices.Equal(died.Stderr, []string{"port taken"}) {
		t.Errorf("error %v", err)
	}
	if tries, err := os.ReadFile(filepath.Join(dir, "tries")); err != nil || strings.Count(string(tries), "x") != portTries {
		t.Errorf("tries %q, %v", tries, err)
	}
}
