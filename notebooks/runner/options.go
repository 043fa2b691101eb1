package runner

import "time"

// Options say how a notebook is run. KernelPath is needed; zero fields mean the
// documented defaults.
type Options struct {
	KernelPath string            // the kernel binary, from kernel.Ensure
	WorkDir    string            // where cells run; default: the working directory
	Env        []string          // added to the environment of the kernel, as NAME=value
	Set        map[string]string // values for names that the cell tagged parameters declares
	Timeout    time.Duration     // for each cell; 0 means 30 minutes, negative means none
	Progress   func(Event)       // called from one goroutine; may be nil
	CapStream  int               // bytes of printed text kept for a cell; 0 means 1 MB
	CapValue   int               // bytes of one shown value; 0 means 8 MB
	AllowShell bool              // let cells run lines that start with $
	Grace      time.Duration     // from interrupt to kill; 0 means 5 s
	Kill       <-chan struct{}   // closed, it kills the kernel at once; nil means never
}

// EventKind says what an Event tells.
type EventKind int

const (
	KernelStarted EventKind = iota // the kernel answers
	CellStarted                    // Cell of Cells begins
	CellProgress                   // a step within the cell went on: Progress is set
	CellFinished                   // the cell ended, Err is nil if it ended well
)

// Event is one piece of news from a run.
type Event struct {
	Kind     EventKind
	Cell     int       // number of the code cell, from 1
	Cells    int       // number of code cells
	Progress *Progress // with CellProgress
	Elapsed  time.Duration
	Err      error // with CellFinished
}

// Progress is the state of a step, as session.Report sent it.
type Progress struct {
	Step  string `json:"step"`
	Index int    `json:"index"`
	Steps int    `json:"steps"`
	Done  int    `json:"done"`
	Total int    `json:"total"`
	Text  string `json:"text"`
}

// Result is what a run came to.
type Result struct {
	Notebook *Notebook // a copy of the input with outputs; cells not reached have none
	Ran      int       // code cells that ended well
	Cells    int       // code cells in all
	Elapsed  time.Duration
	Used     map[string]string // parameters: name to the literal used
	Default  map[string]string // parameters: name to the literal declared
	Cut      []Cut             // outputs that were longer than allowed
}

// Cut is an output that was shortened.
type Cut struct {
	Cell  int    // number of the code cell
	What  string // stdout, stderr or a MIME type
	Bytes int    // its length before
}
