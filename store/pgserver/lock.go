//go:build unix

package pgserver

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"
)

// lockDirectory takes the lock of a data directory, which lasts until unlock or the end of
// the process. The error wraps ErrInUse and names the holder where another has it.
func lockDirectory(dataDir string) (*os.File, error) {
	path := filepath.Join(dataDir, "lock")
	f, err := openOwn(path, os.O_RDWR|os.O_CREATE)
	if err != nil {
		return nil, fmt.Errorf("lock the data directory: %w", err)
	}
	switch err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB); {
	case errors.Is(err, syscall.EWOULDBLOCK):
		text, _ := io.ReadAll(io.LimitReader(f, 32))
		f.Close()
		holder := "another process"
		if pid := strings.TrimSpace(string(text)); pid != "" {
			holder = "process " + pid
		}
		return nil, fmt.Errorf("%w: %s runs the database in %s: stop it first, or name another data directory with --data", ErrInUse, holder, dataDir)
	case err != nil:
		f.Close()
		return nil, fmt.Errorf("lock %s (does the file system know locks?): %w", path, err)
	}
	if err := f.Truncate(0); err == nil {
		_, _ = f.WriteAt([]byte(fmt.Sprintf("%d\n", os.Getpid())), 0) // only the message to others needs it
	}
	return f, nil
}

// unlock gives up a lock and closes its file. Closing alone would not do at once: a child that
// another goroutine is starting has a copy of the open file until it runs its program.
func unlock(f *os.File) error {
	return errors.Join(syscall.Flock(int(f.Fd()), syscall.LOCK_UN), f.Close())
}

// openOwn opens or makes a file of the data directory that only its owner may read. It follows
// no link, so that whoever owns the data directory cannot point root at another file. A file
// made by root in another user's data directory is given to that user, who may start next.
func openOwn(path string, flags int) (*os.File, error) {
	f, err := os.OpenFile(path, flags|syscall.O_NOFOLLOW, 0o600)
	if err != nil {
		return nil, err
	}
	if os.Geteuid() == 0 && flags&os.O_CREATE != 0 {
		if owner, err := ownerOf(filepath.Dir(path)); err == nil && owner.uid != 0 {
			if err := f.Chown(owner.uid, owner.gid); err != nil {
				f.Close()
				return nil, err
			}
		}
	}
	return f, nil
}
