//go:build unix

package pgserver

import (
	"bufio"
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"
)

// stopLeftovers ends Postgres processes that an earlier process of ours left at work in the
// cluster. The lock of the data directory is held, so nobody else answers for them. It then
// removes what names a process that may since have become an unrelated one: Postgres would
// take that process for a running server and refuse to start.
func stopLeftovers(ctx context.Context, cfg Config, dataDir, cluster string) error {
	main := statusOf(cluster).pid
	stages := []struct {
		signal syscall.Signal // SIGINT: fast shutdown; SIGQUIT: at once, recovery at next start
		limit  time.Duration
	}{{syscall.SIGINT, stopLimit}, {syscall.SIGQUIT, quitLimit}, {syscall.SIGKILL, quitLimit}}
	for i, stage := range stages {
		pids := postgresAt(cluster)
		if len(pids) == 0 {
			break
		}
		switch {
		case slices.Contains(pids, main) && stage.signal != syscall.SIGKILL:
			cfg.Log.Info("stop a Postgres that an earlier start left running", "pid", main, "signal", stage.signal.String())
			pids = []int{main} // it stops the others
		case i == 0:
			continue // without their main process the others take no fast shutdown
		}
		for _, pid := range pids {
			_ = syscall.Kill(pid, stage.signal) // gone meanwhile: well and good
		}
		if err := waitUntil(ctx, stage.limit, func() bool { return len(postgresAt(cluster)) == 0 }); err != nil {
			return fmt.Errorf("wait for an earlier Postgres to stop: %w", err)
		}
	}
	if pids := postgresAt(cluster); len(pids) > 0 {
		return fmt.Errorf("an earlier Postgres (process %d) still works in %s and could not be stopped: stop it by hand", pids[0], cluster)
	}
	// The pid file of a dead process is left for Postgres, which draws its own conclusions.
	if named := statusOf(cluster).pid; named != 0 && isAlive(named) {
		cfg.Log.Info("remove a pid file that names an unrelated process", "pid", named)
		if err := os.Remove(filepath.Join(cluster, "postmaster.pid")); err != nil && !errors.Is(err, os.ErrNotExist) {
			return fmt.Errorf("remove a pid file that names an unrelated process: %w", err)
		}
	}
	// The folder of the socket serves this instance alone.
	found, _ := filepath.Glob(filepath.Join(escapeGlob(dataDir), "run", ".s.PGSQL.*"))
	for _, path := range found {
		if err := os.Remove(path); err != nil && !errors.Is(err, os.ErrNotExist) {
			return fmt.Errorf("remove the socket of an earlier Postgres: %w", err)
		}
	}
	return nil
}

// waitUntil waits until a condition holds or the limit has passed; only the end of the
// context is an error.
func waitUntil(ctx context.Context, limit time.Duration, holds func() bool) error {
	tick := time.NewTicker(10 * time.Millisecond)
	defer tick.Stop()
	end := time.NewTimer(limit)
	defer end.Stop()
	for !holds() {
		select {
		case <-tick.C:
		case <-end.C:
			return nil
		case <-ctx.Done():
			return context.Cause(ctx)
		}
	}
	return nil
}

func isAlive(pid int) bool {
	err := syscall.Kill(pid, 0)
	return err == nil || errors.Is(err, syscall.EPERM)
}

// status is what the pid file of a cluster tells.
type status struct {
	pid   int
	ready bool
}

// statusOf reads the pid file of a cluster: the process id on its first line, the state on
// its eighth. Both are zero while there is no such file or it is being written.
func statusOf(cluster string) status {
	f, err := os.Open(filepath.Join(cluster, "postmaster.pid"))
	if err != nil {
		return status{}
	}
	defer f.Close()
	var s status
	lines := bufio.NewScanner(f)
	for n := 1; n <= 8 && lines.Scan(); n++ {
		switch text := strings.TrimSpace(lines.Text()); n {
		case 1:
			s.pid, _ = strconv.Atoi(text)
		case 8:
			s.ready = text == "ready"
		}
	}
	return s
}
