// Package storetest gives tests a real Postgres: one private server for each test binary.
package storetest

import (
	"context"
	"errors"
	"fmt"
	"log/slog"
	"os"
	"os/signal"
	"path/filepath"
	"sync"
	"syscall"
	"testing"
	"time"

	"difaudit/store/pgserver"
)

// startLimit is how long the start may take, an installation of Postgres included.
const startLimit = 10 * time.Minute

// private is the server of this test binary.
var private struct {
	mu      sync.Mutex
	managed bool // Main runs the tests and will stop the server
	tried   bool
	server  *pgserver.Server
	folder  string
	err     error
}

// Main runs the tests of a package and then stops the server they used. A package whose tests
// call Server has
//
//	func TestMain(m *testing.M) { storetest.Main(m) }
//
// It does not return. An interrupt stops the server as well. Where a test binary dies in
// another way, Postgres ends with it on Linux.
func Main(m *testing.M) {
	private.mu.Lock()
	private.managed = true
	private.mu.Unlock()
	interrupted := make(chan os.Signal, 1)
	signal.Notify(interrupted, os.Interrupt, syscall.SIGTERM)
	go func() {
		<-interrupted
		os.Exit(max(1, stop()))
	}()
	code := m.Run()
	os.Exit(max(code, stop()))
}

// Server returns the private Postgres of this test binary, started when the first test asks
// for it. Where the machine has no Postgres it is installed, and where that is not possible
// the test fails, saying what to install: tests of the store are never skipped. The server
// runs without waiting for the disk; nothing in it outlives the test binary.
func Server(t testing.TB) *pgserver.Server {
	t.Helper()
	private.mu.Lock()
	defer private.mu.Unlock()
	if !private.managed {
		t.Fatal("storetest.Server needs a TestMain that calls storetest.Main, which stops the server")
	}
	if !private.tried {
		private.tried = true
		private.err = start()
	}
	if private.err != nil {
		t.Fatalf("start a Postgres for the tests: %v", private.err)
	}
	select {
	case <-private.server.Done():
		t.Fatalf("the Postgres of the tests is gone: %v", private.server.Err())
	default:
	}
	return private.server
}

func start() (err error) {
	ctx, cancel := context.WithTimeout(context.Background(), startLimit)
	defer cancel()
	if private.folder, err = os.MkdirTemp("", "difaudit-test-"); err != nil {
		return fmt.Errorf("make a folder for the data: %w", err)
	}
	// As root the server runs as another user, who must pass through here.
	if err := os.Chmod(private.folder, 0o711); err != nil {
		return fmt.Errorf("open the folder of the data: %w", err)
	}
	cfg := pgserver.Config{
		DataDir: filepath.Join(private.folder, "data"),
		NoSync:  true,
		Log:     slog.New(slog.NewTextHandler(os.Stderr, &slog.HandlerOptions{Level: slog.LevelWarn})),
		Say:     func(line string) { fmt.Fprintln(os.Stderr, line) },
	}
	if err := pgserver.Obtain(ctx, cfg); err != nil {
		return err
	}
	private.server, err = pgserver.Start(ctx, cfg)
	return err
}

// stop stops the server, removes its data and returns an exit status.
func stop() int {
	private.mu.Lock()
	defer private.mu.Unlock()
	var err error
	if private.server != nil {
		err = private.server.Stop(context.Background())
	}
	if private.folder != "" {
		err = errors.Join(err, os.RemoveAll(private.folder))
	}
	if err != nil {
		fmt.Fprintf(os.Stderr, "stop the Postgres of the tests: %v\n", err)
		return 1
	}
	return 0
}
