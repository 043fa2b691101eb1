package text

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"

	"github.com/klauspost/compress/gzip"
)

const inflateStep = 1 << 17

// Source is a text that may still be growing: Bytes is what is there, More waits
// for the next piece. Gzip data inflate in one goroutine while the caller reads,
// which is the one place in io where a goroutine starts; a panic in it is caught
// and becomes Err. The prefix already seen never changes, though Bytes may move.
type Source struct {
	name   string
	buf    []byte
	pieces chan []byte
	stop   chan struct{}
	fault  error // written by the goroutine before it closes pieces
	err    error
	hint   int
}

// OpenSource reads the file at path, inflating it when its first bytes say gzip.
// The name in errors is path. Close must be called when reading stops early.
func OpenSource(path string) (*Source, error) {
	data, err := os.ReadFile(path)
	if err != nil {
		if info, e := os.Stat(path); e == nil && info.IsDir() {
			return nil, &Error{File: path, Problem: "is a folder, not a file", Remedy: "name the file in it"}
		}
		var pe *os.PathError
		cause := err
		if errors.As(err, &pe) {
			cause = pe.Err
		}
		return nil, &Error{File: path, Problem: "cannot be read: " + cause.Error(), Remedy: "check the path and the access rights"}
	}
	return NewSource(path, data), nil
}

// NewSource is OpenSource for data in memory; data are not changed and must not
// be changed while the source is in use.
func NewSource(name string, data []byte) *Source {
	if len(data) < 2 || data[0] != 0x1f || data[1] != 0x8b {
		return &Source{name: name, buf: data, hint: len(data)}
	}
	s := &Source{name: name, pieces: make(chan []byte, 64), stop: make(chan struct{})}
	s.hint = inflatedSize(data)
	go s.inflate(data, make([]byte, s.hint+512), s.stop)
	return s
}

// InPieces is a source of data that grows by step bytes at a time, for tests of what
// a reader does at the end of a piece.
func InPieces(name string, data []byte, step int) *Source {
	s := &Source{name: name, pieces: make(chan []byte, len(data)/step+1)}
	for n := step; n < len(data)+step; n += step {
		s.pieces <- data[:min(n, len(data)):min(n, len(data))]
	}
	close(s.pieces)
	return s
}

// inflatedSize trusts the length in the last four bytes only as far as deflate
// can expand; a wrong guess costs time, never correctness.
func inflatedSize(data []byte) int {
	tail := data[len(data)-min(4, len(data)):]
	size := 0
	for i := len(tail) - 1; i >= 0; i-- {
		size = size<<8 | int(tail[i])
	}
	if limit := 1032 * len(data); size > limit || size < len(data)/2 {
		size = min(limit, 4*len(data))
	}
	return size
}

// inflate sends what it has at every step; a text may be of several gzip members.
func (s *Source) inflate(data, dst []byte, stop <-chan struct{}) {
	pieces := s.pieces
	defer close(pieces)
	defer func() {
		if r := recover(); r != nil {
			s.fault = fmt.Errorf("panic while inflating: %v", r)
		}
	}()
	n, sent := 0, 0
	send := func() bool {
		if sent == n {
			return true
		}
		sent = n
		select {
		case pieces <- dst[:n]:
			return true
		case <-stop:
			return false
		}
	}
	rest := bytes.NewReader(data)
	z, err := gzip.NewReader(rest)
	for err == nil {
		z.Multistream(false)
		for err == nil {
			if n == len(dst) {
				grown := make([]byte, 2*len(dst)+inflateStep)
				copy(grown, dst)
				dst = grown
			}
			var m int
			m, err = z.Read(dst[n:min(n+inflateStep, len(dst))])
			if n += m; n-sent >= inflateStep && !send() {
				return
			}
		}
		if err != io.EOF {
			break
		}
		if rest.Len() == 0 {
			send()
			return
		}
		if at := len(data) - rest.Len(); rest.Len() < 2 || data[at] != 0x1f || data[at+1] != 0x8b {
			err = errTrailing
			break
		}
		err = z.Reset(rest)
	}
	send()
	s.fault = err
}

var errTrailing = errors.New("something else stands behind their end")

// damage says what is wrong with gzip data, on the line up to which they could be read.
func (s *Source) damage() *Error {
	n := len(s.buf)
	e := &Error{File: s.name, Remedy: "copy the file again"}
	if n > 0 {
		e.Line = Line(s.buf, n)
	}
	switch {
	case errors.Is(s.fault, io.ErrUnexpectedEOF) || errors.Is(s.fault, io.EOF):
		e.Problem = fmt.Sprintf("the gzip data are cut off after %d bytes of text", n)
	case errors.Is(s.fault, gzip.ErrChecksum):
		e.Problem = fmt.Sprintf("the gzip data are damaged: the checksum of %d bytes of text is wrong", n)
	case errors.Is(s.fault, gzip.ErrHeader):
		e.Problem = "the gzip header is damaged"
	case errors.Is(s.fault, errTrailing):
		e.Problem = fmt.Sprintf("the gzip data end after %d bytes of text and something else stands behind them", n)
		e.Remedy = "copy the file again, or unpack it and look at what is there"
	default:
		e.Problem = fmt.Sprintf("the gzip data are damaged after %d bytes of text: %v", n, s.fault)
	}
	return e
}

// Bytes returns the text that is there so far.
func (s *Source) Bytes() []byte { return s.buf }

// SizeHint is the expected length of the whole text, 0 when it is not known.
func (s *Source) SizeHint() int { return max(s.hint, len(s.buf)) }

// More waits until Bytes has grown and reports whether it has; false is the end of
// the text or a failure, told apart by Err.
func (s *Source) More() bool {
	if s.pieces == nil {
		return false
	}
	buf, ok := <-s.pieces
	if !ok {
		s.pieces = nil
		if s.fault != nil {
			s.err = s.damage()
		}
		return false
	}
	s.buf = buf
	return true
}

// Err returns the failure that ended the text early, nil when there is none.
func (s *Source) Err() error { return s.err }

// Close ends the inflating when its result is not wanted any more.
func (s *Source) Close() {
	if s.stop != nil {
		close(s.stop)
		s.stop = nil
	}
}
