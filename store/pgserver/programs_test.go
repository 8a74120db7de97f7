//go:build unix

package pgserver

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// install writes programs that answer for their version and can do nothing else.
func install(t *testing.T, dir string, major int, names ...string) {
	t.Helper()
	if err := os.MkdirAll(dir, 0o755); err != nil {
		t.Fatal(err)
	}
	for _, name := range names {
		script := fmt.Sprintf("#!/bin/sh\necho '%s (PostgreSQL) %d.3 (Test %d.3-1)'\n", name, major, major)
		if err := os.WriteFile(filepath.Join(dir, name), []byte(script), 0o755); err != nil {
			t.Fatal(err)
		}
	}
}

// madeBy writes what tells the version of a cluster.
func madeBy(t *testing.T, dataDir string, major int) {
	t.Helper()
	cluster := filepath.Join(dataDir, "cluster")
	if err := os.MkdirAll(cluster, 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(cluster, "PG_VERSION"), fmt.Appendf(nil, "%d\n", major), 0o644); err != nil {
		t.Fatal(err)
	}
}

// searchOnly replaces the usual folders for the length of a test.
func searchOnly(t *testing.T, path string, patterns ...string) {
	t.Helper()
	t.Setenv("PATH", path)
	kept := folders
	folders = patterns
	t.Cleanup(func() { folders = kept })
}

func TestFindPrefersPathThenNewestThenTheVersionOfTheData(t *testing.T) {
	base := newFolder(t)
	servers := []string{"postgres", "initdb"}
	for _, major := range []int{9, 14, 15, 16, 17} {
		install(t, filepath.Join(base, "lib", fmt.Sprint(major), "bin"), major, append(servers, "pg_dump", "pg_restore", "psql")...)
	}
	install(t, filepath.Join(base, "half", "99", "bin"), 99, "postgres") // no initdb
	onPath := filepath.Join(base, "path")
	install(t, onPath, 18, servers...)
	linked := filepath.Join(base, "linked")
	if err := os.Mkdir(linked, 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.Symlink(filepath.Join(base, "lib", "16", "bin", "postgres"), filepath.Join(linked, "postgres")); err != nil {
		t.Fatal(err)
	}
	lib, half := filepath.Join(base, "lib", "*", "bin"), filepath.Join(base, "half", "*", "bin")
	dataDir := func(major int) string {
		dir := filepath.Join(base, fmt.Sprintf("data-of-%d", major))
		if major != 0 {
			madeBy(t, dir, major)
		}
		return dir
	}
	for _, c := range []struct {
		path  string
		major int // of the data; 0: none
		want  string
	}{
		{"/nonexistent", 0, filepath.Join(base, "lib", "17", "bin")},
		{"/nonexistent", 15, filepath.Join(base, "lib", "15", "bin")},
		{onPath, 0, onPath},
		{onPath, 16, filepath.Join(base, "lib", "16", "bin")},
		{"relative:" + linked, 0, filepath.Join(base, "lib", "16", "bin")},
		{filepath.Join(base, "lib", "14", "bin"), 0, filepath.Join(base, "lib", "17", "bin")}, // too old
	} {
		searchOnly(t, c.path+":/bin:/usr/bin", half, lib)
		p, err := Find("", dataDir(c.major))
		if err != nil || filepath.Dir(p.Postgres) != c.want {
			t.Errorf("PATH %s, data of %d: %s, %v, want %s", c.path, c.major, p.Postgres, err, c.want)
		}
	}

	searchOnly(t, onPath+":/bin:/usr/bin", lib)
	p, err := Find("", dataDir(0))
	if err != nil {
		t.Fatal(err)
	}
	if p.Major != 18 || p.PgDump != "" || p.PgRestore != "" || p.Psql != "" {
		t.Errorf("%+v: want version 18 and no clients of another version", p)
	}
	install(t, filepath.Join(base, "lib", "18", "bin"), 18, "postgres", "initdb", "pg_dump")
	if p, err = Find("", dataDir(0)); err != nil || p.PgDump != filepath.Join(base, "lib", "18", "bin", "pg_dump") {
		t.Errorf("%+v, %v: want the pg_dump of the same version elsewhere", p, err)
	}
}

func TestOtherMajorIsRefused(t *testing.T) {
	base := newFolder(t)
	installed, err := Find("", "")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		major int
		says  []string
	}{
		{99, []string{"Postgres 99", fmt.Sprintf("version %d", installed.Major), "install Postgres 99", "difaudit backup", "difaudit restore"}},
		{12, []string{"Postgres 12", fmt.Sprintf("version %d", installed.Major), "too old"}},
	} {
		dataDir := filepath.Join(base, fmt.Sprint("data-of-", c.major))
		madeBy(t, dataDir, c.major)
		for _, binDir := range []string{"", filepath.Dir(installed.Postgres)} {
			_, err := Start(t.Context(), Config{DataDir: dataDir, BinDir: binDir})
			if !errors.Is(err, ErrOtherVersion) {
				t.Fatalf("data of %d: %v, want ErrOtherVersion", c.major, err)
			}
			for _, want := range c.says {
				if !strings.Contains(err.Error(), want) {
					t.Errorf("data of %d: %q does not say %q", c.major, err, want)
				}
			}
		}
		if _, err := os.Stat(filepath.Join(dataDir, "cluster", "PG_VERSION")); err != nil {
			t.Errorf("the data were touched: %v", err)
		}
	}
}

// A folder that was asked for and does not work is an error, not a reason to search.
func TestBadFolderOfPrograms(t *testing.T) {
	t.Parallel()
	base := newFolder(t)
	install(t, filepath.Join(base, "old"), 14, "postgres", "initdb")
	install(t, filepath.Join(base, "half"), 16, "postgres")
	install(t, filepath.Join(base, "mixed"), 16, "postgres")
	install(t, filepath.Join(base, "mixed"), 17, "initdb")
	for dir, script := range map[string]string{
		"broken":  "#!/bin/sh\necho 'cannot find libsomething' >&2\nexit 127\n",
		"another": "#!/bin/sh\necho 'some program 16.3'\n",
	} {
		install(t, filepath.Join(base, dir), 16, "initdb")
		if err := os.WriteFile(filepath.Join(base, dir, "postgres"), []byte(script), 0o755); err != nil {
			t.Fatal(err)
		}
	}
	for dir, want := range map[string]string{
		"absent": "no such file", "old": "version 14: version 15 or newer", "half": "initdb", "mixed": "of one version",
		"broken": "cannot find libsomething", "another": "not that of a Postgres program",
	} {
		binDir := filepath.Join(base, dir)
		_, err := Start(t.Context(), Config{DataDir: filepath.Join(base, "data"), BinDir: binDir})
		if err == nil || !strings.Contains(err.Error(), want) || !strings.Contains(err.Error(), binDir) {
			t.Errorf("%s: %v, want an error naming the folder and saying %q", dir, err, want)
		}
		if err := Obtain(t.Context(), Config{DataDir: filepath.Join(base, "data"), BinDir: binDir}); err == nil {
			t.Errorf("%s: Obtain takes it for usable", dir)
		}
	}
}

func TestDefaultDataDir(t *testing.T) {
	t.Setenv("XDG_DATA_HOME", "/somewhere")
	want := "/somewhere/difaudit"
	if os.Geteuid() == 0 {
		want = "/var/lib/difaudit"
	}
	if got, err := DefaultDataDir(); err != nil || got != want {
		t.Errorf("%q, %v, want %q", got, err, want)
	}
}
