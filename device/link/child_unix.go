//go:build unix

package link

import (
	"os/exec"
	"syscall"
)

// ownGroup keeps the terminal's Ctrl-C from the child, which is ended with its
// line and not before, and lets kill reach what it started itself.
func ownGroup(cmd *exec.Cmd) { cmd.SysProcAttr = &syscall.SysProcAttr{Setpgid: true} }

func kill(cmd *exec.Cmd) error { return syscall.Kill(-cmd.Process.Pid, syscall.SIGKILL) }
