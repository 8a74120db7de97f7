//go:build unix

package pgserver

import (
	"fmt"
	"log/slog"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// The password shows in no log, no string form, no error and no command line. Values of
// candidates that an erroneous statement quotes do not show in the log of Postgres.
func TestSecretsStaySecret(t *testing.T) {
	t.Parallel()
	dataDir := newDataDir(t)
	var log lockedBuffer
	var said []string
	cfg := Config{
		DataDir: dataDir,
		Log:     slog.New(slog.NewTextHandler(&log, &slog.HandlerOptions{Level: slog.LevelDebug})),
		Say:     func(line string) { said = append(said, line) },
	}
	s, err := Start(t.Context(), cfg)
	if err != nil {
		t.Fatal(err)
	}
	if len(s.password) != 48 {
		t.Errorf("the password has %d hexadecimal digits, want those of 24 bytes", len(s.password))
	}
	if !strings.Contains(s.URL(), s.password) {
		t.Error("the connection URL lacks the password")
	}
	cfg.Log.Info("server", "server", s)
	shown := []string{s.Redacted(), fmt.Sprint(s), fmt.Sprintf("%+v %#v %s %q", s, s, s, s)}
	lines, _ := filepath.Glob("/proc/[0-9]*/cmdline") // empty where there is no procfs
	for _, path := range lines {
		line, _ := os.ReadFile(path) // the process may be gone
		shown = append(shown, string(line))
	}

	conn := connect(t, s.URL())
	if got := text(t, conn, "SELECT current_setting('fsync') || ' ' || current_setting('full_page_writes')"); got != "on on" {
		t.Errorf("fsync and full_page_writes without NoSync: %s, want on on", got)
	}
	exec1(t, conn, "CREATE TABLE answers (candidate text PRIMARY KEY, score int)")
	exec1(t, conn, "INSERT INTO answers VALUES ('candidate-4711', 1)")
	for _, sql := range []string{
		"INSERT INTO answers VALUES ('candidate-4711', 1)",
		"SELECT 'candidate-4711'::int",
		"SELECT candidate-4711 FROM nowhere",
	} {
		if _, err := conn.Exec(t.Context(), sql); err == nil {
			t.Errorf("%s: no error", sql)
		}
	}
	stop(t, s)
	if _, err := Start(t.Context(), Config{DataDir: dataDir, BinDir: "/nonexistent"}); err == nil {
		t.Error("started without programs")
	} else {
		shown = append(shown, err.Error())
	}
	own, err := os.ReadFile(filepath.Join(dataDir, "postgres.log"))
	if err != nil {
		t.Fatal(err)
	}
	if !strings.Contains(string(own), "ready to accept connections") {
		t.Errorf("the log of Postgres lacks its own messages:\n%s", own)
	}
	if strings.Contains(string(own), "4711") {
		t.Errorf("the log of Postgres quotes a value:\n%s", own)
	}
	for _, text := range append(append(shown, said...), log.String(), string(own)) {
		if strings.Contains(text, s.password) {
			t.Errorf("the password shows in: %.60s ...", text)
		}
	}
}
