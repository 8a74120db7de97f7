//go:build unix

package pgserver

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"syscall"
)

// unfinished begins the names of folders in which a cluster is being made.
const unfinished = "cluster.new-"

// initialize makes the cluster of a data directory and returns its password. It is made in a
// folder with a name of its own and renamed when complete: an initdb that was interrupted, or
// that outlived the process that started it, can harm no other, and a folder named cluster is
// always whole.
func initialize(ctx context.Context, cfg Config, p Programs, who account, dataDir, cluster string) (string, error) {
	// An empty folder of that name may stand here, made by hand.
	if err := os.Remove(cluster); err != nil && !errors.Is(err, os.ErrNotExist) {
		return "", fmt.Errorf("make the database: %s is not empty and holds no Postgres data (no file PG_VERSION): move it away, or name another data directory: %w", cluster, err)
	}
	password, err := newPassword(dataDir)
	if err != nil {
		return "", err
	}
	made, err := os.MkdirTemp(dataDir, unfinished)
	if err != nil {
		return "", fmt.Errorf("make a folder for the database: %w", err)
	}
	if err := runInitDB(ctx, cfg, p, who, made, password); err != nil {
		return "", errors.Join(err, os.RemoveAll(made))
	}
	if err := os.Rename(made, cluster); err != nil {
		return "", errors.Join(fmt.Errorf("name the finished database: %w", err), os.RemoveAll(made))
	}
	return password, syncFolder(dataDir)
}

func runInitDB(ctx context.Context, cfg Config, p Programs, who account, made, password string) error {
	// The password goes through a pipe: command lines and files can be seen by others. initdb
	// opens the pipe anew by its name, for which the pipe must belong to its account.
	read, write, err := os.Pipe()
	if err != nil {
		return fmt.Errorf("make a pipe for the password: %w", err)
	}
	defer read.Close()
	_, err = write.WriteString(password + "\n") // fits the buffer of a pipe
	if err := errors.Join(err, write.Close()); err != nil {
		return fmt.Errorf("hand the password to initdb: %w", err)
	}
	if who.credential != nil {
		if err := read.Chown(who.uid, who.gid); err != nil {
			return fmt.Errorf("hand the password to user %s: %w", who.name, err)
		}
		if err := os.Lchown(made, who.uid, who.gid); err != nil {
			return fmt.Errorf("give the new database to user %s: %w", who.name, err)
		}
	}
	args := []string{
		"--pgdata=" + made, "--username=" + roleName, "--pwfile=/dev/fd/3", "--auth=scram-sha-256",
		"--encoding=UTF8", "--locale=C", "--data-checksums", "--no-instructions",
	}
	if cfg.NoSync {
		args = append(args, "--no-sync")
	}
	var out bytes.Buffer
	cmd := exec.Command(p.InitDB, args...)
	cmd.Stdout, cmd.Stderr = &out, &out
	cmd.ExtraFiles = []*os.File{read}
	child, err := startProcess(cmd, who, syscall.SIGKILL)
	if err != nil {
		return fmt.Errorf("run initdb: %w", err)
	}
	select {
	case <-child.done:
	case <-ctx.Done():
		child.killGroup()
		<-child.done
		return fmt.Errorf("make the database: %w", context.Cause(ctx))
	}
	if child.err != nil {
		return fmt.Errorf("run initdb: %w%s", child.err, quoted(out.Bytes()))
	}
	return nil
}

// removeUnfinished removes what interrupted starts left behind. The lock is held, so nobody
// is at work there; a child of a killed initdb that still writes for a moment may keep one
// folder alive until the next start.
func removeUnfinished(cfg Config, dataDir string) {
	found, _ := filepath.Glob(filepath.Join(escapeGlob(dataDir), unfinished+"*"))
	for _, dir := range found {
		if err := os.RemoveAll(dir); err != nil {
			cfg.Log.Warn("remove an unfinished database", "folder", dir, "error", err)
		}
	}
}

// escapeGlob makes a path stand for itself in a pattern.
func escapeGlob(path string) string {
	var b bytes.Buffer
	for _, c := range []byte(path) {
		if bytes.IndexByte([]byte(`*?[\`), c) >= 0 {
			b.WriteByte('\\')
		}
		b.WriteByte(c)
	}
	return b.String()
}

// syncFolder makes the names in a folder survive a stop of the machine.
func syncFolder(dir string) error {
	f, err := os.Open(dir)
	if err != nil {
		return fmt.Errorf("sync folder: %w", err)
	}
	if err := errors.Join(f.Sync(), f.Close()); err != nil {
		return fmt.Errorf("sync folder %s: %w", dir, err)
	}
	return nil
}
