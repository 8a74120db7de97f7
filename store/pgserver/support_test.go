//go:build unix

package pgserver

import (
	"bytes"
	"context"
	"fmt"
	"log/slog"
	"os"
	"os/exec"
	"path/filepath"
	"sync"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// holdVariable makes the test binary a process that runs the instance of the data directory
// it names until it is killed.
const holdVariable = "DIFAUDIT_PGSERVER_TEST_HOLD"

func TestMain(m *testing.M) {
	if dir := os.Getenv(holdVariable); dir != "" {
		if _, err := Start(context.Background(), Config{DataDir: dir, NoSync: true}); err != nil {
			fmt.Println(err)
			os.Exit(1)
		}
		fmt.Println("ready")
		select {}
	}
	say := func(line string) { fmt.Fprintln(os.Stderr, line) }
	if err := Obtain(context.Background(), Config{DataDir: "/nonexistent", Say: say}); err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	os.Exit(m.Run())
}

// newFolder makes a folder that every user may pass through. At the end of the test no
// Postgres may be at work in the data directory below it.
func newFolder(t *testing.T) string {
	t.Helper()
	base, err := os.MkdirTemp("", "pgserver-test-")
	if err != nil {
		t.Fatal(err)
	}
	if base, err = filepath.EvalSymlinks(base); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() {
		if pids := postgresAt(filepath.Join(base, "data", "cluster")); len(pids) > 0 {
			t.Errorf("the test leaves Postgres processes %v", pids)
		}
		if err := os.RemoveAll(base); err != nil {
			t.Error(err)
		}
	})
	if err := os.Chmod(base, 0o711); err != nil {
		t.Fatal(err)
	}
	return base
}

// newDataDir returns a data directory that does not exist yet.
func newDataDir(t *testing.T) string {
	t.Helper()
	return filepath.Join(newFolder(t), "data")
}

// start starts an instance and stops it at the end of the test.
func start(t *testing.T, cfg Config) *Server {
	t.Helper()
	cfg.NoSync = true
	cfg.Log = slog.New(slog.NewTextHandler(t.Output(), nil))
	began := time.Now()
	s, err := Start(t.Context(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("started in %v", time.Since(began).Round(time.Millisecond))
	t.Cleanup(func() { _ = s.Stop(context.Background()) }) // tests of the stop call it themselves
	return s
}

func stop(t *testing.T, s *Server) {
	t.Helper()
	began := time.Now()
	if err := s.Stop(t.Context()); err != nil {
		t.Fatalf("stop: %v", err)
	}
	t.Logf("stopped in %v", time.Since(began).Round(time.Millisecond))
}

// connect opens a connection that is closed at the end of the test.
func connect(t *testing.T, url string) *pgx.Conn {
	t.Helper()
	conn, err := pgx.Connect(t.Context(), url)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = conn.Close(context.Background()) }) // the server may be gone
	return conn
}

func exec1(t *testing.T, conn *pgx.Conn, sql string) {
	t.Helper()
	if _, err := conn.Exec(t.Context(), sql); err != nil {
		t.Fatalf("%s: %v", sql, err)
	}
}

// text returns the one value of a query as text.
func text(t *testing.T, conn *pgx.Conn, sql string) string {
	t.Helper()
	var v string
	if err := conn.QueryRow(t.Context(), sql).Scan(&v); err != nil {
		t.Fatalf("%s: %v", sql, err)
	}
	return v
}

// holder is another process that runs an instance.
type holder struct {
	cmd *exec.Cmd
	out *lockedBuffer
}

func hold(t *testing.T, dataDir string) *holder {
	t.Helper()
	h := &holder{cmd: exec.Command(os.Args[0], "-test.run=^$"), out: &lockedBuffer{}}
	h.cmd.Env = append(os.Environ(), holdVariable+"="+dataDir)
	h.cmd.Stdout, h.cmd.Stderr = h.out, h.out
	h.cmd.WaitDelay = time.Second
	if err := h.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { h.kill() })
	return h
}

// kill ends the holder as kill -9 does.
func (h *holder) kill() {
	_ = h.cmd.Process.Kill()
	_ = h.cmd.Wait() // killed: the error is the signal
}

// eventually waits for a condition, with a limit only so that a failure ends.
func eventually(t *testing.T, what string, holds func() bool) {
	t.Helper()
	if err := waitUntil(t.Context(), time.Minute, holds); err != nil {
		t.Fatal(err)
	}
	if !holds() {
		t.Fatalf("waited a minute in vain for %s", what)
	}
}

// lockedBuffer collects what several goroutines write.
type lockedBuffer struct {
	mu sync.Mutex
	b  bytes.Buffer
}

func (l *lockedBuffer) Write(p []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.Write(p)
}

func (l *lockedBuffer) String() string {
	l.mu.Lock()
	defer l.mu.Unlock()
	return l.b.String()
}
