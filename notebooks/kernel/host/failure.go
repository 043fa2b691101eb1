package host

import (
	"errors"
	"fmt"
	"path"
	"regexp"
	"strings"

	"thinward/notebooks/session"
)

// Names of failures, as the front end shows them.
const (
	DataError   = "DataError"   // the data or the request is at fault
	InsideError = "InsideError" // the program is at fault
	Interrupted = "Interrupted"
	CodeError   = "CodeError" // the cell's own code does not compile, or panics
)

// Failure is how a cell ended, in the terms of Jupyter's error messages. Detail
// travels beside them under the key "thinward", which front ends ignore.
type Failure struct {
	Name      string
	Value     string
	Traceback []string
	Detail    Detail
}

// Detail is what Jupyter's messages have no place for.
type Detail struct {
	Step   string `json:"step"`
	Remedy string `json:"remedy"`
	Inside bool   `json:"inside"`
}

// Error gives the text.
func (f *Failure) Error() string { return f.Value }

// CodeFault is a cell that was refused before it ran.
type CodeFault struct{ Text string }

// Error gives the text.
func (c *CodeFault) Error() string { return c.Text }

// Describe turns what a cell panicked with into a Failure. stack is
// debug.Stack() as taken in the deferred function that recovered; the frames of
// our own packages in it become the traceback. fromCompiler says that the
// interpreter's compiler refused the cell.
func Describe(recovered any, stack []byte, fromCompiler bool) *Failure {
	frames := ourFrames(string(stack))
	f := &Failure{Name: CodeError, Value: place.ReplaceAllString(fmt.Sprint(recovered), "line $1: ")}
	err, isError := recovered.(error)
	var step *session.Error
	switch {
	case isError && errors.As(err, &step):
		f.Name = DataError
		f.Detail.Step, f.Detail.Remedy = step.Step, step.Remedy
		switch session.FaultOf(err) {
		case session.FaultInside:
			f.Name, f.Detail.Inside = InsideError, true
		case session.FaultInterrupted:
			f.Name = Interrupted
		}
	case isError && session.FaultOf(err) == session.FaultInterrupted, strings.Contains(f.Value, "signal: interrupt"):
		f.Name, f.Value = Interrupted, session.ErrInterrupted.Error()
	case fromCompiler || errors.As(asError(recovered), new(*CodeFault)):
	case len(frames) > 0:
		f.Name, f.Detail.Inside = InsideError, true
	}
	f.Traceback = []string{f.Name + ": " + f.Value}
	if f.Name == InsideError {
		f.Traceback = append(f.Traceback, frames...)
	}
	return f
}

// place is how the interpreter names a line and a column of a cell.
var place = regexp.MustCompile(`^repl\.go:(\d+):\d+: `)

func asError(v any) error {
	err, _ := v.(error)
	return err
}

// ourFrames lists the frames of module thinward that stand between the panic and
// the interpreter, innermost first, without arguments or folders.
func ourFrames(stack string) []string {
	lines := strings.Split(stack, "\n")
	start := -1
	for i, l := range lines {
		if strings.HasPrefix(l, "panic(") {
			start = i + 2
		}
	}
	if start < 0 {
		return nil
	}
	var out []string
	for i := start; i+1 < len(lines); i += 2 {
		name, source := lines[i], strings.TrimSpace(lines[i+1])
		if strings.HasPrefix(name, "github.com/cosmos72/gomacro/") || strings.HasPrefix(name, "thinward/notebooks/kernel/") {
			break
		}
		if !strings.HasPrefix(name, "thinward/") {
			continue
		}
		if cut := strings.LastIndexByte(name, '('); cut > 0 {
			name = name[:cut]
		}
		source, _, _ = strings.Cut(source, " ")
		out = append(out, "  "+name+" ("+path.Base(source)+")")
	}
	return out
}
