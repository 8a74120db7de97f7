package pgserver

import "syscall"

// setDeathSignal has the kernel send a signal to the child when the thread that starts it ends.
func setDeathSignal(attr *syscall.SysProcAttr, s syscall.Signal) { attr.Pdeathsig = s }
