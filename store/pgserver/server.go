//go:build unix

package pgserver

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"os"
	"path/filepath"
	"sync/atomic"
	"syscall"
	"time"
)

const (
	// stopLimit is how long a fast shutdown, which writes everything out, may take.
	stopLimit = 30 * time.Second
	// quitLimit is how long an immediate one may take.
	quitLimit = 5 * time.Second
	// passingLimit is how long a start is repeated while its obstacle goes away by itself.
	passingLimit = 20 * time.Second
)

// Server is a running private Postgres. Its methods may be called from several goroutines.
type Server struct {
	log      *slog.Logger
	programs Programs
	at       address
	password string
	child    *process
	lock     *os.File
	stopping atomic.Bool
	done     chan struct{}
	err      error // valid once done is closed
}

// Start starts the instance of a data directory, making it when it is new, and returns when
// the database takes connections. ctx limits the start only; the server runs until Stop.
//
// Processes of an earlier server that still work on the data are stopped first. The errors
// ErrInUse, ErrNotInstalled, ErrOtherVersion and ErrUnreachable say what an operator can
// change; Start never installs anything, see Obtain.
func Start(ctx context.Context, cfg Config) (*Server, error) {
	began := time.Now()
	cfg, err := cfg.complete()
	if err != nil {
		return nil, err
	}
	dataDir, err := prepareDataDir(cfg.DataDir)
	if err != nil {
		return nil, err
	}
	lock, err := lockDirectory(dataDir)
	if err != nil {
		return nil, err
	}
	s := &Server{log: cfg.Log, lock: lock, done: make(chan struct{})}
	isNew, err := s.start(ctx, cfg, dataDir)
	if err != nil {
		return nil, errors.Join(err, unlock(lock))
	}
	cfg.Log.Info("private Postgres runs", "data", dataDir, "new", isNew, "version", s.programs.Major,
		"pid", s.child.pid, "url", s.Redacted(), "took", time.Since(began).Round(time.Millisecond))
	return s, nil
}

// start does the work of Start under the lock and reports whether the cluster is new.
func (s *Server) start(ctx context.Context, cfg Config, dataDir string) (isNew bool, err error) {
	cluster := filepath.Join(dataDir, "cluster")
	major, err := clusterMajor(cluster)
	if err != nil {
		return false, err
	}
	isNew = major == 0
	if s.programs, err = Find(cfg.BinDir, dataDir); err != nil {
		return false, err
	}
	existing := cluster
	if isNew {
		existing = ""
	}
	who, err := chooseAccount(cfg.User, dataDir, existing)
	if err != nil {
		return false, err
	}
	if err := checkReach(who, s.programs, dataDir); err != nil {
		return false, err
	}
	removeUnfinished(cfg, dataDir)
	if isNew {
		cfg.Log.Info("make a new database", "data", dataDir, "user", who.name, "programs", filepath.Dir(s.programs.InitDB))
		s.password, err = initialize(ctx, cfg, s.programs, who, dataDir, cluster)
	} else {
		s.password, err = readPassword(dataDir)
	}
	if err != nil {
		return false, err
	}
	if err := stopLeftovers(ctx, cfg, dataDir, cluster); err != nil {
		return false, err
	}
	if err := s.launch(ctx, cfg, who, dataDir, cluster); err != nil {
		return false, err
	}
	if err := ensureDatabase(ctx, s.at, s.password); err != nil {
		end(s.child, syscall.SIGINT)
		return false, err
	}
	go s.watch()
	return isNew, nil
}

// launch starts Postgres, again where what stood in the way passes.
func (s *Server) launch(ctx context.Context, cfg Config, who account, dataDir, cluster string) error {
	for began := time.Now(); ; {
		var err error
		if s.at, err = chooseAddress(who, dataDir); err != nil {
			return err
		}
		s.child, err = launch(ctx, cfg, s.programs, who, dataDir, cluster, s.at)
		if err == nil {
			return nil
		}
		var failed *launchError
		if !errors.As(err, &failed) || !failed.passes() || time.Since(began) > passingLimit {
			return err
		}
		cfg.Log.Info("start Postgres again: what stood in the way should pass", "cause", err)
		select {
		case <-time.After(250 * time.Millisecond):
		case <-ctx.Done():
			return fmt.Errorf("start Postgres: %w", context.Cause(ctx))
		}
	}
}

// watch notices the end of Postgres, frees the data directory and tells.
func (s *Server) watch() {
	<-s.child.done
	if !s.stopping.Load() {
		s.err = fmt.Errorf("the private Postgres (process %d) ended by itself: %w", s.child.pid, exitOf(s.child))
		s.log.Error("private Postgres ended by itself", "pid", s.child.pid, "cause", exitOf(s.child))
	}
	if err := unlock(s.lock); err != nil {
		s.log.Warn("free the data directory", "error", err)
	}
	close(s.done)
}

// Done is closed when Postgres is no longer running, whatever the reason. The data directory
// is then free and can be started again.
func (s *Server) Done() <-chan struct{} { return s.done }

// Err returns why Postgres ended by itself; nil while it runs and after Stop.
func (s *Server) Err() error {
	select {
	case <-s.done:
		return s.err
	default:
		return nil
	}
}

// Stop ends Postgres and returns when it is gone. Open transactions are rolled back and
// everything is written out. When ctx ends or 30 seconds pass before that is done, Postgres
// is stopped at once, nothing committed is lost, and the next start takes longer; an error
// says so. Stopping a server that ended by itself returns Err.
func (s *Server) Stop(ctx context.Context) error {
	select {
	case <-s.done:
		return s.err
	default:
	}
	s.stopping.Store(true)
	s.child.signal(syscall.SIGINT)
	limit := time.NewTimer(stopLimit)
	defer limit.Stop()
	select {
	case <-s.done:
		return s.err
	case <-limit.C:
	case <-ctx.Done():
	}
	end(s.child, syscall.SIGQUIT)
	<-s.done
	return errors.New("stop Postgres: it did not write everything out in time and was stopped at once; nothing committed is lost, and the next start recovers it")
}

// URL returns the connection URL of the database difaudit as its owner, password included.
// It is a secret: give it to a connection and to nothing that is shown or logged.
func (s *Server) URL() string { return s.at.url(s.password, databaseName).String() }

// Redacted returns the connection URL with the password masked.
func (s *Server) Redacted() string { return s.at.url(s.password, databaseName).Redacted() }

// Programs returns the programs of the running version.
func (s *Server) Programs() Programs { return s.programs }

// String returns the connection URL with the password masked.
func (s *Server) String() string { return s.Redacted() }

// GoString keeps the password out of %#v.
func (s *Server) GoString() string { return "pgserver.Server(" + s.Redacted() + ")" }

// LogValue keeps the password out of logs.
func (s *Server) LogValue() slog.Value { return slog.StringValue(s.Redacted()) }
