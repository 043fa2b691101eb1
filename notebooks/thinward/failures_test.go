package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

// situations are the ways in which a run can fail for reasons outside the
// analysis, each with the test that holds what must happen then: a function, or
// the words of a line in a script. Where nothing can happen any more, why says so.
var situations = []struct {
	what string
	file string // below notebooks
	test string
	why  string
}{
	{"a cell fails, data at fault", "thinward/testdata/script/spoiled.txtar", "stopped in step differences", ""},
	{"a cell fails, program at fault", "thinward/testdata/script/failures.txtar", "run $WORK/inside.ipynb", ""},
	{"the exit status of each kind of failure", "thinward/failures_test.go", "func TestStatusOfFailures", ""},
	{"the kernel dies", "thinward/testdata/script/failures.txtar", "grep 'last words' out/report.log", ""},
	{"the kernel dies: goroutine, exit, stack", "runner/run_test.go", "func TestKernelDeaths", ""},
	{"no reply within the limit", "thinward/testdata/script/failures.txtar", "took longer than 300ms", ""},
	{"no reply, and deaf to the interrupt", "runner/run_test.go", "call that hears nothing", ""},
	{"Ctrl-C", "thinward/testdata/script/failures.txtar", "ended 130", ""},
	{"Ctrl-C twice", "runner/run_test.go", "func TestKill", ""},
	{"the place of the results cannot be written", "thinward/testdata/script/failures.txtar", "is a file, not a folder", ""},
	{"the disk is full after all", "thinward/failures_test.go", "func TestFolderThatFails", ""},
	{"caches that cannot be written, kernel built", "thinward/testdata/script/failures.txtar", "env GOCACHE=$WORK/file", ""},
	{"caches that cannot be written, kernel to build", "kernel/build_test.go", "cache that is a file", ""},
	{"no C compiler", "thinward/failures_test.go", "func TestNothingNeedsC", ""},
	{"vendored modules", "kernel/build_test.go", "func TestVendorIsNamed", ""},
	{"paths with blanks", "thinward/testdata/script/failures.txtar", "cd 'my data'", ""},
	{"LC_ALL=C", "thinward/main_test.go", `e.Setenv("LC_ALL", "C")`, ""},
	{"no network", "tests/main_test.go", `os.Setenv("GOPROXY", "off")`, ""},
	{"an older Go", "kernel/build_test.go", "func TestOlderGoIsNamed", ""},
	{"ports taken", "runner/run_test.go", "strings.Count(string(tries), \"x\") != portTries", ""},
	{"ports taken, as the command says it", "thinward/testdata/script/failures.txtar", "stderr 'port taken'", ""},
	{"the published channel joins late", "runner/client_test.go", "func TestFirstCellIsHeard", ""},
	{"a terminal without UTF-8", "thinward/failures_test.go", "func TestPlainTerminal", ""},
	{"two runs into one folder", "thinward/failures_test.go", "func TestOneRunAFolder", ""},
	{"an overlay under vendored modules", "", "", "the kernel is built from the module cache, and says so: see vendored modules"},
}

func TestEverySituationHasATest(t *testing.T) {
	for _, s := range situations {
		if s.why != "" {
			continue
		}
		text, err := os.ReadFile(filepath.Join("..", filepath.FromSlash(s.file)))
		if err != nil || !strings.Contains(string(text), s.test) {
			t.Errorf("%s: %s does not hold %q (%v)", s.what, s.file, s.test, err)
		}
	}
}

func TestStatusOfFailures(t *testing.T) {
	plain := errors.New("no rows")
	for _, c := range []struct {
		err  error
		want int
	}{
		{plain, exitData},
		{fmt.Errorf("wrapped: %w", usageError{plain}), exitUsage},
		{&runner.ParameterError{Name: "x", Reason: "unknown"}, exitUsage},
		{insideError{plain}, exitInside},
		{&runner.CellError{Cell: 2, Text: "no rows"}, exitData},
		{&runner.CellError{Cell: 2, Text: "lost", Inside: true}, exitInside},
		{&runner.DeathError{Cell: 2}, exitInside},
		{&runner.TimeoutError{Cell: 2, Limit: time.Second}, exitInside},
		{fmt.Errorf("wrapped: %w", runner.ErrNoAnswer), exitInside},
		{&runner.InterruptedError{Cell: 2, Err: context.Canceled}, exitInterrupted},
		{fmt.Errorf("wrapped: %w", context.Canceled), exitInterrupted},
		{&session.Error{Err: plain}, exitData},
		{&session.Error{Err: plain, Inside: true}, exitInside},
	} {
		if got := statusOf(c.err); got != c.want {
			t.Errorf("%T %v: %d, want %d", c.err, c.err, got, c.want)
		}
	}
}

