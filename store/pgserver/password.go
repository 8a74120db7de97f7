//go:build unix

package pgserver

import (
	"crypto/rand"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
)

// newPassword writes a random password of 24 bytes, in hexadecimal, to the password file,
// replacing what an interrupted start left there.
func newPassword(dataDir string) (string, error) {
	random := make([]byte, 24)
	_, _ = rand.Read(random) // never fails: the runtime ends the program instead
	password := hex.EncodeToString(random)

	path := filepath.Join(dataDir, "password")
	if err := os.Remove(path); err != nil && !errors.Is(err, os.ErrNotExist) {
		return "", fmt.Errorf("replace the password file: %w", err)
	}
	f, err := openOwn(path, os.O_WRONLY|os.O_CREATE|os.O_EXCL)
	if err != nil {
		return "", fmt.Errorf("make the password file: %w", err)
	}
	_, err = f.WriteString(password + "\n")
	if err := errors.Join(err, f.Sync(), f.Close()); err != nil {
		return "", fmt.Errorf("write the password file %s: %w", path, err)
	}
	return password, nil
}

// readPassword reads the password of an existing cluster.
func readPassword(dataDir string) (string, error) {
	path := filepath.Join(dataDir, "password")
	f, err := openOwn(path, os.O_RDONLY)
	if errors.Is(err, os.ErrNotExist) {
		return "", fmt.Errorf("the password file %s is missing, so the data beside it cannot be opened: put it back from a copy of the data directory", path)
	}
	if err != nil {
		return "", fmt.Errorf("open the password file: %w", err)
	}
	defer f.Close()
	text, err := io.ReadAll(io.LimitReader(f, 1024))
	if err != nil {
		return "", fmt.Errorf("read the password file %s: %w", path, err)
	}
	password := strings.TrimSpace(string(text))
	if password == "" {
		return "", fmt.Errorf("the password file %s is empty, so the data beside it cannot be opened: put it back from a copy of the data directory", path)
	}
	return password, nil
}
