package page

import (
	"errors"

	"thinward/analysis"
	"thinward/notebooks/runner"
)

// Options say what a page shows besides the notebook. Zero fields are left out.
type Options struct {
	Title   string // of the browser window and above the report; empty: the first heading of the notebook
	Series  string // title of the series
	Source  string // path of the manifest or notebook, as shown
	Command string // command that makes the page again
	Version string // of Thinward
	Failure *Failure
	// Trusted says that the notebook is ours: its HTML and SVG outputs stand in the
	// page as they are. Others stand in frames that can run no script.
	Trusted bool
}

// Failure is what stopped the run.
type Failure struct {
	Cell   int    // which code cell, from 1; 0 when none
	Step   string // what it was doing
	Text   string // what went wrong
	Remedy string // what to do about it
}

// Build writes the page. r may be nil when no numbers exist.
func Build(nb *runner.Notebook, r *analysis.Result, o Options) ([]byte, error) {
	return nil, errors.New("page: not written")
}
