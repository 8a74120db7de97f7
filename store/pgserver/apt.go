//go:build unix

package pgserver

import (
	"context"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
)

// apt installs on Debian and what derives from it.
type apt struct{}

func (apt) program() string { return "apt-get" }

func (apt) advice(major int) string {
	if major == 0 {
		if majors := aptMajors(); len(majors) > 0 {
			major = majors[0]
		} else {
			return fmt.Sprintf("apt-get update, then apt-get install postgresql-NN, NN being %d or newer", oldestMajor)
		}
	}
	return fmt.Sprintf("apt-get install postgresql-%d", major)
}

// install installs one version of the server, with package lists brought up to date where
// they do not hold it or are too old to fetch it.
func (apt) install(ctx context.Context, cfg Config, major int) error {
	fresh := false
	update := func() error {
		fresh = true
		return runInstaller(ctx, cfg, "apt-get", "update")
	}
	majors := aptMajors()
	if len(majors) == 0 || major != 0 && !slices.Contains(majors, major) {
		if err := update(); err != nil {
			return err
		}
		majors = aptMajors()
	}
	switch {
	case len(majors) == 0:
		return fmt.Errorf("apt-get offers no package postgresql-NN with NN %d or newer: add a package source that does", oldestMajor)
	case major == 0:
		major = majors[0]
	case !slices.Contains(majors, major):
		return fmt.Errorf("apt-get offers no package postgresql-%d: add a package source that does", major)
	}
	restore, err := withoutMainCluster()
	if err != nil {
		return err
	}
	// The package of the server brings the client programs of the same version.
	command := []string{"apt-get", "install", "-y", "--no-install-recommends", "-o", "DPkg::Lock::Timeout=300", "postgresql-" + strconv.Itoa(major)}
	err = runInstaller(ctx, cfg, command...)
	if err != nil && !fresh && ctx.Err() == nil {
		if err = update(); err == nil {
			err = runInstaller(ctx, cfg, command...)
		}
	}
	return errors.Join(err, restore())
}

// aptMajors lists the versions of the server the package lists offer, newest first.
func aptMajors() []int {
	cmd := exec.Command("apt-cache", "search", "--names-only", `^postgresql-[0-9]+$`)
	cmd.Env = childEnvironment()
	out, err := cmd.Output()
	if err != nil {
		return nil
	}
	var majors []int
	for line := range strings.Lines(string(out)) {
		name, _, _ := strings.Cut(line, " ")
		if major, err := strconv.Atoi(strings.TrimPrefix(strings.TrimSpace(name), "postgresql-")); err == nil && major >= oldestMajor {
			majors = append(majors, major)
		}
	}
	slices.Sort(majors)
	slices.Reverse(majors)
	return majors
}

// clusterDefaults is where Debian's packages look for settings of the clusters they make.
var clusterDefaults = "/etc/postgresql-common/createcluster.d"

// withoutMainCluster keeps Debian from making and starting a cluster of its own, which a
// first installation of a server does. A file among the defaults of new clusters says so for
// the length of the installation; the returned function removes it again, and the folders
// made for it where they are empty, so that later installations by the operator do as ever.
func withoutMainCluster() (restore func() error, err error) {
	var made []string // in the order of making
	restore = func() error {
		var errs []error
		for _, path := range slices.Backward(made) {
			err := os.Remove(path)
			// A folder that is in use by now belongs to the packages.
			if err != nil && !errors.Is(err, os.ErrNotExist) && path == made[len(made)-1] {
				errs = append(errs, fmt.Errorf("remove a setting made for the installation: %w", err))
			}
		}
		return errors.Join(errs...)
	}
	for _, dir := range []string{filepath.Dir(clusterDefaults), clusterDefaults} {
		err := os.Mkdir(dir, 0o755)
		if err == nil {
			made = append(made, dir)
		} else if !errors.Is(err, os.ErrExist) {
			return nil, errors.Join(fmt.Errorf("keep the packages from starting a server: %w", err), restore())
		}
	}
	file := filepath.Join(clusterDefaults, "difaudit.conf")
	made = append(made, file)
	if err := os.WriteFile(file, []byte("# for the length of an installation by difaudit\ncreate_main_cluster = false\n"), 0o644); err != nil {
		return nil, errors.Join(fmt.Errorf("keep the packages from starting a server: %w", err), restore())
	}
	return restore, nil
}
