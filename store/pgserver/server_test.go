//go:build unix

package pgserver

import (
	"context"
	"errors"
	"fmt"
	"net/url"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"

	"github.com/jackc/pgx/v5"
	"github.com/jackc/pgx/v5/pgconn"
)

func TestColdAndWarmStart(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	s := start(t, Config{DataDir: dataDir})
	conn := connect(t, s.URL())
	for query, want := range map[string]string{
		"SELECT current_user":                                   "difaudit",
		"SELECT current_database()":                             "difaudit",
		"SHOW server_encoding":                                  "UTF8",
		"SHOW lc_collate":                                       "C",
		"SHOW data_checksums":                                   "on",
		"SHOW listen_addresses":                                 "",
		"SELECT inet_client_addr() IS NULL || ''":               "true",
		"SELECT count(*)::text FROM pg_roles WHERE rolcanlogin": "1",
		"SELECT string_agg(DISTINCT auth_method, ',') FROM pg_hba_file_rules": "scram-sha-256",
	} {
		if got := text(t, conn, query); got != want {
			t.Errorf("%s: %q, want %q", query, got, want)
		}
	}
	p := s.Programs()
	if version := text(t, conn, "SHOW server_version_num"); version != "" && !strings.HasPrefix(version, strconv.Itoa(p.Major)) {
		t.Errorf("the programs say version %d, the server %s", p.Major, version)
	}
	for _, program := range []string{p.Postgres, p.InitDB, p.PgDump, p.PgRestore, p.Psql} {
		if major, err := majorOf(program); err != nil || major != p.Major {
			t.Errorf("%q: version %d, %v, want %d", program, major, err, p.Major)
		}
	}
	exec1(t, conn, "CREATE TABLE kept (n int)")
	exec1(t, conn, "INSERT INTO kept SELECT generate_series(1, 1000)")
	first := s.URL()
	stop(t, s)
	select {
	case <-s.Done():
	default:
		t.Error("Done is open after Stop")
	}
	if err := s.Err(); err != nil {
		t.Errorf("Err after Stop: %v", err)
	}
	if err := s.Stop(t.Context()); err != nil {
		t.Errorf("a second Stop: %v", err)
	}
	for name, want := range map[string]os.FileMode{"password": 0o600, "lock": 0o600, "postgres.log": 0o600, "run": 0o700 | os.ModeDir, "cluster": 0o700 | os.ModeDir} {
		info, err := os.Stat(filepath.Join(dataDir, name))
		if err != nil || info.Mode() != want {
			t.Errorf("%s: mode %v, %v, want %v", name, info.Mode(), err, want)
		}
	}

	s = start(t, Config{DataDir: dataDir})
	if s.URL() != first {
		t.Error("the connection URL changed over a restart")
	}
	if got := text(t, connect(t, s.URL()), "SELECT count(*)::text FROM kept"); got != "1000" {
		t.Errorf("after a restart %s rows, want 1000", got)
	}
	stop(t, s)
}

func TestSecondInstanceIsRefused(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	h := hold(t, dataDir)
	eventually(t, "the first instance", func() bool { return strings.Contains(h.out.String(), "ready") })
	_, err := Start(t.Context(), Config{DataDir: dataDir})
	if !errors.Is(err, ErrInUse) || !strings.Contains(err.Error(), fmt.Sprintf("process %d ", h.cmd.Process.Pid)) {
		t.Errorf("got %v, want ErrInUse naming process %d", err, h.cmd.Process.Pid)
	}
	h.kill()
	stop(t, start(t, Config{DataDir: dataDir}))
}

