package session

import (
	"context"
	"errors"
	"runtime"
	"strings"
)

// Error is what a step of a notebook fails with. The methods a cell calls return
// one value and panic with *Error; the kernel turns that into an error output,
// and the run stops there.
type Error struct {
	Step   string // what was being done, such as "scaling"; may be empty
	Err    error  // the cause
	Remedy string // what the reader can do about it; may be empty
	// Inside is true when the program is at fault and not the data or the
	// request. Fault reports the same for causes that carry it themselves.
	Inside bool
}

// Error gives step, cause and remedy as one text.
func (e *Error) Error() string {
	var b strings.Builder
	if e.Step != "" {
		b.WriteString(e.Step)
		b.WriteString(": ")
	}
	if e.Err == nil {
		b.WriteString("failed")
	} else {
		b.WriteString(e.Err.Error())
	}
	if e.Remedy != "" {
		b.WriteString(". ")
		b.WriteString(e.Remedy)
	}
	return b.String()
}

// Unwrap gives the cause.
func (e *Error) Unwrap() error { return e.Err }

// Fault says who is at fault when a cell ended with an error.
type Fault int

const (
	FaultData        Fault = iota // the data or the request
	FaultInside                   // the program
	FaultInterrupted              // nobody: the reader stopped it
)

// FaultOf sorts an error. An interrupted or cancelled context is
// FaultInterrupted; a runtime error of Go, an *Error with Inside set, or a cause
// with a method Inside() bool that returns true is FaultInside; all else, nil
// included, is FaultData.
func FaultOf(err error) Fault {
	if errors.Is(err, ErrInterrupted) || errors.Is(err, context.Canceled) {
		return FaultInterrupted
	}
	var e *Error
	if errors.As(err, &e) && e.Inside {
		return FaultInside
	}
	var marked interface {
		error
		Inside() bool
	}
	if errors.As(err, &marked) && marked.Inside() {
		return FaultInside
	}
	var rt runtime.Error
	if errors.As(err, &rt) {
		return FaultInside
	}
	return FaultData
}

// Check stops the cell when err is not nil. A cell that calls a function of its
// own choice which returns an error passes it here.
func Check(err error) {
	if err == nil {
		return
	}
	var e *Error
	if errors.As(err, &e) {
		panic(e)
	}
	panic(&Error{Err: err, Inside: FaultOf(err) == FaultInside})
}
