package runner

import (
	"context"
	"errors"
)

// Run starts a kernel, runs the code cells of nb in order and stops at the first
// that fails. nb is not changed. Before anything is started it checks the
// parameters, the imports and the shell lines of the notebook, and returns
// *ParameterError, *ImportError or *ShellError with a nil result. After that the
// result is never nil and holds what came out so far, and the error is nil,
// *CellError, *DeathError, *TimeoutError or *InterruptedError (ctx was
// cancelled: the cell is interrupted, and killed after Grace).
func Run(ctx context.Context, nb *Notebook, o *Options) (*Result, error) {
	return nil, errors.New("runner: cannot run in this commit")
}
