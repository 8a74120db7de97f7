//go:build unix

package pgserver

import (
	"bytes"
	"fmt"
	"os"
	"os/exec"
	"runtime"
	"strings"
	"syscall"
)

// process is a running child.
type process struct {
	cmd  *exec.Cmd
	pid  int
	done chan struct{} // closed when the child is gone
	err  error         // how it ended; valid once done is closed
}

// startProcess starts a child under an account, in a process group of its own so that an
// interrupt typed at the terminal reaches the parent alone, and with death as the signal it
// receives when the parent dies, where the system has such a thing.
//
// The system ties that signal to the thread that started the child, not to the process. The
// goroutine that starts it therefore keeps its thread until the child is gone.
func startProcess(cmd *exec.Cmd, who account, death syscall.Signal) (*process, error) {
	cmd.SysProcAttr = &syscall.SysProcAttr{Setpgid: true, Credential: who.credential}
	setDeathSignal(cmd.SysProcAttr, death)
	cmd.Dir = "/"
	cmd.Env = childEnvironment()

	p := &process{cmd: cmd, done: make(chan struct{})}
	started := make(chan error)
	go func() {
		runtime.LockOSThread()
		defer runtime.UnlockOSThread()
		if err := cmd.Start(); err != nil {
			started <- err
			return
		}
		p.pid = cmd.Process.Pid
		started <- nil
		p.err = cmd.Wait()
		close(p.done)
	}()
	if err := <-started; err != nil {
		return nil, err
	}
	return p, nil
}

// signal sends a signal to the child. One that is gone has ended already, which is no error.
func (p *process) signal(s syscall.Signal) { _ = p.cmd.Process.Signal(s) }

// killGroup kills the child and what it started.
func (p *process) killGroup() {
	select {
	case <-p.done:
	default:
		_ = syscall.Kill(-p.pid, syscall.SIGKILL)
	}
}

// childEnvironment returns the variables children get: enough to find and link programs, and
// none that steer Postgres or hold a secret.
func childEnvironment() []string {
	env := []string{"LC_ALL=C", "LANG=C", "TZ=UTC"}
	for _, name := range []string{"PATH", "LD_LIBRARY_PATH", "DYLD_LIBRARY_PATH", "TMPDIR"} {
		if value, ok := os.LookupEnv(name); ok {
			env = append(env, name+"="+value)
		}
	}
	return env
}

// quoted prepares the end of a program's output for an error message.
func quoted(out []byte) string {
	const limit = 800
	out = bytes.TrimSpace(out)
	if len(out) == 0 {
		return ""
	}
	if len(out) > limit {
		out = out[len(out)-limit:]
		if i := bytes.IndexByte(out, '\n'); i >= 0 {
			out = out[i+1:]
		}
	}
	return fmt.Sprintf(" (it said: %s)", strings.Join(strings.Fields(strings.ToValidUTF8(string(out), "?")), " "))
}
