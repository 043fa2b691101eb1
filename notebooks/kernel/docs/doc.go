// Package docs takes the doc comments out of Go sources when a kernel is built
// and finds them again when a cell asks for one. Compiled packages carry no
// comments, and the sources need not be there when a kernel runs.
//
// It is not for a manual: it keeps declarations and comments, not examples.
package docs
