package kernel

import (
	"errors"
	"fmt"
	"strings"
)

// edit is one change of one line in one of gophernotes' sources, made on a copy.
type edit struct {
	name     string
	file     string
	old, new string
}

// leftOut are sources whose place our own main package takes.
var leftOut = map[string]bool{"main.go": true, "complete.go": true}

// edits hook our main package into the copies. Each name on the right is defined
// in notebooks/kernel/main, but for "shell output", which has the pipes
// read to their end before Wait closes them.
var edits = []edit{
	{"interpreter", "kernel.go", `ir := interp.New()`, `ir := newInterp()`},
	{"rendering", "kernel.go", `data := kernel.autoRenderResults(vals, types)`, `data := kernel.safeRender(vals, types)`},
	{"cell", "kernel.go", `vals, types, executionErr := doEval(ir, outerr, code)`, `vals, types, executionErr := runCell(ir, outerr, code, &receipt)`},
	{"queued cells", "kernel.go", `if err := kernel.handleExecuteRequest(receipt); err != nil {`, `if err := kernel.executeUnlessStopped(receipt); err != nil {`},
	{"failure", "kernel.go", `if err, ok = r.(error); !ok {`, `if err, ok = asFailure(r); !ok {`},
	{"failure message", "kernel.go", `if err := receipt.PublishExecutionError(executionErr.Error(), []string{executionErr.Error()}); err != nil {`,
		`if err := publishFailure(&receipt, content, executionErr); err != nil {`},
	{"imports", "kernel.go", `srcAst := ast2.AnyToAst(nodes, "doEval")`, `refuseUnknownImports(nodes); srcAst := ast2.AnyToAst(nodes, "doEval")`},
	{"printed text", "kernel.go", `io.Copy(&jupyterStdOut, rOut)`, `copyText(&jupyterStdOut, rOut)`},
	{"printed errors", "kernel.go", `io.Copy(&jupyterStdErr, rErr)`, `copyText(&jupyterStdErr, rErr)`},
	{"shell output", "kernel.go", `err = cmd.Wait()`, `writersWG.Wait(); err = cmd.Wait()`},
	{"control channel", "kernel.go", `go poll(ctl, sockets.ControlSocket.Socket)`, `go serveControl(sockets)`},
	{"kernel info", "kernel.go", `if err := sendKernelInfo(receipt); err != nil {`, `if err := replyKernelInfo(receipt); err != nil {`},
	{"other requests", "kernel.go", `log.Println("Unhandled shell message: ", receipt.Msg.Header.MsgType)`,
		`if err := answerOther(receipt); err != nil { log.Println("shell channel:", err) }`},
}

// applyEdits gives the edited text of one source. An edit for that file which
// does not match exactly once is a *BuildError that names it: the sources are
// not the ones the edits were written for.
func applyEdits(file, text string, all []edit) (string, error) {
	for _, e := range all {
		if e.file != file {
			continue
		}
		if n := strings.Count(text, e.old); n != 1 {
			return "", &BuildError{
				Step:   fmt.Sprintf("edit %q", e.name),
				Err:    fmt.Errorf("%s holds %d places like %q, not 1", file, n, e.old),
				Remedy: "The version of gophernotes in go.mod is not the one the kernel was written for; use v0.7.5.",
			}
		}
		text = strings.Replace(text, e.old, e.new, 1)
	}
	return text, nil
}

// checkEdits fails when an edit names a file that is not among the sources.
func checkEdits(files []string, all []edit) error {
	have := map[string]bool{}
	for _, f := range files {
		have[f] = true
	}
	for _, e := range all {
		if !have[e.file] {
			return &BuildError{Step: fmt.Sprintf("edit %q", e.name), Err: errors.New("gophernotes has no source " + e.file),
				Remedy: "The version of gophernotes in go.mod is not the one the kernel was written for; use v0.7.5."}
		}
	}
	return nil
}
