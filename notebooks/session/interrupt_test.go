package session

import (
	"context"
	"errors"
	"testing"
)

func TestInterruptAndRenew(t *testing.T) {
	first := Context()
	Renew()
	if Context() != first {
		t.Error("a live context was renewed")
	}
	Interrupt()
	Interrupt()
	if first.Err() == nil || !errors.Is(context.Cause(first), ErrInterrupted) {
		t.Errorf("after Interrupt: %v, cause %v", first.Err(), context.Cause(first))
	}
	if Context() != first {
		t.Error("renewed without being asked: calls of the same cell would go on")
	}
	Renew()
	if Context() == first || Context().Err() != nil {
		t.Error("not renewed")
	}
}
