//go:build unix

package pgserver

import (
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"syscall"
	"testing"
)

func TestPostgresKilled(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	s := start(t, Config{DataDir: dataDir})
	conn := connect(t, s.URL())
	exec1(t, conn, "CREATE TABLE kept (n int)")
	exec1(t, conn, "INSERT INTO kept SELECT generate_series(1, 200000)")
	exec1(t, conn, "BEGIN; INSERT INTO kept VALUES (-1)") // never committed
	if err := syscall.Kill(s.child.pid, syscall.SIGKILL); err != nil {
		t.Fatal(err)
	}
	<-s.Done()
	if err := s.Err(); err == nil || !strings.Contains(err.Error(), "ended by itself") {
		t.Errorf("Err: %v", err)
	}
	if err := s.Stop(t.Context()); err == nil {
		t.Error("Stop hides that Postgres ended by itself")
	}
	s = start(t, Config{DataDir: dataDir})
	if got := text(t, connect(t, s.URL()), "SELECT count(*) || ' ' || min(n) FROM kept"); got != "200000 1" {
		t.Errorf("after the crash: %s, want 200000 rows from 1", got)
	}
	stop(t, s)
}

func TestSupervisorKilled(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	cluster := filepath.Join(dataDir, "cluster")
	s := start(t, Config{DataDir: dataDir})
	exec1(t, connect(t, s.URL()), "CREATE TABLE kept AS SELECT generate_series(1, 1000)")
	stop(t, s)
	for range 3 {
		h := hold(t, dataDir)
		eventually(t, "the other process", func() bool { return strings.Contains(h.out.String(), "ready") })
		if len(postgresAt(cluster)) == 0 {
			t.Fatal("no Postgres at work")
		}
		h.kill()
		// The next start comes while Postgres may still be shutting down.
		s := start(t, Config{DataDir: dataDir})
		if got := text(t, connect(t, s.URL()), "SELECT count(*)::text FROM kept"); got != "1000" {
			t.Errorf("%s rows, want 1000", got)
		}
		stop(t, s)
	}
	if runtime.GOOS != "linux" {
		return
	}
	h := hold(t, dataDir)
	eventually(t, "the other process", func() bool { return strings.Contains(h.out.String(), "ready") })
	h.kill()
	eventually(t, "Postgres to end with its parent", func() bool { return len(postgresAt(cluster)) == 0 })
}

func TestKilledWhileMakingTheCluster(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	left := func(name string) []string {
		found, err := filepath.Glob(filepath.Join(dataDir, unfinished+"*", name))
		if err != nil {
			t.Fatal(err)
		}
		return found
	}
	// Three moments of initdb: its first file, the first tables, the settings written.
	for _, name := range []string{"PG_VERSION", "base/1/PG_VERSION", "postgresql.conf"} {
		h := hold(t, dataDir)
		eventually(t, "initdb at work: "+name, func() bool { return len(left(name)) > 0 })
		h.kill()
		if len(left("")) == 0 {
			t.Fatalf("killed at %s: nothing is left, so initdb was not interrupted", name)
		}
	}
	if _, err := os.Stat(filepath.Join(dataDir, "cluster")); !os.IsNotExist(err) {
		t.Fatalf("a half-made cluster stands under its final name: %v", err)
	}
	s := start(t, Config{DataDir: dataDir})
	text(t, connect(t, s.URL()), "SELECT 'x'")
	stop(t, s)
	stop(t, start(t, Config{DataDir: dataDir}))
	if found := left(""); len(found) > 0 {
		t.Errorf("left behind: %v", found)
	}
}

// A server without a parent is what systems without a death signal leave behind.
func TestOrphanIsStopped(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	cluster := filepath.Join(dataDir, "cluster")
	s := start(t, Config{DataDir: dataDir})
	exec1(t, connect(t, s.URL()), "CREATE TABLE kept AS SELECT generate_series(1, 1000)")
	stop(t, s)

	who, err := chooseAccount("", dataDir, cluster)
	if err != nil {
		t.Fatal(err)
	}
	orphan := exec.Command(s.programs.Postgres, "-D", cluster, "-c", "listen_addresses=", "-c", "unix_socket_directories="+filepath.Join(dataDir, "run"))
	orphan.Dir = "/"
	orphan.SysProcAttr = &syscall.SysProcAttr{Credential: who.credential}
	if err := orphan.Start(); err != nil {
		t.Fatal(err)
	}
	gone := make(chan error, 1)
	go func() { gone <- orphan.Wait() }()
	eventually(t, "the orphan", func() bool { return statusOf(cluster).ready })

	s = start(t, Config{DataDir: dataDir})
	if err := <-gone; err != nil {
		t.Errorf("the orphan did not shut down in order: %v", err)
	}
	if got := text(t, connect(t, s.URL()), "SELECT count(*)::text FROM kept"); got != "1000" {
		t.Errorf("%s rows, want 1000", got)
	}
	stop(t, s)
}

// Pid files outlive a crash, and their numbers are given to other processes. Here they name
// one that has nothing to do with Postgres. Postgres minds those of its own account only.
func TestStalePidFile(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	cluster := filepath.Join(dataDir, "cluster")
	s := start(t, Config{DataDir: dataDir})
	kept, err := os.ReadFile(filepath.Join(cluster, "postmaster.pid"))
	if err != nil {
		t.Fatal(err)
	}
	stop(t, s)

	who, err := chooseAccount("", dataDir, cluster)
	if err != nil {
		t.Fatal(err)
	}
	unrelated := exec.Command("sleep", "600")
	unrelated.Dir = "/"
	unrelated.SysProcAttr = &syscall.SysProcAttr{Credential: who.credential}
	if err := unrelated.Start(); err != nil {
		t.Fatal(err)
	}
	defer func() {
		_ = unrelated.Process.Kill()
		_ = unrelated.Wait() // killed: the error is the signal
	}()
	pid := strconv.Itoa(unrelated.Process.Pid)
	_, rest, _ := strings.Cut(string(kept), "\n")
	for _, path := range []string{filepath.Join(cluster, "postmaster.pid"), filepath.Join(dataDir, "run", ".s.PGSQL.5432.lock")} {
		if err := os.WriteFile(path, []byte(pid+"\n"+rest), 0o600); err != nil {
			t.Fatal(err)
		}
		if err := os.Chown(path, who.uid, who.gid); err != nil {
			t.Fatal(err)
		}
	}
	s = start(t, Config{DataDir: dataDir})
	text(t, connect(t, s.URL()), "SELECT 'x'")
	stop(t, s)
	if !isAlive(unrelated.Process.Pid) {
		t.Error("the unrelated process was stopped")
	}
}
