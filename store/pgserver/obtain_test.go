//go:build unix

package pgserver

import (
	"errors"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// packageTools writes an apt-get and an apt-cache that know the versions 13, 16 and 17 once
// their lists are updated, and whose installation puts programs into a folder. They note
// whether a cluster of the system was forbidden at the time.
func packageTools(t *testing.T, base string) (bin, target string) {
	t.Helper()
	bin, target = filepath.Join(base, "tools"), filepath.Join(base, "pg")
	for name, script := range map[string]string{
		"apt-cache": `[ -e "$BASE/updated" ] && printf 'postgresql-13 - server\npostgresql-17 - server\npostgresql-16 - server\n'; exit 0`,
		"apt-get": `case "$1" in
update) touch "$BASE/updated" ;;
install)
  for last; do :; done
  major=${last#postgresql-}
  cat "$BASE"/defaults/createcluster.d/*.conf > "$BASE/seen" 
  mkdir -p "$BASE/pg/$major/bin"
  for p in postgres initdb pg_dump; do
    printf '#!/bin/sh\necho "%s (PostgreSQL) %s.1"\n' "$p" "$major" > "$BASE/pg/$major/bin/$p"
    chmod 755 "$BASE/pg/$major/bin/$p"
  done ;;
esac`,
	} {
		if err := os.MkdirAll(bin, 0o755); err != nil {
			t.Fatal(err)
		}
		script = "#!/bin/sh\nBASE='" + base + "'\n" + script + "\n"
		if err := os.WriteFile(filepath.Join(bin, name), []byte(script), 0o755); err != nil {
			t.Fatal(err)
		}
	}
	kept := clusterDefaults
	clusterDefaults = filepath.Join(base, "defaults", "createcluster.d")
	t.Cleanup(func() { clusterDefaults = kept })
	return bin, target
}

func TestObtain(t *testing.T) {
	for _, c := range []struct {
		name  string
		major int // of existing data
		want  []string
	}{
		{"newest", 0, []string{
			"running: apt-get update",
			"running: apt-get install -y --no-install-recommends -o DPkg::Lock::Timeout=300 postgresql-17",
		}},
		{"that of the data", 16, []string{
			"running: apt-get update",
			"running: apt-get install -y --no-install-recommends -o DPkg::Lock::Timeout=300 postgresql-16",
		}},
	} {
		t.Run(c.name, func(t *testing.T) {
			base := newFolder(t)
			bin, target := packageTools(t, base)
			searchOnly(t, bin+":/bin:/usr/bin", filepath.Join(target, "*", "bin"))
			if onPath := searched("/bin:/usr/bin", nil); len(onPath) > 0 {
				t.Fatalf("this test needs /usr/bin without a Postgres server, found %v", onPath)
			}
			dataDir := filepath.Join(base, "data")
			if c.major != 0 {
				madeBy(t, dataDir, c.major)
			}
			var said []string
			cfg := Config{DataDir: dataDir, Say: func(line string) { said = append(said, line) }}

			forbidden := cfg
			forbidden.NoInstall = true
			if err := Obtain(t.Context(), forbidden); !errors.Is(err, ErrNotInstalled) || !strings.Contains(err.Error(), "--no-install") || !strings.Contains(err.Error(), "apt-get install postgresql-") {
				t.Errorf("forbidden: %v", err)
			}
			if len(said) > 0 {
				t.Errorf("forbidden, and yet: %q", said)
			}
			err := Obtain(t.Context(), cfg)
			if os.Geteuid() != 0 {
				if !errors.Is(err, ErrNotInstalled) || !strings.Contains(err.Error(), "takes root") || len(said) > 0 {
					t.Errorf("as an ordinary user: %v, %q", err, said)
				}
				return
			}
			if err != nil {
				t.Fatal(err)
			}
			if diff := cmp.Diff(c.want, said); diff != "" {
				t.Errorf("commands (-want +got):\n%s", diff)
			}
			if seen, err := os.ReadFile(filepath.Join(base, "seen")); err != nil || !slices.Contains(strings.Split(string(seen), "\n"), "create_main_cluster = false") {
				t.Errorf("during the installation the packages were told %q, %v", seen, err)
			}
			if _, err := os.Stat(filepath.Join(base, "defaults")); !os.IsNotExist(err) {
				t.Errorf("the setting for the installation was left behind: %v", err)
			}
			if err := Obtain(t.Context(), cfg); err != nil || len(said) != len(c.want) {
				t.Errorf("the second time: %v, %q", err, said)
			}
		})
	}
}

// Data of a version that no package source offers are not given to another version.
func TestObtainCannotHelp(t *testing.T) {
	base := newFolder(t)
	bin, target := packageTools(t, base)
	searchOnly(t, bin+":/bin:/usr/bin", filepath.Join(target, "*", "bin"))
	install(t, filepath.Join(target, "17", "bin"), 17, "postgres", "initdb")
	dataDir := filepath.Join(base, "data")
	madeBy(t, dataDir, 99)
	err := Obtain(t.Context(), Config{DataDir: dataDir})
	if os.Geteuid() != 0 {
		if !errors.Is(err, ErrOtherVersion) {
			t.Errorf("got %v", err)
		}
		return
	}
	if err == nil || !strings.Contains(err.Error(), "no package postgresql-99") {
		t.Errorf("got %v", err)
	}
}
