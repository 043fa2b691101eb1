package host

import (
	"io"
	"time"
	"unicode/utf8"
)

const (
	textPiece = 64 << 10              // bytes gathered before a message is sent
	textPause = 20 * time.Millisecond // longest time a text waits
)

// CopyText sends what src yields as pieces of text, each at most textPiece and a
// read long, never cut inside a character and never held back for longer than
// 20 ms, until src ends. A cell that prints line by line thus sends few messages.
// It gives the first error of send, after which the rest is read and dropped, so
// that the writer never blocks.
func CopyText(send func(string) error, src io.Reader) error {
	pieces := make(chan []byte)
	go func() {
		defer close(pieces)
		for {
			buf := make([]byte, textPiece)
			n, err := src.Read(buf)
			if n > 0 {
				pieces <- buf[:n]
			}
			if err != nil {
				return
			}
		}
	}()
	var pending []byte
	var first error
	flush := func(all bool) {
		n := len(pending)
		if !all {
			n -= openTail(pending)
		}
		if n > 0 && first == nil {
			first = send(string(pending[:n]))
		}
		pending = append(pending[:0], pending[n:]...)
	}
	var due <-chan time.Time
	for {
		select {
		case p, ok := <-pieces:
			if !ok {
				flush(true)
				return first
			}
			if due == nil {
				due = time.After(textPause)
			}
			pending = append(pending, p...)
			if len(pending) >= textPiece {
				flush(false)
				due = nil
			}
		case <-due:
			flush(false)
			due = nil
		}
	}
}

// openTail is the number of bytes at the end of p that begin a character without
// completing it.
func openTail(p []byte) int {
	for n := 1; n <= 3 && n <= len(p); n++ {
		b := p[len(p)-n]
		if !utf8.RuneStart(b) {
			continue
		}
		if utf8.FullRune(p[len(p)-n:]) {
			return 0
		}
		return n
	}
	return 0
}
