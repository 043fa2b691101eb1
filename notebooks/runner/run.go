package runner

import (
	"context"
	"encoding/json"
	"errors"
	"path/filepath"
	"time"
)

const (
	defaultTimeout = 30 * time.Minute
	defaultGrace   = 5 * time.Second
	drainLimit     = 200 * time.Millisecond
)

// Run starts a kernel, runs the code cells of nb in order and stops at the first
// that fails. nb is not changed. Before anything is started it checks the
// parameters, the imports and the shell lines of the notebook, and returns
// *ParameterError, *ImportError or *ShellError with a nil result. After that the
// result is never nil and holds what came out so far, and the error is nil,
// *CellError, *DeathError, *TimeoutError or *InterruptedError (ctx was
// cancelled: the cell is interrupted, and killed after Grace), or says why the
// kernel could not be started.
func Run(ctx context.Context, nb *Notebook, o *Options) (*Result, error) {
	if o == nil || o.KernelPath == "" {
		return nil, errors.New("runner: no kernel given")
	}
	begin := time.Now()
	res := &Result{Notebook: nb.Clone()}
	var err error
	if res.Used, res.Default, err = setParameters(res.Notebook, o.Set); err != nil {
		return nil, err
	}
	if err := checkImports(res.Notebook); err != nil {
		return nil, err
	}
	if !o.AllowShell {
		if err := checkShell(res.Notebook); err != nil {
			return nil, err
		}
	}
	res.Notebook.Strip()
	res.Cells = len(codeCells(res.Notebook))
	r, err := newRun(o, res, begin)
	if err != nil {
		return nil, err
	}
	err = r.all(ctx)
	res.Elapsed = time.Since(begin)
	return res, err
}

type run struct {
	o        Options
	res      *Result
	begin    time.Time
	client   *client
	progress func(Event)
}

func newRun(o *Options, res *Result, begin time.Time) (*run, error) {
	r := &run{o: *o, res: res, begin: begin, progress: o.Progress}
	if r.progress == nil {
		r.progress = func(Event) {}
	}
	if r.o.Timeout == 0 {
		r.o.Timeout = defaultTimeout
	}
	if r.o.Grace <= 0 {
		r.o.Grace = defaultGrace
	}
	var err error
	r.o.KernelPath, err = filepath.Abs(o.KernelPath)
	return r, err
}

func (r *run) all(ctx context.Context) (err error) {
	r.client, err = connect(ctx, &r.o)
	if err != nil {
		if ctx.Err() != nil {
			return &InterruptedError{Err: ctx.Err()}
		}
		return err
	}
	defer r.client.close()
	r.event(Event{Kind: KernelStarted})
	number := 0
	for _, c := range r.res.Notebook.Cells {
		if c.Type != "code" {
			continue
		}
		if !c.HasTag(setTag) {
			number++
		}
		r.event(Event{Kind: CellStarted, Cell: number})
		err := r.cell(ctx, c, number)
		r.event(Event{Kind: CellFinished, Cell: number, Err: err})
		if err != nil {
			return err
		}
		if !c.HasTag(setTag) {
			r.res.Ran++
		}
	}
	return nil
}

func (r *run) event(e Event) {
	e.Cells, e.Elapsed = r.res.Cells, time.Since(r.begin)
	r.progress(e)
}

// cell runs one cell. It is over when both its reply and the idle status with
// its request as parent have come.
func (r *run) cell(ctx context.Context, c *Cell, number int) error {
	if err := ctx.Err(); err != nil {
		return &InterruptedError{Cell: number, Err: err}
	}
	w := &wait{run: r, number: number, request: newID()}
	w.out = newCollector(c, number, &r.o, func(p Progress) {
		r.event(Event{Kind: CellProgress, Cell: number, Progress: &p})
	})
	defer func() { r.res.Cut = append(r.res.Cut, w.out.finish()...) }()
	err := r.client.send(r.client.shell, w.request, "execute_request", map[string]any{
		"code": c.Source, "silent": false, "store_history": true, "user_expressions": map[string]any{},
		"allow_stdin": false, "stop_on_error": false, // we send one cell at a time and stop ourselves
	})
	if err == nil {
		err = w.until(ctx)
	} else {
		err = w.death(err.Error())
	}
	var failed *CellError
	if errors.As(err, &failed) {
		failed.Code = c.Source
	}
	return err
}

// wait is the state of waiting for one cell.
type wait struct {
	run           *run
	number        int
	request       string
	out           *collector
	replied, idle bool
	stopped       error // why it was interrupted, if it was
}

func (w *wait) until(ctx context.Context) error {
	cl := w.run.client
	var limit, grace <-chan time.Time
	if w.run.o.Timeout > 0 {
		limit = time.After(w.run.o.Timeout)
	}
	cancelled, kill := ctx.Done(), w.run.o.Kill
	stop := func(why error) {
		w.stopped = why
		cancelled, limit = nil, nil
		grace = time.After(w.run.o.Grace)
		cl.interrupt()
	}
	for !w.replied || !w.idle {
		select {
		case m := <-cl.in:
			w.take(m)
		case <-cancelled:
			stop(&InterruptedError{Cell: w.number, Err: ctx.Err()})
		case <-limit:
			stop(&TimeoutError{Cell: w.number, Limit: w.run.o.Timeout})
		case <-grace:
			cl.proc.kill()
			w.drain()
			return w.stopped
		case <-kill:
			cl.proc.kill()
			w.drain()
			if w.stopped != nil {
				return w.stopped
			}
			return &InterruptedError{Cell: w.number, Err: context.Canceled}
		case <-cl.proc.done:
			w.drain()
			if w.stopped != nil {
				return w.stopped
			}
			return w.death(cl.proc.state())
		}
	}
	if w.stopped != nil {
		return w.stopped
	}
	return w.failure()
}

func (w *wait) take(m received) {
	if m.parent != w.request {
		return
	}
	if m.typ == "execute_reply" {
		w.replied = true
		// A kernel whose error message was lost still says so in its reply.
		var f failure
		var status struct{ Status string }
		if json.Unmarshal(m.content, &status) == nil && status.Status != "ok" && json.Unmarshal(m.content, &f) == nil && w.out.failure == nil {
			w.out.failure = &f
		}
		return
	}
	if !m.iopub {
		return
	}
	var status struct {
		State string `json:"execution_state"`
	}
	if m.typ == "status" && json.Unmarshal(m.content, &status) == nil && status.State == "idle" {
		w.idle = true
		return
	}
	w.out.take(m.message)
}

// drain takes what is still on its way from a kernel that has ended.
func (w *wait) drain() {
	limit := time.After(drainLimit)
	for {
		select {
		case m := <-w.run.client.in:
			w.take(m)
		case <-limit:
			return
		}
	}
}

func (w *wait) death(state string) error {
	return &DeathError{Cell: w.number, State: state, Stderr: w.run.client.proc.tail.last()}
}

func (w *wait) failure() error {
	f := w.out.failure
	if f == nil {
		return nil
	}
	return &CellError{Cell: w.number, Name: f.Name, Text: f.Value, Traceback: f.Traceback,
		Step: f.Detail.Step, Remedy: f.Detail.Remedy, Inside: f.Detail.Inside}
}
