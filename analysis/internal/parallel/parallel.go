// Package parallel is the one place in analysis and io where goroutines start.
// A panic in a goroutine would end the whole process, and with it a notebook's
// kernel; here it is caught and handed back as an error.
package parallel

import (
	"context"
	"fmt"
	"runtime"
	"runtime/debug"
	"sync"
	"sync/atomic"
)

// PanicError is a panic caught in a worker.
type PanicError struct {
	Value any
	Stack []byte
}

// Error says what was panicked with; the stack is in the Stack field.
func (e *PanicError) Error() string { return fmt.Sprintf("panic in a worker: %v", e.Value) }

// Inside says that the program is at fault, not the data.
func (e *PanicError) Inside() bool { return true }

// For calls f(ctx, i) once for every i in [0, n), on at most workers
// goroutines; workers <= 0 means GOMAXPROCS. The order of calls is not fixed, so
// f writes only what belongs to i. The first error, panic or cancellation of
// ctx stops the handing out of further work and is returned; among several
// errors the one of the lowest i that ran wins. n <= 0 is no work and no error.
func For(ctx context.Context, n, workers int, f func(ctx context.Context, i int) error) error {
	if n <= 0 {
		return ctx.Err()
	}
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	if workers > n {
		workers = n
	}
	inner, cancel := context.WithCancel(ctx)
	defer cancel()
	var (
		next  atomic.Int64
		mu    sync.Mutex
		first error
		at    = n
		wg    sync.WaitGroup
	)
	note := func(i int, err error) {
		mu.Lock()
		if i < at {
			first, at = err, i
		}
		mu.Unlock()
		cancel()
	}
	for range workers {
		wg.Add(1)
		go func() {
			defer wg.Done()
			for inner.Err() == nil {
				i := int(next.Add(1)) - 1
				if i >= n {
					return
				}
				if err := guarded(inner, i, f); err != nil {
					note(i, err)
					return
				}
			}
		}()
	}
	wg.Wait()
	if err := ctx.Err(); err != nil {
		return err
	}
	return first
}

func guarded(ctx context.Context, i int, f func(context.Context, int) error) (err error) {
	defer func() {
		if v := recover(); v != nil {
			err = &PanicError{Value: v, Stack: debug.Stack()}
		}
	}()
	return f(ctx, i)
}
