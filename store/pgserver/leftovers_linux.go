package pgserver

import (
	"errors"
	"os"
	"path/filepath"
	"strconv"
	"strings"
)

// postgresAt returns the processes named postgres whose working directory is the cluster,
// which each of its processes makes its own. Where the system hides working directories
// (root without the right to trace, as in many containers), the command line must name the
// cluster instead, as that of the main process does.
func postgresAt(cluster string) []int {
	entries, err := os.ReadDir("/proc")
	if err != nil {
		return nil
	}
	var pids []int
	for _, e := range entries {
		pid, err := strconv.Atoi(e.Name())
		if err != nil {
			continue
		}
		proc := filepath.Join("/proc", e.Name())
		name, err := os.ReadFile(filepath.Join(proc, "comm"))
		if err != nil || strings.TrimSpace(string(name)) != "postgres" {
			continue
		}
		cwd, err := os.Readlink(filepath.Join(proc, "cwd"))
		if errors.Is(err, os.ErrPermission) {
			line, _ := os.ReadFile(filepath.Join(proc, "cmdline"))
			if strings.Contains(string(line), "\x00-D\x00"+cluster+"\x00") {
				pids = append(pids, pid)
			}
			continue
		}
		if err == nil && cwd == cluster {
			pids = append(pids, pid)
		}
	}
	return pids
}
