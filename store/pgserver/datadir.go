//go:build unix

package pgserver

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

// prepareDataDir makes the data directory where it is missing and returns its path with links
// resolved. Made by root it can be passed through by the account Postgres runs as, but not
// listed; made by a user it is that user's alone.
func prepareDataDir(dataDir string) (string, error) {
	if _, err := os.Stat(filepath.Join(dataDir, "PG_VERSION")); err == nil {
		return "", fmt.Errorf("%s holds the data of a Postgres itself: name the folder in which difaudit is to keep its own with --data", dataDir)
	}
	if err := os.MkdirAll(filepath.Dir(dataDir), 0o755); err != nil {
		return "", fmt.Errorf("make the data directory: %w", err)
	}
	mode := os.FileMode(0o700)
	if os.Geteuid() == 0 {
		mode = 0o711
	}
	switch err := os.Mkdir(dataDir, mode); {
	case err == nil:
		if err := os.Chmod(dataDir, mode); err != nil { // whatever the umask
			return "", fmt.Errorf("make the data directory: %w", err)
		}
	case !errors.Is(err, os.ErrExist):
		return "", fmt.Errorf("make the data directory: %w", err)
	}
	resolved, err := filepath.EvalSymlinks(dataDir)
	if err != nil {
		return "", fmt.Errorf("resolve the data directory: %w", err)
	}
	info, err := os.Stat(resolved)
	if err != nil {
		return "", fmt.Errorf("read the data directory: %w", err)
	}
	if !info.IsDir() {
		return "", fmt.Errorf("%s is not a folder: name another data directory with --data", dataDir)
	}
	return resolved, nil
}
