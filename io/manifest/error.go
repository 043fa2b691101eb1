package manifest

import "fmt"

// Error is a fault in a manifest or in what it names.
type Error struct {
	File    string
	Line    int    // 0 when no line is concerned
	Key     string // "" when no key is concerned
	Problem string
	Remedy  string
	Err     error // the cause, where there is one
}

// Error gives file, line, key, problem and remedy on one line.
func (e *Error) Error() string {
	s := e.File
	if e.Line > 0 {
		s += fmt.Sprintf(":%d", e.Line)
	}
	s += ": "
	if e.Key != "" {
		s += e.Key + ": "
	}
	s += e.Problem
	if e.Remedy != "" {
		s += "; " + e.Remedy
	}
	return s
}

// Unwrap returns the cause.
func (e *Error) Unwrap() error { return e.Err }
