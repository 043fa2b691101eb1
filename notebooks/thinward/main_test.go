package main

import (
	"context"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"sync"
	"testing"
	"time"

	"github.com/rogpeppe/go-internal/testscript"

	"thinward/notebooks/kernel"
)

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){"thinward": main})
}

// kernelOnce builds the kernel when the first script asks for it.
var kernelOnce = sync.OnceValues(func() (string, error) { return kernel.Ensure(context.Background(), nil) })

// TestScripts runs testdata/script. Beside the usual commands a script has
//
//	status N thinward ARGS...   run and want this exit status
//	kernel                      make the kernel known to the commands below
//	replace FILE REGEXP TEXT    change the first match in a file
//	interrupt PATTERN           wait for a file, then send Ctrl-C to the command in the background
//	ended N                     after wait: the interrupted command had this exit status
//
// and $REPO, the folder of go.mod. UPDATE_SCRIPTS=1 rewrites expected output.
func TestScripts(t *testing.T) {
	repo, err := filepath.Abs(filepath.Join("..", ".."))
	if err != nil {
		t.Fatal(err)
	}
	testscript.Run(t, testscript.Params{
		Dir:                 filepath.Join("testdata", "script"),
		UpdateScripts:       os.Getenv("UPDATE_SCRIPTS") != "",
		RequireExplicitExec: true,
		Setup: func(e *testscript.Env) error {
			e.Setenv("REPO", repo)
			e.Setenv("LC_ALL", "C")
			return nil
		},
		Cmds: map[string]func(*testscript.TestScript, bool, []string){
			"status":    status,
			"replace":   replaceText,
			"interrupt": interrupt,
			"ended":     ended,
			"kernel": func(ts *testscript.TestScript, _ bool, _ []string) {
				path, err := kernelOnce()
				ts.Check(err)
				ts.Setenv(kernel.PrebuiltEnv, path)
			},
		},
	})
}

func status(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: status N command args...")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	got := 0
	if err := ts.Exec(args[1], args[2:]...); err != nil {
		var exit *exec.ExitError
		if !errors.As(err, &exit) {
			ts.Fatalf("%v", err)
		}
		got = exit.ExitCode()
	}
	if got != want {
		ts.Fatalf("exit status %d, want %d", got, want)
	}
}

func replaceText(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) != 3 {
		ts.Fatalf("usage: replace FILE REGEXP TEXT")
	}
	path := ts.MkAbs(args[0])
	data, err := os.ReadFile(path)
	ts.Check(err)
	at := regexp.MustCompile(args[1]).FindIndex(data)
	if at == nil {
		ts.Fatalf("%s has no %s", args[0], args[1])
	}
	out := append(append(append([]byte(nil), data[:at[0]]...), args[2]...), data[at[1]:]...)
	ts.Check(os.WriteFile(path, out, 0o644))
}

// stopped holds the command that a script interrupted.
var stopped sync.Map

func interrupt(ts *testscript.TestScript, neg bool, args []string) {
	background := ts.BackgroundCmds()
	if neg || len(args) != 1 || len(background) == 0 {
		ts.Fatalf("usage: interrupt PATTERN, with a command in the background")
	}
	cmd := background[len(background)-1]
	for limit := time.Now().Add(time.Minute); ; time.Sleep(20 * time.Millisecond) {
		found, err := filepath.Glob(ts.MkAbs(args[0]))
		ts.Check(err)
		if len(found) > 0 {
			break
		}
		if time.Now().After(limit) {
			ts.Fatalf("no %s", args[0])
		}
	}
	stopped.Store(ts, cmd)
	ts.Check(cmd.Process.Signal(os.Interrupt))
}

func ended(ts *testscript.TestScript, neg bool, args []string) {
	cmd, ok := stopped.Load(ts)
	if neg || len(args) != 1 || !ok {
		ts.Fatalf("usage: ended N, after interrupt and wait")
	}
	if got := cmd.(*exec.Cmd).ProcessState.ExitCode(); strconv.Itoa(got) != args[0] {
		ts.Fatalf("exit status %d, want %s", got, args[0])
	}
}