// Characters that mean something to Postgres, to connection URLs or to patterns of file names.
func TestOddPath(t *testing.T) {
	t.Parallel()
	for _, c := range []struct {
		name     string
		loopback bool
	}{{`a "b" c+%d*[é\`, false}, {"a,b", true}} {
		dataDir := filepath.Join(newFolder(t), c.name)
		for range 2 {
			s := start(t, Config{DataDir: dataDir})
			if got := text(t, connect(t, s.URL()), "SELECT (inet_server_addr() IS NOT NULL)::text"); got != fmt.Sprint(c.loopback) {
				t.Errorf("%s: loopback %s, want %v", c.name, got, c.loopback)
			}
			stop(t, s)
		}
		s := start(t, Config{DataDir: dataDir})
		if out, err := exec.Command(s.Programs().Psql, "--no-psqlrc", "--tuples-only", "--command=SELECT 41 + 1", s.URL()).CombinedOutput(); err != nil || strings.TrimSpace(string(out)) != "42" {
			t.Errorf("%s: psql with the same URL: %v, %s", c.name, err, out)
		}
		stop(t, s)
	}
}

func TestLongPathFallsBackToLoopback(t *testing.T) {
	t.Parallel()
	dataDir := filepath.Join(newFolder(t), strings.Repeat("long", 25), "data")
	for range 2 {
		s := start(t, Config{DataDir: dataDir})
		u, err := url.Parse(s.URL())
		if err != nil || u.Hostname() != "127.0.0.1" || u.Query().Get("host") != "" {
			t.Fatalf("%s, %v: want the address 127.0.0.1", s.Redacted(), err)
		}
		if got := text(t, connect(t, s.URL()), "SELECT host(inet_server_addr())"); got != "127.0.0.1" {
			t.Errorf("server address %q", got)
		}
		stop(t, s)
	}
}

func TestWrongPasswordIsRefused(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	s := start(t, Config{DataDir: dataDir})
	_, err := pgx.Connect(t.Context(), s.at.url("wrong", databaseName).String())
	var answer *pgconn.PgError
	if !errors.As(err, &answer) || answer.Code != badPassword {
		t.Errorf("connect with a wrong password: %v", err)
	}
	stop(t, s)

	path := filepath.Join(dataDir, "password")
	if err := os.WriteFile(path, []byte("wrong\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Start(t.Context(), Config{DataDir: dataDir}); err == nil || !strings.Contains(err.Error(), "password") {
		t.Errorf("start with a wrong password file: %v", err)
	}
	if err := os.Remove(path); err != nil {
		t.Fatal(err)
	}
	if _, err := Start(t.Context(), Config{DataDir: dataDir}); err == nil || !strings.Contains(err.Error(), path) {
		t.Errorf("start without a password file: %v", err)
	}
}

func TestStartEndsWithItsContext(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	ctx, cancel := context.WithCancelCause(t.Context())
	why := errors.New("the operator gave up")
	go func() {
		_ = waitUntil(ctx, stopLimit, func() bool {
			found, _ := filepath.Glob(filepath.Join(dataDir, unfinished+"*", "PG_VERSION"))
			return len(found) > 0
		})
		cancel(why)
	}()
	if _, err := Start(ctx, Config{DataDir: dataDir, NoSync: true}); !errors.Is(err, why) {
		t.Fatalf("got %v, want %v", err, why)
	}
	if found, _ := filepath.Glob(filepath.Join(dataDir, unfinished+"*")); len(found) > 0 {
		t.Logf("left for the next start: %v", found)
	}
	stop(t, start(t, Config{DataDir: dataDir}))
	if found, _ := filepath.Glob(filepath.Join(dataDir, unfinished+"*")); len(found) > 0 {
		t.Errorf("left behind: %v", found)
	}
}

// A stop whose context has ended still ends Postgres, and the next start loses nothing.
func TestStopAtOnce(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	s := start(t, Config{DataDir: dataDir})
	conn := connect(t, s.URL())
	exec1(t, conn, "CREATE TABLE kept AS SELECT generate_series(1, 1000)")
	ended, cancel := context.WithCancel(t.Context())
	cancel()
	// Which of the two comes first, the end of Postgres or that of the context, is open.
	t.Logf("stop: %v", s.Stop(ended))
	<-s.Done()
	s = start(t, Config{DataDir: dataDir})
	if got := text(t, connect(t, s.URL()), "SELECT count(*)::text FROM kept"); got != "1000" {
		t.Errorf("%s rows, want 1000", got)
	}
	stop(t, s)
}

// Started by root, Postgres runs as the account asked for when the cluster was made, and
// keeps to it when none is asked for later.
func TestAccountIsKept(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	s := start(t, Config{DataDir: dataDir, User: "nobody"})
	want := os.Geteuid()
	if want == 0 {
		nobody, err := named("nobody")
		if err != nil {
			t.Fatal(err)
		}
		want = nobody.uid
	}
	for range 2 {
		owner, err := ownerOf(filepath.Join(dataDir, "cluster", "postmaster.pid"))
		if err != nil || owner.uid != want {
			t.Errorf("Postgres runs as %d, %v, want %d", owner.uid, err, want)
		}
		stop(t, s)
		s = start(t, Config{DataDir: dataDir})
	}
	stop(t, s)
}

func TestForeignFoldersAreRefused(t *testing.T) {
	t.Parallel()
	base := newFolder(t)
	itself := filepath.Join(base, "itself")
	full := filepath.Join(base, "full")
	file := filepath.Join(base, "file")
	for path, content := range map[string]string{
		filepath.Join(itself, "PG_VERSION"):         "15\n",
		filepath.Join(full, "cluster", "notes.txt"): "mine",
		file: "x",
	} {
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(content), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	for dataDir, want := range map[string]string{
		"":     "no data directory given",
		itself: "holds the data of a Postgres itself",
		full:   "not empty and holds no Postgres data",
		file:   "not a folder",
	} {
		if _, err := Start(t.Context(), Config{DataDir: dataDir}); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v, want an error saying %q", dataDir, err, want)
		}
	}
	if _, err := os.Stat(filepath.Join(full, "cluster", "notes.txt")); err != nil {
		t.Errorf("a foreign file was touched: %v", err)
	}
}

// A folder closed to the account is named before anything is made. An ordinary user is that
// account and reaches what is closed to others.
func TestClosedFolder(t *testing.T) {
	t.Parallel()
	closed := filepath.Join(newFolder(t), "closed")
	if err := os.Mkdir(closed, 0o700); err != nil {
		t.Fatal(err)
	}
	dataDir := filepath.Join(closed, "below", "data")
	s, err := Start(t.Context(), Config{DataDir: dataDir, NoSync: true})
	if os.Geteuid() != 0 {
		if err != nil {
			t.Fatal(err)
		}
		stop(t, s)
		return
	}
	if !errors.Is(err, ErrUnreachable) || !strings.Contains(err.Error(), "chmod o+x "+closed+")") {
		t.Fatalf("got %v, want ErrUnreachable naming %s", err, closed)
	}
	if err := os.Chmod(closed, 0o711); err != nil {
		t.Fatal(err)
	}
	stop(t, start(t, Config{DataDir: dataDir}))
}

func TestFirstClosed(t *testing.T) {
	t.Parallel()
	base := newFolder(t)
	shut := filepath.Join(base, "a", "shut")
	dir := filepath.Join(shut, "b")
	if err := os.MkdirAll(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	info, err := os.Stat(shut)
	if err != nil {
		t.Fatal(err)
	}
	owner := info.Sys().(*syscall.Stat_t)
	stranger := newAccount("stranger", owner.Uid+1, owner.Gid+1, []uint32{owner.Gid + 1})
	member := newAccount("member", owner.Uid+1, owner.Gid+1, []uint32{owner.Gid + 1, owner.Gid})
	self := newAccount("self", owner.Uid, owner.Gid, []uint32{owner.Gid})
	for _, c := range []struct {
		who  account
		mode os.FileMode
		want string
	}{
		{stranger, 0o711, ""}, {stranger, 0o710, shut}, {member, 0o710, ""}, {member, 0o701, shut},
		{self, 0o700, ""}, {self, 0o077, shut},
	} {
		if err := os.Chmod(shut, c.mode); err != nil {
			t.Fatal(err)
		}
		if got := firstClosed(c.who, shut); got != c.want {
			t.Errorf("%s, mode %o: %q, want %q", c.who.name, c.mode, got, c.want)
		}
	}
	if err := os.Chmod(shut, 0o700); err != nil {
		t.Fatal(err)
	}
}
