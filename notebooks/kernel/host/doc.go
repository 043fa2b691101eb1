// Package host holds what the kernel's main package needs and what can be tested
// without an interpreter: how a failure is told to the front end, how printed
// text travels, how cursor positions are counted, which imports are refused.
//
// It is not for programs that start a kernel; those use notebooks/runner.
package host
