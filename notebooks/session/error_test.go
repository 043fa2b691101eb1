package session

import (
	"context"
	"errors"
	"fmt"
	"strings"
	"testing"
)

type marked struct{ inside bool }

func (m marked) Error() string { return "marked" }
func (m marked) Inside() bool  { return m.inside }

func TestFaultOf(t *testing.T) {
	var runtimeError error
	func() {
		defer func() { runtimeError, _ = recover().(error) }()
		var m map[string]int
		m["x"] = 1
	}()
	for _, c := range []struct {
		name string
		err  error
		want Fault
	}{
		{"nil", nil, FaultData},
		{"plain", errors.New("x"), FaultData},
		{"step", &Error{Step: "s", Err: errors.New("x")}, FaultData},
		{"inside", fmt.Errorf("w: %w", &Error{Inside: true}), FaultInside},
		{"marked", &Error{Err: marked{true}}, FaultInside},
		{"marked as data", &Error{Err: marked{false}}, FaultData},
		{"runtime", &Error{Err: runtimeError}, FaultInside},
		{"cancelled", &Error{Err: context.Canceled, Inside: true}, FaultInterrupted},
		{"interrupted", ErrInterrupted, FaultInterrupted},
	} {
		if got := FaultOf(c.err); got != c.want {
			t.Errorf("%s: %d, want %d", c.name, got, c.want)
		}
	}
}

func TestErrorText(t *testing.T) {
	for _, c := range []struct {
		err  *Error
		want string
	}{
		{&Error{}, "failed"},
		{&Error{Err: errors.New("no rows")}, "no rows"},
		{&Error{Step: "intake", Err: errors.New("no rows"), Remedy: "Give some."}, "intake: no rows. Give some."},
	} {
		if got := c.err.Error(); got != c.want {
			t.Errorf("%q, want %q", got, c.want)
		}
	}
}

func TestCheck(t *testing.T) {
	Check(nil)
	caught := func(err error) (e *Error) {
		defer func() { e, _ = recover().(*Error) }()
		Check(err)
		return nil
	}
	cause := errors.New("no rows")
	if e := caught(cause); e == nil || !errors.Is(e, cause) || e.Inside {
		t.Errorf("%+v", e)
	}
	step := &Error{Step: "s"}
	if e := caught(fmt.Errorf("w: %w", step)); e != step {
		t.Errorf("%+v", e)
	}
}

// A notebook that was moved away from its series says how to name one.
func TestOpenWithoutASeries(t *testing.T) {
	defer func() {
		e, ok := recover().(*Error)
		if !ok || e.Step != "reading" || !strings.Contains(e.Error(), "none.toml") || !strings.Contains(e.Remedy, "--set series=PATH") {
			t.Errorf("%v", e)
		}
	}()
	Open("none.toml")
	t.Error("a manifest that is not there was opened")
}

// An axis that is not known is refused before the series is read.
func TestOpenWithAnUnknownAxis(t *testing.T) {
	defer func() {
		e, ok := recover().(*Error)
		if !ok || e.Step != "reading" || !strings.Contains(e.Error(), `axis "foo" is not known: use crystals`) || !strings.Contains(e.Remedy, "--set axis=NAME") {
			t.Errorf("%v", e)
		}
	}()
	OpenWith("none.toml", Options{Axis: "foo"})
	t.Error("an axis that is not known was taken")
}
