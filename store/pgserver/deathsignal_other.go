//go:build unix && !linux

package pgserver

import "syscall"

// setDeathSignal does nothing: this system has no such signal. What is left running when the
// parent dies is found and stopped by the next start.
func setDeathSignal(*syscall.SysProcAttr, syscall.Signal) {}
