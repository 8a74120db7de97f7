package pgserver

import (
	"errors"
	"fmt"
	"log/slog"
	"os"
	"path/filepath"
	"runtime"
)

// Config says where the private Postgres lives and how it runs.
type Config struct {
	// DataDir is the data directory, made when missing. Required.
	DataDir string
	// BinDir is the folder of the Postgres programs (postgres, initdb). Empty: search the
	// machine. A folder given here is the only one looked at.
	BinDir string
	// User is the account a new cluster runs under when the process is root. Empty: the
	// owner of the data directory unless that is root, else postgres, else nobody. A cluster
	// that exists keeps the account that owns it. Ignored when the process is not root.
	User string
	// NoInstall forbids Obtain to install anything.
	NoInstall bool
	// NoSync lets Postgres confirm commits that the disk does not hold yet: faster, and the
	// data are lost when the machine stops. For tests only. Committed rows still survive the
	// death of any process.
	NoSync bool
	// Log receives what happens. Nil: nothing is logged. Passwords are never logged.
	Log *slog.Logger
	// Say receives one line for the operator before something noticeable is done, such as
	// the command of an installation. Nil: nothing is said.
	Say func(string)
}

// complete returns the configuration with defaults filled in and an absolute data directory.
func (c Config) complete() (Config, error) {
	if c.DataDir == "" {
		return c, errors.New("no data directory given: name one with --data")
	}
	dir, err := filepath.Abs(c.DataDir)
	if err != nil {
		return c, fmt.Errorf("resolve data directory %s: %w", c.DataDir, err)
	}
	c.DataDir = dir
	if c.Log == nil {
		c.Log = slog.New(slog.DiscardHandler)
	}
	if c.Say == nil {
		c.Say = func(string) {}
	}
	return c, nil
}

// DefaultDataDir returns the data directory used when none is named: /var/lib/difaudit for
// root, whose home is closed to the account Postgres runs as, and a folder among the user's
// application data for everyone else.
func DefaultDataDir() (string, error) {
	if os.Geteuid() == 0 {
		return "/var/lib/difaudit", nil
	}
	if dir := os.Getenv("XDG_DATA_HOME"); filepath.IsAbs(dir) {
		return filepath.Join(dir, "difaudit"), nil
	}
	home, err := os.UserHomeDir()
	if err != nil {
		return "", fmt.Errorf("find the home directory (name a data directory with --data): %w", err)
	}
	if runtime.GOOS == "darwin" {
		return filepath.Join(home, "Library", "Application Support", "difaudit"), nil
	}
	return filepath.Join(home, ".local", "share", "difaudit"), nil
}
