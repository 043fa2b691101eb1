package runner

import (
	"fmt"
	"strings"
	"time"
)

// CellError is a cell that ended with an error.
type CellError struct {
	Cell      int    // number of the code cell, from 1
	Code      string // its source
	Name      string // DataError, InsideError, Interrupted or CodeError
	Text      string
	Traceback []string
	Step      string // of a *session.Error, else empty
	Remedy    string // of a *session.Error, else empty
	Inside    bool   // the program is at fault, not the data, the request or the cell
}

func (e *CellError) Error() string { return fmt.Sprintf("cell %d: %s", e.Cell, e.Text) }

// DeathError is a kernel that ended while it was needed.
type DeathError struct {
	Cell   int      // number of the code cell that ran, 0 before the first
	State  string   // how the process ended, such as "exit status 2"
	Stderr []string // the last 40 lines it wrote
}

func (e *DeathError) Error() string {
	where := "before the first cell"
	if e.Cell > 0 {
		where = fmt.Sprintf("in cell %d", e.Cell)
	}
	s := fmt.Sprintf("the kernel died %s (%s)", where, e.State)
	if len(e.Stderr) > 0 {
		s += ":\n" + strings.Join(e.Stderr, "\n")
	}
	return s
}

// TimeoutError is a cell that took longer than allowed.
type TimeoutError struct {
	Cell  int
	Limit time.Duration
}

func (e *TimeoutError) Error() string {
	return fmt.Sprintf("cell %d took longer than %v", e.Cell, e.Limit)
}

// InterruptedError is a run that was stopped from outside; Unwrap gives the
// context's error.
type InterruptedError struct {
	Cell int // number of the code cell that ran, 0 before the first
	Err  error
}

func (e *InterruptedError) Error() string {
	if e.Cell == 0 {
		return "stopped before the first cell"
	}
	return fmt.Sprintf("stopped in cell %d", e.Cell)
}

// Unwrap gives the context's error.
func (e *InterruptedError) Unwrap() error { return e.Err }

// ImportError is a package that a cell imports and the kernel does not hold.
type ImportError struct {
	Cell      int
	Path      string
	Available []string // packages of ours and third parties, sorted; the standard library's are left out
}

func (e *ImportError) Error() string {
	return fmt.Sprintf("cell %d: package %s is not in this kernel; available: %s, and the standard library up to Go 1.13",
		e.Cell, e.Path, strings.Join(e.Available, ", "))
}

// ShellError is a cell with a line that runs a command of the system, which is
// refused unless Options.AllowShell is set.
type ShellError struct {
	Cell int
	Line string
}

func (e *ShellError) Error() string {
	return fmt.Sprintf("cell %d: the line %q runs a command of the system; allow it only if you trust the notebook", e.Cell, e.Line)
}

// ParameterError is a value that was set for a name the notebook does not
// declare, or does not declare with a literal, or a value that does not fit the
// declared one.
type ParameterError struct {
	Name   string
	Value  string
	Reason string   // "unknown", "not settable", or what the value should have been
	Known  []string // names that can be set, sorted
	// Declared is the source of the value in the notebook, of a name that is not
	// settable: a list, a call, or another expression.
	Declared string
}

func (e *ParameterError) Error() string {
	known := "it declares none"
	if len(e.Known) > 0 {
		known = "it declares " + strings.Join(e.Known, ", ")
	}
	if e.Reason == "unknown" {
		return fmt.Sprintf("the notebook has no parameter %q; %s", e.Name, known)
	}
	if e.Reason == "not settable" {
		return fmt.Sprintf("parameter %s is %s in the notebook, which --set cannot change: it sets text, numbers, true and false; change the notebook, or set another; %s", e.Name, e.Declared, known)
	}
	return fmt.Sprintf("parameter %s: %q is not %s", e.Name, e.Value, e.Reason)
}
