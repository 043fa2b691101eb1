//go:build !windows

package main

import "syscall"

// alive reports whether a process of that number exists.
func alive(pid int) bool {
	err := syscall.Kill(pid, 0)
	return err == nil || err == syscall.EPERM
}
