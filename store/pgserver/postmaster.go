//go:build unix

package pgserver

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"time"
)

// longestLog is the size in bytes from which a start puts the log file aside.
const longestLog = 8 << 20

// settings returns what Postgres is started with. Only the main process's own messages are
// logged: errors of statements go to the client that sent them, because they can quote the
// data of candidates.
func settings(cfg Config, at address) []string {
	s := append(at.settings(),
		"cluster_name=difaudit",
		"shared_buffers=128MB",
		"max_connections=100",
		"huge_pages=off",
		"jit=off", // costs more than it gains on statements of a few milliseconds
		"timezone=UTC",
		"log_timezone=UTC",
		"log_destination=stderr",
		"logging_collector=off",
		"log_line_prefix=%m [%p] ",
		"log_min_messages=log",
		"log_min_error_statement=panic",
		"log_error_verbosity=terse",
		"log_statement=none",
	)
	if cfg.NoSync {
		s = append(s, "fsync=off", "full_page_writes=off")
	}
	return s
}

// launch starts Postgres on a cluster and returns when it takes connections.
func launch(ctx context.Context, cfg Config, p Programs, who account, dataDir, cluster string, at address) (*process, error) {
	log, err := openLog(dataDir)
	if err != nil {
		return nil, err
	}
	defer log.Close() // the child has its own
	begin, err := log.Seek(0, io.SeekEnd)
	if err != nil {
		return nil, fmt.Errorf("find the end of the log: %w", err)
	}
	args := []string{"-D", cluster}
	for _, setting := range settings(cfg, at) {
		args = append(args, "-c", setting)
	}
	cmd := exec.Command(p.Postgres, args...)
	cmd.Stdout, cmd.Stderr = log, log
	child, err := startProcess(cmd, who, syscall.SIGINT)
	if err != nil {
		return nil, fmt.Errorf("start %s: %w", p.Postgres, err)
	}

	began := time.Now()
	tick := time.NewTicker(10 * time.Millisecond)
	defer tick.Stop()
	for patience := 5 * time.Second; ; {
		select {
		case <-child.done:
			said, _ := io.ReadAll(io.NewSectionReader(log, begin, 1<<20)) // the error stands without it
			return nil, &launchError{said: string(said), err: fmt.Errorf("start Postgres: %w%s; more in %s", exitOf(child), quoted(said), log.Name())}
		case <-ctx.Done():
			end(child, syscall.SIGQUIT)
			return nil, fmt.Errorf("start Postgres: %w", context.Cause(ctx))
		case <-tick.C:
		}
		if s := statusOf(cluster); s.pid == child.pid && s.ready {
			return child, nil
		}
		if time.Since(began) > patience {
			cfg.Log.Info("Postgres is still starting; after a crash it first recovers", "waited", time.Since(began).Round(time.Second))
			patience *= 2
		}
	}
}

// launchError is a start that ended before Postgres took connections.
type launchError struct {
	said string
	err  error
}

func (e *launchError) Error() string { return e.err.Error() }
func (e *launchError) Unwrap() error { return e.err }

// passes reports whether the cause goes away by itself or with another port: processes of a
// killed server that still end, or a port taken since it was found free.
func (e *launchError) passes() bool {
	return strings.Contains(e.said, "pre-existing shared memory block") || strings.Contains(e.said, "could not bind")
}

// end stops a child with a signal, and by force where that has no effect.
func end(child *process, s syscall.Signal) {
	child.signal(s)
	select {
	case <-child.done:
	case <-time.After(quitLimit):
		child.signal(syscall.SIGKILL)
		<-child.done
	}
}

// exitOf words how a child ended.
func exitOf(child *process) error {
	if child.err == nil {
		return errors.New("it ended with exit status 0")
	}
	return child.err
}

// openLog opens the log file of a data directory for appending, putting a long one aside.
func openLog(dataDir string) (*os.File, error) {
	path := filepath.Join(dataDir, "postgres.log")
	if info, err := os.Lstat(path); err == nil && info.Size() > longestLog {
		if err := os.Rename(path, path+".1"); err != nil {
			return nil, fmt.Errorf("put the long log aside: %w", err)
		}
	}
	f, err := openOwn(path, os.O_RDWR|os.O_CREATE|os.O_APPEND)
	if err != nil {
		return nil, fmt.Errorf("open the log of Postgres: %w", err)
	}
	return f, nil
}
