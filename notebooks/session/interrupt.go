package session

import (
	"context"
	"errors"
	"sync"
)

// ErrInterrupted is the cause of the cancellation that Interrupt brings about.
var ErrInterrupted = errors.New("interrupted")

// A kernel is one process with one front end, so there is one context, and it is
// the process's. Cells never mention it.
var running = &interruptible{}

type interruptible struct {
	mu     sync.Mutex
	ctx    context.Context
	cancel context.CancelCauseFunc
}

// Context gives the context that long calls of a cell take. It is cancelled by
// Interrupt, with cause ErrInterrupted, and renewed by the next call of Renew.
func Context() context.Context {
	running.mu.Lock()
	defer running.mu.Unlock()
	return running.current()
}

// Interrupt cancels the context handed out by Context. The kernel calls it when
// the front end asks for an interrupt.
func Interrupt() {
	running.mu.Lock()
	defer running.mu.Unlock()
	running.current()
	running.cancel(ErrInterrupted)
}

// Renew replaces a cancelled context by a fresh one, and leaves a live one as it
// is. The kernel calls it before each cell.
func Renew() {
	running.mu.Lock()
	defer running.mu.Unlock()
	if running.ctx != nil && running.ctx.Err() != nil {
		running.ctx = nil
	}
}

func (r *interruptible) current() context.Context {
	if r.ctx == nil {
		r.ctx, r.cancel = context.WithCancelCause(context.Background())
	}
	return r.ctx
}
