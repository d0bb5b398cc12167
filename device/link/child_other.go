//go:build !unix

package link

import "os/exec"

func ownGroup(*exec.Cmd) {}

func kill(cmd *exec.Cmd) error { return cmd.Process.Kill() }
