// Package session is the notebooks' front door: what a cell calls. Its methods
// return one value and panic with *Error, so that a failing step stops the run.
//
// It is not for programs: those use analysis and io, which return errors and take
// a context.
package session