func TestOneRunAFolder(t *testing.T) {
	out := filepath.Join(t.TempDir(), "out")
	first, err := openFolder(out)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := openFolder(out); err == nil || !strings.Contains(err.Error(), fmt.Sprintf("another run (process %d) writes to %s: wait for it or choose another --out", os.Getpid(), out)) {
		t.Errorf("a second run: %v", err)
	}
	if err := first.write("a.txt", []byte("a")); err != nil {
		t.Fatal(err)
	}
	if err := first.commit(false); err != nil {
		t.Fatal(err)
	}
	first.close()
	// A run that was killed leaves its lock; its process is gone.
	gone := exec.Command("go", "version")
	if err := gone.Run(); err != nil {
		t.Fatal(err)
	}
	for _, text := range []string{fmt.Sprint(gone.Process.Pid), "not a number", ""} {
		if err := os.WriteFile(first.lock, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		again, err := openFolder(out)
		if err != nil {
			t.Fatalf("a lock that says %q: %v", text, err)
		}
		again.close()
	}
	entries, err := os.ReadDir(filepath.Dir(out))
	if err != nil || len(entries) != 1 || entries[0].Name() != "out" {
		t.Errorf("left beside the folder: %v, %v", entries, err)
	}
}

// TestFolderThatFails has writing fail in the middle, as on a full disk: the error
// names the file, and the folder that was there before keeps what it had.
func TestFolderThatFails(t *testing.T) {
	out := filepath.Join(t.TempDir(), "out")
	if err := os.Mkdir(out, 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(out, "result.json"), []byte("old"), 0o600); err != nil {
		t.Fatal(err)
	}
	f, err := openFolder(out)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.RemoveAll(f.tmp); err != nil {
		t.Fatal(err)
	}
	if err := f.write("result.json", []byte("new")); err == nil || !strings.Contains(err.Error(), filepath.Join(out, "result.json")+" cannot be written: ") {
		t.Errorf("error %v", err)
	}
	if err := f.commit(false); err == nil {
		t.Error("a lost folder is moved into place")
	}
	f.close()
	if text, err := os.ReadFile(filepath.Join(out, "result.json")); err != nil || string(text) != "old" {
		t.Errorf("the old result is %q, %v", text, err)
	}
}

// TestNothingNeedsC lists all that the command and the kernel link, as a machine
// without a C compiler sees it: no package may have nothing left to compile.
func TestNothingNeedsC(t *testing.T) {
	cmd := exec.Command("go", "list", "-e", "-deps", "-tags", "kernel", "-f", "{{if .Error}}{{.ImportPath}}: {{.Error}}{{end}}", ".", "../kernel/main")
	cmd.Env = append(os.Environ(), "CGO_ENABLED=0")
	out, err := cmd.CombinedOutput()
	if err != nil || strings.TrimSpace(string(out)) != "" {
		t.Errorf("%v\n%s", err, out)
	}
}

func TestPlainTerminal(t *testing.T) {
	for _, c := range []struct {
		all, ctype, lang string
		utf8             bool
	}{
		{"", "", "", false}, {"C", "", "en_US.UTF-8", false}, {"", "en_US.utf8", "C", true}, {"", "", "de_DE.UTF-8", true}, {"", "", "de_DE.ISO-8859-1", false}, {"C.UTF-8", "C", "C", true},
	} {
		t.Setenv("LC_ALL", c.all)
		t.Setenv("LC_CTYPE", c.ctype)
		t.Setenv("LANG", c.lang)
		if got := utf8Terminal(); got != c.utf8 {
			t.Errorf("%+v: %v", c, got)
		}
		a := &app{err: new(strings.Builder)}
		text := a.plainText("m = \u22120.1 \u00b1 0.2 \u00c5\u00b2")
		bar := a.meter().bar(1, 2)
		if c.utf8 != strings.ContainsFunc(text+bar, func(r rune) bool { return r > 127 }) {
			t.Errorf("%+v: %q, %q", c, text, bar)
		}
		if n := len([]rune(bar)); n != 24 {
			t.Errorf("%+v: a bar of %d signs", c, n)
		}
	}
}
