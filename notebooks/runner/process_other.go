//go:build !unix

package runner

import (
	"os/exec"
)

// Elsewhere a kernel is not reached by Ctrl-C in a way that matters: interrupts
// travel by the control channel.
func ownGroup(cmd *exec.Cmd) {}

func killGroup(cmd *exec.Cmd) { _ = cmd.Process.Kill() }
