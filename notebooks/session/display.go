package session

import (
	"os"
	"sync"
)

// ProgressMIME is the MIME type of the display messages that carry progress from
// the kernel to the runner, which drops them from the saved notebook.
const ProgressMIME = "application/vnd.thinward.progress+json"

// RunnerEnv names the environment variable that our runner sets. It takes
// progress messages, which to another front end would be outputs with nothing to
// show; and its page styles what views show, where another front end needs the
// style with them.
const RunnerEnv = "THINWARD_RUNNER"

// Progress is the state of one step.
type Progress struct {
	Step  string // name of the step
	Index int    // which step, from 1; 0 when not numbered
	Steps int    // of how many; 0 when not known
	Done  int    // work done within the step
	Total int    // of how much; 0 when not known
	Text  string // what is being worked on, such as a crystal's name
}

type displayer struct {
	mu   sync.Mutex
	send func(data map[string]interface{}) error
}

// Like the context, the display belongs to the process: it is the one front end.
var front = &displayer{}

// ConnectDisplay gives the function through which Display and Report reach the
// front end; nil disconnects. The kernel connects it for the length of a cell.
// Messages sent from several goroutines are handed to send one at a time.
func ConnectDisplay(send func(data map[string]interface{}) error) {
	front.mu.Lock()
	defer front.mu.Unlock()
	front.send = send
}

// Display shows data, keyed by MIME type, in the running cell. Without a front
// end it does nothing and returns nil.
func Display(data map[string]interface{}) error {
	front.mu.Lock()
	defer front.mu.Unlock()
	if front.send == nil {
		return nil
	}
	return front.send(data)
}

// Report tells the runner how far a step has come; under another front end it
// does nothing. A message that cannot be sent is lost: progress never stops the
// work.
func Report(p Progress) {
	if os.Getenv(RunnerEnv) == "" {
		return
	}
	_ = Display(map[string]interface{}{ProgressMIME: map[string]interface{}{
		"step": p.Step, "index": p.Index, "steps": p.Steps,
		"done": p.Done, "total": p.Total, "text": p.Text,
	}})
}
