//go:build unix && !linux

package pgserver

import (
	"os/exec"
	"strconv"
	"strings"
)

// postgresAt returns the main Postgres process of the cluster, known by its command line, if
// it lives. Its other processes end with it.
func postgresAt(cluster string) []int {
	out, err := exec.Command("ps", "-axww", "-o", "pid=,command=").Output()
	if err != nil {
		return nil
	}
	var pids []int
	for line := range strings.Lines(string(out)) {
		number, command, _ := strings.Cut(strings.TrimSpace(line), " ")
		pid, err := strconv.Atoi(number)
		if err == nil && strings.Contains(command, "postgres -D "+cluster+" ") {
			pids = append(pids, pid)
		}
	}
	return pids
}
