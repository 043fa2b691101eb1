package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"strings"

	"github.com/spf13/cobra"

	"thinward/notebooks/runner"
	"thinward/notebooks/session"
)

// Exit statuses.
const (
	exitDone        = 0
	exitData        = 1
	exitUsage       = 2
	exitInside      = 3
	exitInterrupted = 130
)

// usageError is a request that the command does not understand.
type usageError struct{ error }

// insideError is a fault of the program itself.
type insideError struct{ error }

func (e usageError) Unwrap() error  { return e.error }
func (e insideError) Unwrap() error { return e.error }

// app is what the verbs share.
type app struct {
	out, err io.Writer
	quiet    bool
	kill     <-chan struct{} // closed by the second Ctrl-C
	json     bool
}

// run is the command without a process around it.
func run(args []string, stdout, stderr io.Writer) int {
	ctx, kill, stop := interrupts()
	defer stop()
	a := &app{out: stdout, err: stderr, kill: kill}
	root := a.root()
	root.SetArgs(shieldHall(args))
	root.SetOut(stdout)
	root.SetErr(stderr)
	err := a.execute(ctx, root)
	if err == nil {
		return exitDone
	}
	status := statusOf(err)
	fmt.Fprintf(stderr, "thinward: %v\n", err)
	var cell *runner.CellError
	if errors.As(err, &cell) && cell.Code != "" {
		for i, line := range strings.Split(cell.Code, "\n") {
			fmt.Fprintf(stderr, "%4d | %s\n", i+1, line)
		}
	}
	if status == exitUsage {
		fmt.Fprintf(stderr, "See %s --help.\n", a.verbOf(root, args))
	}
	return status
}

// verbOf names the command that the arguments reach, for the pointer to its help.
func (a *app) verbOf(root *cobra.Command, args []string) string {
	if c, _, err := root.Find(args); err == nil {
		return c.CommandPath()
	}
	return root.CommandPath()
}

// interrupts gives a context that the first Ctrl-C cancels and a channel that
// the second one closes.
func interrupts() (ctx context.Context, kill <-chan struct{}, stop func()) {
	ctx, cancel := context.WithCancel(context.Background())
	signals, second, done := make(chan os.Signal, 2), make(chan struct{}), make(chan struct{})
	signal.Notify(signals, os.Interrupt)
	go func() {
		for n := 0; n < 2; n++ {
			select {
			case <-signals:
			case <-done:
				return
			}
			if n == 0 {
				cancel()
			} else {
				close(second)
			}
		}
	}()
	return ctx, second, func() {
		signal.Stop(signals)
		close(done)
		cancel()
	}
}

// execute turns a panic into an error, so that no user sees a trace.
func (a *app) execute(ctx context.Context, root *cobra.Command) (err error) {
	defer func() {
		if v := recover(); v != nil {
			if e, ok := v.(*session.Error); ok {
				err = e
				return
			}
			err = insideError{fmt.Errorf("a fault inside: %v; please report it with the command you gave", v)}
		}
	}()
	return root.ExecuteContext(ctx)
}

func statusOf(err error) int {
	var usage usageError
	var inside insideError
	var cell *runner.CellError
	var death *runner.DeathError
	var timeout *runner.TimeoutError
	var parameter *runner.ParameterError
	var stopped *runner.InterruptedError
	switch {
	case errors.As(err, &usage), errors.As(err, &parameter):
		return exitUsage
	case errors.As(err, &stopped), errors.Is(err, context.Canceled):
		return exitInterrupted
	case errors.As(err, &cell):
		if cell.Inside {
			return exitInside
		}
		return exitData
	case errors.As(err, &inside), errors.As(err, &death), errors.As(err, &timeout), errors.Is(err, runner.ErrNoAnswer), session.FaultOf(err) == session.FaultInside:
		return exitInside
	}
	return exitData
}

func (a *app) root() *cobra.Command {
	root := &cobra.Command{
		Use:   "thinward",
		Short: "Say whether intensities change with thickness, where, by how much, and what else could have done it",
		Long: `Thinward compares what one crystal gave at several thicknesses (rotation electron
diffraction) and writes a report that a collaborator can run again.

Begin with a manifest: thinward draft FILES writes a first one, thinward intake
SERIES.toml shows what came in, thinward examine SERIES.toml makes the report.`,
		Example: `  thinward examine fixtures/tarn/series.toml
  thinward draft thin.cif thick.cif > series.toml
  thinward group "P 21 21 21" --index "3 0 0"`,
		Version:       session.Version(),
		SilenceErrors: true,
		SilenceUsage:  true,
		Args: func(c *cobra.Command, args []string) error {
			if len(args) > 0 {
				near := ""
				if list := c.SuggestionsFor(args[0]); len(list) > 0 {
					near = "; did you mean " + strings.Join(list, " or ") + "?"
				}
				return usageError{fmt.Errorf("no verb %q%s", args[0], near)}
			}
			return nil
		},
		RunE: func(c *cobra.Command, _ []string) error { return c.Help() },
	}
	root.PersistentFlags().BoolVarP(&a.quiet, "quiet", "q", false, "print results only")
	root.SuggestionsMinimumDistance = 2
	root.SetFlagErrorFunc(func(_ *cobra.Command, err error) error { return usageError{err} })
	root.AddCommand(a.examine(), a.notebook(), a.kernel(), a.invent(), a.doctor(), a.intake(), a.peek(), a.group(), a.draft(), a.tables(), a.plan(), a.again(), a.bundle(), a.compare(), a.gather())
	for _, c := range root.Commands() {
		wrapArgs(c)
	}
	return root
}

// wrapArgs makes a wrong number of arguments a usage error.
func wrapArgs(c *cobra.Command) {
	check := c.Args
	if check == nil {
		return
	}
	c.Args = func(c *cobra.Command, args []string) error {
		if check(c, args) == nil {
			return nil
		}
		quotes := ""
		if len(args) > 1 {
			quotes = "; an argument with blanks in it stands in quotes"
		}
		return usageError{fmt.Errorf("%s: %s given; write thinward %s%s", c.Name(), plural(len(args), "argument"), c.Use, quotes)}
	}
}
