package main

import (
	"fmt"
	"io"
	"os"
	"strings"
	"time"
)

// meter prints one line a step: on a terminal with a bar that moves, elsewhere
// once when the step is done.
type meter struct {
	w        io.Writer
	quiet    bool
	terminal bool
	ascii    bool
	step     string
	index    string
	begin    time.Time
	shown    int
}

func (a *app) meter() *meter {
	m := &meter{w: a.err, quiet: a.quiet}
	if f, ok := a.err.(*os.File); ok {
		if info, err := f.Stat(); err == nil {
			m.terminal = info.Mode()&os.ModeCharDevice != 0 && os.Getenv("TERM") != "dumb"
		}
	}
	m.ascii = !utf8Terminal()
	return m
}

// utf8Terminal reports whether the locale promises UTF-8, the first of LC_ALL,
// LC_CTYPE and LANG that is set deciding.
func utf8Terminal() bool {
	for _, name := range []string{"LC_ALL", "LC_CTYPE", "LANG"} {
		if v := os.Getenv(name); v != "" {
			return strings.Contains(strings.ToUpper(strings.ReplaceAll(v, "-", "")), "UTF8")
		}
	}
	return false
}

// startStep is shown on a terminal until the notebook names its first step.
const startStep = "starting"

// at says that a step is as far as done of total; index and steps number it, 0
// for none.
func (m *meter) at(step string, index, steps, done, total int) {
	if m.quiet {
		return
	}
	if step != m.step {
		m.finish()
		m.step, m.begin = step, time.Now()
		m.index = ""
		if steps > 0 {
			m.index = fmt.Sprintf("%2d/%d ", index, steps)
		}
	}
	if m.terminal {
		line := fmt.Sprintf("%s%-14s %s %6.1f s", m.index, m.step, m.bar(done, total), time.Since(m.begin).Seconds())
		fmt.Fprintf(m.w, "\r%s\x1b[K", line)
		m.shown = len(line)
	}
}

func (m *meter) bar(done, total int) string {
	const width = 24
	if total <= 0 {
		return strings.Repeat(" ", width)
	}
	full := min(width, width*done/total)
	block, empty := "\u2588", "\u2591"
	if m.ascii {
		block, empty = "#", "."
	}
	return strings.Repeat(block, full) + strings.Repeat(empty, width-full)
}

// note prints a line of its own above the current step.
func (m *meter) note(text string) {
	if m.quiet {
		return
	}
	if m.terminal {
		text = "\r\x1b[K" + text
	}
	fmt.Fprintln(m.w, text)
}

// finish ends the line of the current step.
func (m *meter) finish() {
	if m.quiet || m.step == "" {
		return
	}
	if m.terminal {
		fmt.Fprint(m.w, "\r\x1b[K")
	}
	// The start of the kernel is no step of the analysis.
	if m.step != startStep {
		fmt.Fprintf(m.w, "%s%-14s %6.1f s\n", m.index, m.step, time.Since(m.begin).Seconds())
	}
	m.step = ""
}

// stop drops the current step's line without claiming that it is done.
func (m *meter) stop() string {
	if m.terminal && m.step != "" && !m.quiet {
		fmt.Fprint(m.w, "\r\x1b[K")
	}
	step := m.step
	m.step = ""
	return step
}
