// Package kernel builds the Go kernel that runs our notebooks and registers it
// with Jupyter. The kernel is gophernotes with our packages compiled in: its
// sources come from the module cache through an overlay of the build, with a few
// named edits made on copies in the user's cache folder.
//
// It is not for talking to a kernel; that is notebooks/runner. The kernel's own
// main package is notebooks/kernel/main, under the build tag kernel, and what of
// it needs no interpreter is notebooks/kernel/host.
package kernel
