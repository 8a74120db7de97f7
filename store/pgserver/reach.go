//go:build unix

package pgserver

import (
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
)

// checkReach makes sure that the account can run the programs and enter the data directory.
// Started without this check, a child that cannot do so fails with "permission denied" on the
// program, whatever the reason.
func checkReach(who account, p Programs, dataDir string) error {
	if who.credential == nil {
		return nil
	}
	if !canRun(who, p.Postgres, "/") {
		return unreachable(who, "run the Postgres programs in "+filepath.Dir(p.Postgres), filepath.Dir(p.Postgres), "")
	}
	if !canRun(who, p.Postgres, dataDir) {
		return unreachable(who, "reach the data directory "+dataDir, dataDir, ", or name a data directory elsewhere with --data")
	}
	return nil
}

// canRun reports whether the account can run a program with dir as its working directory.
// The attempt knows of access lists and mount options, which permission bits do not show.
func canRun(who account, program, dir string) bool {
	cmd := exec.Command(program, "--version")
	cmd.Dir = dir
	cmd.Env = childEnvironment()
	cmd.SysProcAttr = &syscall.SysProcAttr{Credential: who.credential}
	return cmd.Run() == nil
}

func unreachable(who account, what, dir, otherwise string) error {
	closed := firstClosed(who, dir)
	if closed == "" {
		return fmt.Errorf("%w: user %s cannot %s: open the folders on the way to that user%s", ErrUnreachable, who.name, what, otherwise)
	}
	return fmt.Errorf("%w: user %s cannot %s, because %s is closed to that user: open it (chmod o+x %s)%s",
		ErrUnreachable, who.name, what, closed, closed, otherwise)
}

// firstClosed returns the first folder on the way to dir, from the root down and dir itself
// included, whose permission bits do not let the account pass; empty where all do.
func firstClosed(who account, dir string) string {
	at := string(filepath.Separator)
	for _, name := range append([]string{""}, strings.Split(strings.Trim(dir, at), at)...) {
		at = filepath.Join(at, name)
		info, err := os.Stat(at)
		if err != nil {
			return ""
		}
		stat, ok := info.Sys().(*syscall.Stat_t)
		if !ok {
			return ""
		}
		bit := os.FileMode(0o001)
		switch {
		case int(stat.Uid) == who.uid:
			bit = 0o100
		case slices.Contains(who.credential.Groups, stat.Gid):
			bit = 0o010
		}
		if info.Mode()&bit == 0 {
			return at
		}
	}
	return ""
}
