//go:build unix

package pgserver

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"time"
)

// Obtain makes sure that the Postgres programs Start needs are on the machine. Where they are
// missing and the process is root, it installs them through the system's package manager,
// saying each command before it runs. Otherwise, and where cfg.NoInstall forbids it, the error
// says what to install and wraps what Find reports. An explicit cfg.BinDir is never
// replaced by an installation.
func Obtain(ctx context.Context, cfg Config) error {
	cfg, err := cfg.complete()
	if err != nil {
		return err
	}
	_, missing := Find(cfg.BinDir, cfg.DataDir)
	switch {
	case missing == nil:
		return nil
	case cfg.BinDir != "" || !errors.Is(missing, ErrNotInstalled) && !errors.Is(missing, ErrOtherVersion):
		return missing
	case cfg.NoInstall:
		return fmt.Errorf("%w (nothing is installed, because --no-install was given)", missing)
	case os.Geteuid() != 0:
		return fmt.Errorf("%w (nothing is installed, because that takes root)", missing)
	}
	manager := packageManager()
	if manager == nil {
		return fmt.Errorf("%w (no package manager known here: apt-get, dnf, apk)", missing)
	}
	lock, err := lockInstallation()
	if err != nil {
		return err
	}
	defer unlock(lock)
	// Another process may have installed them while this one waited for the lock.
	if _, missing = Find(cfg.BinDir, cfg.DataDir); missing == nil {
		return nil
	}
	wanted, err := clusterMajor(filepath.Join(cfg.DataDir, "cluster"))
	if err != nil {
		return err
	}
	if err := manager.install(ctx, cfg, wanted); err != nil {
		return fmt.Errorf("install Postgres: %w", err)
	}
	if _, err := Find(cfg.BinDir, cfg.DataDir); err != nil {
		return fmt.Errorf("after an installation by %s: %w", manager.program(), err)
	}
	return nil
}

// installer is a system's package manager.
type installer interface {
	program() string
	// advice returns the command that installs a major version; 0 stands for the newest.
	advice(major int) string
	// install installs that version, the newest one where major is 0.
	install(ctx context.Context, cfg Config, major int) error
}

// packageManager returns the package manager of this machine, nil where none is known.
func packageManager() installer {
	for _, m := range []installer{apt{}, dnf, apk} {
		if _, err := exec.LookPath(m.program()); err == nil {
			return m
		}
	}
	return nil
}

// installAdvice tells what to install; major 0 leaves the version open.
func installAdvice(major int) string {
	if m := packageManager(); m != nil {
		return "as root: " + m.advice(major)
	}
	if major == 0 {
		return fmt.Sprintf("install the Postgres server, version %d or newer", oldestMajor)
	}
	return fmt.Sprintf("install the Postgres server, version %d", major)
}

// lockInstallation makes processes install one after another; test binaries run side by side.
// The lock is on a folder every system has, so that no file is left.
func lockInstallation() (*os.File, error) {
	f, err := os.Open("/etc")
	if err != nil {
		return nil, fmt.Errorf("wait for another installation: %w", err)
	}
	for {
		err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX)
		if err == nil {
			return f, nil
		}
		if !errors.Is(err, syscall.EINTR) {
			f.Close()
			return nil, fmt.Errorf("wait for another installation: %w", err)
		}
	}
}

// runInstaller says a command and runs it.
func runInstaller(ctx context.Context, cfg Config, command ...string) error {
	line := strings.Join(command, " ")
	cfg.Say("running: " + line)
	cfg.Log.Info("run the package manager", "command", line)
	cmd := exec.CommandContext(ctx, command[0], command[1:]...)
	cmd.Env = append(os.Environ(), "DEBIAN_FRONTEND=noninteractive", "LC_ALL=C")
	// Half-installed packages help nobody: it is asked to stop and given time to do so.
	cmd.Cancel = func() error { return cmd.Process.Signal(syscall.SIGINT) }
	cmd.WaitDelay = time.Minute
	out, err := cmd.CombinedOutput()
	if err != nil {
		return fmt.Errorf("run %s: %w%s", line, err, quoted(out))
	}
	return nil
}

// plainInstaller installs by one command, without a choice of versions.
type plainInstaller struct {
	name    string
	command []string
}

// Red Hat and Alpine. Written from their documentation as remembered; no test runs them.
var (
	dnf = plainInstaller{"dnf", []string{"dnf", "install", "-y", "postgresql-server", "postgresql"}}
	apk = plainInstaller{"apk", []string{"apk", "add", "postgresql", "postgresql-client"}}
)

func (m plainInstaller) program() string { return m.name }

func (m plainInstaller) advice(major int) string {
	line := strings.Join(m.command, " ")
	if major != 0 {
		line += fmt.Sprintf(", of version %d", major)
	}
	return line
}

func (m plainInstaller) install(ctx context.Context, cfg Config, major int) error {
	if major != 0 {
		return fmt.Errorf("the data need version %d, which %s is not asked for by itself: install it by hand", major, m.name)
	}
	return runInstaller(ctx, cfg, m.command...)
}
