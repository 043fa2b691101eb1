package runner

import (
	"io"
	"os"
	"os/exec"
	"strings"
	"sync"
	"time"
)

// process is a kernel that runs, in a process group of its own so that Ctrl-C in
// a terminal does not reach it.
type process struct {
	cmd   *exec.Cmd
	stdin io.Closer // closed, it tells the kernel that we are gone
	done  chan struct{}
	tail  tail
}

func start(path, connection, dir string, env []string) (*process, error) {
	p := &process{done: make(chan struct{})}
	p.cmd = exec.Command(path, "-child", connection)
	p.cmd.Dir = dir
	// It tells the kernel that we take progress, and that our page has its own style.
	p.cmd.Env = append(append(os.Environ(), "THINWARD_RUNNER=1"), env...)
	p.cmd.Stderr = &p.tail
	ownGroup(p.cmd)
	stdin, err := p.cmd.StdinPipe()
	if err != nil {
		return nil, err
	}
	p.stdin = stdin
	// Whatever a cell started may hold the kernel's stderr open after its death.
	p.cmd.WaitDelay = time.Second
	if err := p.cmd.Start(); err != nil {
		return nil, err
	}
	go func() {
		// How it ended is kept in ProcessState.
		_ = p.cmd.Wait()
		close(p.done)
	}()
	return p, nil
}

// end closes the kernel, and kills it if it does not go.
func (p *process) end() {
	_ = p.stdin.Close()
	select {
	case <-p.done:
	case <-time.After(time.Second):
		p.kill()
	}
}

func (p *process) kill() {
	killGroup(p.cmd)
	<-p.done
}

// state says how the process ended; call it after done.
func (p *process) state() string { return p.cmd.ProcessState.String() }

// tail keeps the last lines written to it.
type tail struct {
	mu    sync.Mutex
	open  string // the line that has not ended yet
	lines []string
	first string // the line that says why Go ended the process, if there was one
}

const (
	tailLines = 40
	tailWidth = 2000
)

// Write keeps what is written.
func (t *tail) Write(p []byte) (int, error) {
	t.mu.Lock()
	defer t.mu.Unlock()
	parts := strings.Split(t.open+string(p), "\n")
	for _, l := range parts[:len(parts)-1] {
		t.add(l)
	}
	t.open = parts[len(parts)-1]
	if len(t.open) > tailWidth {
		t.open = t.open[:tailWidth]
	}
	return len(p), nil
}

func (t *tail) add(l string) {
	if len(l) > tailWidth {
		l = l[:tailWidth]
	}
	if strings.HasPrefix(l, "panic: ") || strings.HasPrefix(l, "fatal error: ") {
		t.first = l
	}
	t.lines = append(t.lines, l)
	if len(t.lines) > tailLines {
		t.lines = t.lines[1:]
	}
}

// last gives the lines kept. The line with Go's reason comes first if it is no
// longer among them.
func (t *tail) last() []string {
	t.mu.Lock()
	defer t.mu.Unlock()
	out := append([]string(nil), t.lines...)
	if t.open != "" {
		out = append(out, t.open)
	}
	if t.first != "" && !contains(out, t.first) {
		out = append([]string{t.first, "..."}, out[min(len(out), 2):]...)
	}
	return out
}

func contains(lines []string, want string) bool {
	for _, l := range lines {
		if l == want {
			return true
		}
	}
	return false
}
